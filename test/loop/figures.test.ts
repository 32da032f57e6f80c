import { describe, expect, it } from 'vitest';
import { assessLoop } from '../../src/loop/assess.ts';
import { costOf } from '../../src/loop/cost.ts';
import type { LoopRecord } from '../../src/loop/record.ts';
import { durationOf, referenceAt, sampleReferences } from '../../src/loop/reference.ts';
import { diagonal, fromRows } from '../../src/numerics/matrix.ts';
import { definePlant } from '../../src/plant/plant.ts';
import { linearProblem } from '../mpc/linearProblem.ts';

/** One state, which is the output, one input. */
const plant = definePlant({
  name: 'cart',
  description: 'A cart.',
  states: [{ name: 'x1', unit: 'm', min: -1, max: 1 }],
  inputs: [{ name: 'u1', unit: 'N', min: -1, max: 1, rate: 10 }],
  outputs: [{ name: 'y1', unit: 'm', min: -1, max: 1, of: 'x1' }],
  parameters: {},
  derivative: (_x, u) => [u[0]],
  operatingPoint: { x: [0], u: [0] },
  hazards: ['none'],
});

const problem = linearProblem(
  { A: [[1]], B: [[1]] },
  {
    horizon: 2,
    preview: false,
    inputLimits: { min: [-1], max: [1] },
    rateLimits: [0.5],
    outputLimits: [{ output: 0, min: -0.5, max: 0.5, weight: 100, fromStep: 1 }],
  },
);

function recordOf(y: number[], r: number[], u: number[], fine = 1): LoopRecord {
  const steps = u.length;
  const coarse = y.filter((_, i) => i % fine === 0);
  return {
    controller: 'test',
    sampleTime: 1,
    steps,
    diverged: false,
    nx: 1,
    nu: 1,
    ny: 1,
    x: Float64Array.from(coarse),
    y: Float64Array.from(coarse),
    reference: Float64Array.from(r),
    u: Float64Array.from(u),
    applied: Float64Array.from(u),
    fine,
    yFine: Float64Array.from(y),
    status: u.map(() => 'optimal'),
    fallback: u.map(() => 'none'),
    iterations: u.map((_, k) => k),
    outsideData: 0,
    cost: { tracking: 0, level: 0, move: 0, excess: 0, total: 0 },
  };
}

const zeros = (n: number) => new Array<number>(n).fill(0);

describe('limits broken, counted by hand', () => {
  it('two excursions: count, share of time, worst excess, longest and first', () => {
    const y = [0, 0.6, 0.8, 0, 0, -0.7, 0, 0, 0, 0, 0];
    const [limit] = assessLoop(recordOf(y, zeros(11), zeros(10)), problem, plant).limits;
    expect(limit).toMatchObject({ kind: 'output', channel: 'y1', unit: '1', count: 2, longest: 2, first: 1 });
    expect(limit.worst).toBeCloseTo(0.3, 14);
    expect(limit.worstOfRange).toBeCloseTo(0.15, 14);
    expect(limit.share).toBeCloseTo(3 / 11, 14);
  });

  it('an excursion between two samples is seen on the fine grid', () => {
    const y = [0, 0, 0.9, 0, 0, 0, 0, 0, 0];
    const [limit] = assessLoop(recordOf(y, zeros(3), zeros(2), 4), problem, plant).limits;
    expect(limit).toMatchObject({ count: 1, longest: 0.25, first: 0.5 });
  });

  it('nothing broken: no first, and zeros', () => {
    const [limit] = assessLoop(recordOf(zeros(11), zeros(11), zeros(10)), problem, plant).limits;
    expect(limit).toMatchObject({ count: 0, share: 0, worst: 0, longest: 0, first: null });
  });

  it('a move faster than the rate limit is reported as such', () => {
    const report = assessLoop(recordOf(zeros(4), zeros(4), [0, 0.9, 0.9]), problem, plant);
    expect(report.limits.find(({ kind }) => kind === 'rate')).toMatchObject({ count: 1, unit: 'N/s' });
    expect(report.limits.find(({ kind }) => kind === 'input')).toMatchObject({ count: 0 });
  });

  it('a NaN output is outside every limit: counted, the worst excess NaN, and the tracking figures show it too', () => {
    const y = zeros(11);
    y[4] = Number.NaN;
    const report = assessLoop(recordOf(y, zeros(11), zeros(10)), problem, plant);
    expect(report.limits[0]).toMatchObject({ count: 1, longest: 1, first: 4, worst: Number.NaN });
    expect(report.tracking[0].rms).toBeNaN();
  });
});

describe('tracking figures, closed form', () => {
  it('a first-order response settles to 2 % after ln 50 time constants and does not overshoot', () => {
    const tau = 5;
    const r = Array.from({ length: 101 }, (_, k) => (k >= 20 ? 0.4 : 0));
    const y = r.map((_, k) => (k >= 20 ? 0.4 * (1 - Math.exp(-(k - 20) / tau)) : 0));
    const [report] = assessLoop(recordOf(y, r, zeros(100)), problem, plant).tracking;
    expect(report).toMatchObject({ referenceSteps: 1, settled: 1, overshoot: 0 });
    expect(report.settling).toBe(Math.ceil(tau * Math.log(50)));
    expect(Math.abs(report.offset ?? 1)).toBeLessThan(1e-6);
  });

  it('overshoot is a share of the step, also of a step down', () => {
    const r: number[] = Array.from({ length: 61 }, (_, k) => (k >= 20 ? -0.5 : 0));
    const y = r.slice();
    y[25] = -0.6;
    const [report] = assessLoop(recordOf(y, r, zeros(60)), problem, plant).tracking;
    expect(report.overshoot).toBeCloseTo(20, 10);
  });

  it('an output that is still moving at the end has not settled', () => {
    const r = Array.from({ length: 41 }, (_, k) => (k >= 20 ? 0.5 : 0));
    const [report] = assessLoop(recordOf(zeros(41), r, zeros(40)), problem, plant).tracking;
    expect(report).toMatchObject({ settling: null, settled: 0, referenceSteps: 1 });
    expect(report.offset).toBeCloseTo(-0.5, 14);
  });

  it('what a controller with preview does once it sees the next step is not held against it', () => {
    const seeing = { ...problem, preview: true, horizon: 8 };
    const r = Array.from({ length: 61 }, (_, k) => (k >= 40 ? 0.5 : k >= 20 ? 0.2 : 0));
    const y = r.map((value, k) => (k >= 34 && k < 40 ? 0.45 : value));
    expect(assessLoop(recordOf(y, r, zeros(60)), problem, plant).tracking[0].overshoot).toBeGreaterThan(100);
    expect(assessLoop(recordOf(y, r, zeros(60)), seeing, plant).tracking[0].overshoot).toBe(0);
  });
});

describe('input effort, counted by hand', () => {
  it('rms, fastest move, share at a limit, reversals', () => {
    const u = [0.5, -0.5, 0.5, 1, 1];
    const [effort] = assessLoop(recordOf(zeros(6), zeros(6), u), problem, plant).effort;
    expect(effort.rms).toBeCloseTo(Math.sqrt((0.75 + 2) / 5), 14);
    expect(effort.worstRate).toBe(1);
    expect(effort.atLimit).toBeCloseTo(0.4, 14);
    // Moves +0.5, −1, +1, +0.5, 0: two reversals in five seconds.
    expect(effort.reversals).toBeCloseTo(0.4, 14);
  });
});

describe('the cost of a run, by hand', () => {
  it('adds tracking, moves, level and excess with the weights of the problem', () => {
    const weighted = { ...problem, Q: diagonal([2]), R: fromRows([[3]]), S: fromRows([[5]]) };
    const signals = recordOf([0, 0.7, 0.1], [9, 0.5, 0], [0.2, 0.4]);
    const cost = costOf(signals, weighted, plant);
    expect(cost.tracking).toBeCloseTo(2 * (0.2 ** 2 + 0.1 ** 2), 14);
    expect(cost.move).toBeCloseTo(3 * (0.2 ** 2 + 0.2 ** 2), 14);
    expect(cost.level).toBeCloseTo(5 * (0.2 ** 2 + 0.4 ** 2), 14);
    expect(cost.excess).toBeCloseTo(100 * 0.2 ** 2, 13);
    expect(cost.total).toBeCloseTo(cost.tracking + cost.move + cost.level + cost.excess, 14);
  });
});

describe('references', () => {
  const steps = { output: 'y1', shape: 'steps', values: [1, 2], time: 0.3, times: [] } as const;
  const sine = { output: 'y1', shape: 'sine', values: [0.5, 2], time: 4, times: [] } as const;
  const ramp = { output: 'y1', shape: 'ramp', values: [1, 3], time: 2, times: [] } as const;
  const points = { output: 'y1', shape: 'points', values: [0, 4, 2], time: 0, times: [0, 1, 3] } as const;

  it('have their shapes, closed form', () => {
    expect([0, 0.29, 0.3, 9].map((t) => referenceAt(steps, t))).toEqual([1, 1, 2, 2]);
    expect(referenceAt(sine, 1)).toBeCloseTo(2.5, 14);
    expect([0, 1, 5].map((t) => referenceAt(ramp, t))).toEqual([1, 2, 3]);
    expect([0, 0.5, 2, 9].map((t) => referenceAt(points, t))).toEqual([0, 2, 3, 2]);
  });

  it('of several for one output each begins when the one before it has ended; without one the output rests', () => {
    const r = sampleReferences([steps, ramp], [{ name: 'y1' }, { name: 'y2' }], [7, 8], 0.1, 30);
    const first = Array.from({ length: 30 }, (_, k) => r[2 * k]);
    expect(durationOf(steps)).toBeCloseTo(0.6, 14);
    expect(first.slice(0, 8).map((v) => Math.round(v * 100) / 100)).toEqual([1, 1, 1, 2, 2, 2, 1, 1.1]);
    expect(first[29]).toBe(3);
    expect(Array.from({ length: 30 }, (_, k) => r[2 * k + 1]).every((v) => v === 8)).toBe(true);
  });

  it('switch exactly on the sample, although k·Ts may round below the time', () => {
    const r = sampleReferences([{ ...steps, time: 0.7 }], [{ name: 'y1' }], [0], 0.1, 10);
    expect(Array.from(r)).toEqual([1, 1, 1, 1, 1, 1, 1, 2, 2, 2]);
  });
});

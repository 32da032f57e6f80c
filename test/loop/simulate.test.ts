import { describe, expect, it } from 'vitest';
import type { CoordinateSettings } from '../../src/data/coordinates.ts';
import type { ScenarioSettings } from '../../src/loop/scenario.ts';
import { simulateLoop } from '../../src/loop/simulate.ts';
import type { Controller } from '../../src/mpc/controller.ts';
import { fromRows } from '../../src/numerics/matrix.ts';
import { definePlant } from '../../src/plant/plant.ts';
import { linearPredictor, linearProblem } from '../mpc/linearProblem.ts';

/** A lag `x' = (u − x) / tau`. */
const lag = definePlant({
  name: 'lag',
  description: 'A first-order lag.',
  states: [{ name: 'x1', unit: '1', min: -1, max: 1 }],
  inputs: [{ name: 'u1', unit: '1', min: -1, max: 1 }],
  outputs: [{ name: 'y1', unit: '1', min: -1, max: 1, of: 'x1' }],
  parameters: { tau: { unit: 's', value: 0.5 } },
  derivative: (x, u, { tau }) => [(u[0] - x[0]) / tau],
  operatingPoint: { x: [0], u: [0] },
  hazards: ['none'],
});
const Ts = 0.1;
const problem = {
  ...linearProblem({ A: [[1]], B: [[1]] }, { horizon: 3 }),
  predictor: linearPredictor(fromRows([[1]]), fromRows([[1]]), fromRows([[1]]), Ts),
};
const still: ScenarioSettings = {
  duration: 2,
  start: {},
  references: [],
  delay: 0,
  noise: 0,
  disturbances: [],
  parameterFactors: {},
};

/** A controller that sends what it is told, and keeps what it saw. */
function scripted(send: (k: number) => number) {
  const seen: { x: number; all: number[]; reference: number[] }[] = [];
  let k = 0;
  const controller: Controller = {
    step: (x, reference) => {
      seen.push({ x: x[0], all: Array.from(x), reference: Array.from(reference) });
      return {
        u: Float64Array.of(send(k++)),
        status: 'optimal',
        fallback: 'none',
        iterations: 1,
        plannedOutputs: new Float64Array(3),
        plannedInputs: new Float64Array(3),
      };
    },
    reset: () => {
      k = 0;
    },
  };
  return { controller, seen };
}

function run(
  scenario: Partial<ScenarioSettings>,
  send: (k: number) => number,
  plant = lag,
  coordinates: CoordinateSettings = { read: 'state', outputLags: 0, inputLags: 0 },
) {
  const { controller, seen } = scripted(send);
  const outcome = simulateLoop({
    name: 'scripted',
    plant,
    controller,
    outputsSeen: ['y1'],
    problem,
    scenario: { ...still, ...scenario },
    coordinates,
    substeps: 8,
    seed: 3,
  });
  return { ...outcome, seen };
}

describe('the closed loop on the true plant', () => {
  it('integrates the lag under a held input to its closed form, between samples too', () => {
    const { record } = run({}, () => 0.6);
    const exact = (t: number) => 0.6 * (1 - Math.exp(-t / 0.5));
    expect(record.steps).toBe(20);
    record.yFine.forEach((y, i) => {
      expect(Math.abs(y - exact((i * Ts) / record.fine))).toBeLessThan(1e-7);
    });
  });

  it('a delay of d samples shifts what reaches the plant by d, the operating input before', () => {
    const { record } = run({ delay: 3 }, (k) => (k + 1) / 100);
    expect(Array.from(record.applied.slice(0, 5))).toEqual([0, 0, 0, 0.01, 0.02]);
    expect(Array.from(record.u.slice(0, 3))).toEqual([0.01, 0.02, 0.03]);
  });

  it('the actuator saturates, and a disturbance is added behind it from its time on', () => {
    const { record } = run({ disturbances: [{ input: 'u1', value: 0.25, from: 1 }] }, () => 7);
    expect(record.applied[0]).toBe(1);
    expect(record.applied[12]).toBe(1.25);
  });

  it('the actuator follows no faster than its rate, from the operating input on, by hand', () => {
    const slow = { ...lag, inputs: [{ ...lag.inputs[0], rate: 2 }] };
    const { record } = run({}, (k) => (k < 8 ? 7 : -0.1), slow);
    const applied = Array.from(record.applied.slice(0, 14), (u) => Math.round(u * 1e12) / 1e12);
    expect(applied).toEqual([0.2, 0.4, 0.6, 0.8, 1, 1, 1, 1, 0.8, 0.6, 0.4, 0.2, 0, -0.1]);
    expect(record.u[0]).toBe(7);
  });

  it('delayed inputs that the controller sees are those of the actuator: no disturbance leaks into them', () => {
    const { seen } = run(
      { delay: 2, disturbances: [{ input: 'u1', value: 0.25, from: 0 }] },
      (k) => 3 - k,
      lag,
      { read: 'delays', outputLags: 0, inputLags: 1 },
    );
    expect(seen.slice(0, 9).map(({ all }) => all[1])).toEqual([0, 0, 0, 1, 1, 1, 0, -1, -1]);
  });

  it('a parameter off nominal changes the true plant, closed form', () => {
    const { record } = run({ parameterFactors: { tau: 2 } }, () => 0.6);
    expect(record.y[10]).toBeCloseTo(0.6 * (1 - Math.exp(-1 / 1)), 7);
  });

  it('noise is seen by the controller and not by the record, with the standard deviation asked for', () => {
    const { record, seen } = run({ duration: 200, noise: 0.02 }, () => 0);
    expect(record.y.every((y) => y === 0)).toBe(true);
    const rms = Math.sqrt(seen.reduce((sum, { x }) => sum + x * x, 0) / seen.length);
    // 2,000 draws: the estimate is within 8 % with probability far above 0.999999.
    expect(Math.abs(rms / 0.02 - 1)).toBeLessThan(0.08);
  });

  it('shows the controller the reference from the next sample on', () => {
    const references = [{ output: 'y1', shape: 'steps', values: [0.1, 0.2], time: 0.5, times: [] }] as const;
    const { seen } = run({ references }, () => 0);
    expect(seen[0].reference).toEqual([0.1, 0.1, 0.1]);
    expect(seen[2].reference).toEqual([0.1, 0.1, 0.2]);
    expect(seen[4].reference).toEqual([0.2, 0.2, 0.2]);
  });

  it('ends when the plant runs away, and says so', () => {
    const { record } = run({ duration: 10 }, () => 1, {
      ...lag,
      derivative: (x) => [5 * x[0] + 1],
    });
    expect(record.diverged).toBe(true);
    expect(record.steps).toBeLessThan(100);
    expect(record.u).toHaveLength(record.steps);
    expect(record.y.every(Number.isFinite)).toBe(true);
  });

  it('starts where the scenario says, and is the same run for the same seed', () => {
    const scenario = { start: { x1: -0.4 }, noise: 0.1 };
    const first = run(scenario, () => 0.1);
    expect(first.record.y[0]).toBe(-0.4);
    expect(run(scenario, () => 0.1).seen).toEqual(first.seen);
  });
});

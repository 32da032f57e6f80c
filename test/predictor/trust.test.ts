import { describe, expect, it } from 'vitest';
import type { BoundLifting } from '../../src/lift/lifting.ts';
import { createRandom } from '../../src/numerics/random.ts';
import { assessTrust, type TrustRequest } from '../../src/predictor/assessTrust.ts';
import { fitPredictor } from '../../src/predictor/fit.ts';
import { predictByFloorInto } from '../../src/predictor/floor.ts';
import { predictWindows } from '../../src/predictor/predict.ts';
import { bindPlainLifting, fitPlainLinear, linearisePredictor } from '../../src/predictor/rivals.ts';
import type { TrustModel } from '../../src/predictor/trust.ts';
import { UnusableDataError } from '../../src/predictor/unusableData.ts';
import { cutWindows, type Windows } from '../../src/predictor/windows.ts';
import { channels, largestDifference, liftBy, rk4, simulate, thinPlates, unitScaling } from './synthetic.ts';

const role = (t: number) => (t % 4 === 3 ? 'held-out' : 'fit');
const scaling = { ...unitScaling(2, 1), x: { centre: [0, 0], half: [2, 5] } };
const common = { scaling, outputs: channels('y', 1), readout: [0] };

/** A hardening spring with friction. */
const spring = (x: ArrayLike<number>, u: ArrayLike<number>) => [
  x[1],
  -x[0] - 4 * x[0] ** 3 - 0.3 * x[1] + 2 * u[0],
];
const springs = simulate({
  step: (x, u) => rk4((a, b) => spring(a, b), x, u, 0.1),
  nx: 2,
  nu: 1,
  trajectories: 60,
  steps: 50,
  seed: 2,
  role,
});
const springPlant = {
  name: 'spring',
  description: '',
  states: channels('x', 2),
  inputs: channels('u', 1),
  outputs: [],
  parameters: {},
  derivative: spring,
  operatingPoint: { x: [0, 0], u: [0] },
  hazards: [],
};

function assess(
  dataset: TrustRequest['dataset'],
  lifted: ReturnType<typeof liftBy>,
  horizon = 10,
  more = {},
) {
  const settings = { form: 'linear', route: 'auto', ridge: 0 } as const;
  const predictor = fitPredictor({ ...common, ...lifted, dataset, settings, horizon });
  const plainLinear = fitPlainLinear({ ...common, dataset });
  const linearised = linearisePredictor({
    ...common,
    plant: springPlant,
    operatingPoint: springPlant.operatingPoint,
    sampleTime: 0.1,
  });
  const request = { dataset, predictor, bound: lifted.bound, rivals: { plainLinear, linearised } };
  return assessTrust({ ...request, horizon, tolerance: 0.05, ...more });
}

const rmsOf = (curve: ReturnType<typeof assess>, model: TrustModel) => {
  const series = curve.series.find((s) => s.model === model);
  if (!series) throw new Error(`no series ${model}`);
  return series;
};

/** The floor at every step of the windows. */
function predictFloor(fit: Windows, held: Windows, bound: BoundLifting): Float64Array {
  const out = new Float64Array(held.states.length);
  predictByFloorInto(out, fit, held, bound, 0);
  return out;
}

describe('the trust curve', () => {
  const lifted = thinPlates(30, createRandom(1), true);
  const curve = assess(springs, lifted);

  it('has every model over twice the horizon, at least 20 steps, on the same starts', () => {
    expect(curve.steps).toEqual(Array.from({ length: 20 }, (_, j) => j + 1));
    expect(curve.series.map((s) => s.model)).toEqual([
      'lifted',
      're-lifted',
      'plain-linear',
      'linearised',
      'persistence',
      'floor',
    ]);
    expect(curve.starts).toBe(15 * 31);
    for (const s of curve.series) {
      for (const list of [s.rms, s.q50, s.q90, s.q95, ...s.rmsInUnits]) expect(list.length).toBe(20);
      s.rms.forEach((rms, j) => {
        // RMS over coordinates and starts, from the errors in units (relation).
        const [a, b] = s.rmsInUnits.map((units, i) => units[j] / scaling.x.half[i]);
        expect(rms).toBeCloseTo(Math.sqrt((a ** 2 + b ** 2) / 2), 12);
        expect(s.q50[j]).toBeLessThanOrEqual(s.q90[j]);
        expect(s.q90[j]).toBeLessThanOrEqual(s.q95[j]);
      });
    }
  });

  it('gives persistence its definition: the error of staying where one is', () => {
    let sum = 0;
    let count = 0;
    for (const t of springs.trajectories.filter((t) => t.role === 'held-out')) {
      for (let k = 0; k + 20 <= t.steps; k++) {
        sum += (t.x[2 * (k + 7)] - t.x[2 * k]) ** 2;
        count++;
      }
    }
    expect(count).toBe(curve.starts);
    expect(rmsOf(curve, 'persistence').rmsInUnits[0][6]).toBeCloseTo(Math.sqrt(sum / count), 12);
  });

  it('says that lifting helps a hardening spring, and for how long it is trusted', () => {
    expect(curve.lifting.helps).toBe(true);
    expect(curve.lifting.ratio).toBeLessThan(0.8);
    expect(curve.lifting.upTo).toBeGreaterThanOrEqual(10);
    const { rms } = rmsOf(curve, 'lifted');
    expect(curve.trustedSteps).toBeGreaterThan(0);
    expect(rms[curve.trustedSteps - 1]).toBeLessThanOrEqual(0.05);
    if (curve.trustedSteps < 20) expect(rms[curve.trustedSteps]).toBeGreaterThan(0.05);
  });

  it('says that lifting does not help a linear plant, where both are exact to rounding', () => {
    const step = (x: readonly number[], u: readonly number[]) => [
      0.9 * x[0] + 0.1 * x[1],
      0.8 * x[1] - 0.1 * x[0] + 0.5 * u[0],
    ];
    const dataset = simulate({ step, nx: 2, nu: 1, trajectories: 40, steps: 40, seed: 6, role });
    const { lifting, trustedSteps } = assess(
      dataset,
      liftBy(2, { 'x1²': (x) => x[0] ** 2, constant: () => 1 }),
    );
    expect(lifting.helps).toBe(false);
    expect(lifting.ratio).toBeCloseTo(1, 3);
    expect(lifting.upTo).toBe(0);
    expect(trustedSteps).toBe(20);
  });

  it('has a floor that the lifted predictor does not beat on the windows that both were fitted to (defining property)', () => {
    const settings = { form: 'linear', route: 'auto', ridge: 0 } as const;
    const windows = cutWindows(springs, 'fit', scaling, 12, 10_000);
    const predictor = fitPredictor({ ...common, ...lifted, dataset: springs, settings, horizon: 12 });
    const floor = predictFloor(windows, windows, lifted.bound);
    const predicted = predictWindows(predictor, lifted.bound, windows);
    const square = (values: Float64Array, j: number) => {
      let sum = 0;
      for (let w = 0; w < windows.count; w++) {
        for (let i = 0; i < 2; i++)
          sum += (values[(w * 12 + j) * 2 + i] - windows.states[(w * 12 + j) * 2 + i]) ** 2;
      }
      return sum;
    };
    for (let j = 0; j < 12; j++) expect(square(floor, j)).toBeLessThanOrEqual(1.0001 * square(predicted, j));
    expect(curve.ratioToFloor).toBeGreaterThan(0.9);
  });

  it('has a floor that is exact where the lifting is exact, at every step ahead, with a function there twice', () => {
    const step = (x: readonly number[], u: readonly number[]) => [
      0.9 * x[0],
      0.8 * x[1] + 0.3 * x[0] ** 2 + 0.2 * u[0],
    ];
    const dataset = simulate({ step, nx: 2, nu: 1, trajectories: 20, steps: 30, seed: 4, role });
    const square = (x: ArrayLike<number>) => x[0] ** 2;
    const { bound } = liftBy(2, { square, again: square });
    const windows = (r: 'fit' | 'held-out') => cutWindows(dataset, r, scaling, 15, 1000);
    const held = windows('held-out');
    // The ridge of 1e-12 (up to 1e-8 for the copy) leaves an error of its size.
    expect(largestDifference(predictFloor(windows('fit'), held, bound), held.states)).toBeLessThan(1e-6);
  });

  it('leaves the floor open where the fitting windows are too few to tell it, and does not count those steps', () => {
    // Windows of 38 steps in trajectories of 50: 13 each, fewer in all than ten for each of 40 coefficients.
    const few = assess(springs, lifted, 10, { steps: 400 });
    const floor = few.series.find(({ model }) => model === 'floor');
    expect(floor?.rms.slice(0, 5).every(Number.isFinite)).toBe(true);
    expect(floor?.rms.at(-1)).toBeNaN();
    expect(floor?.rmsInUnits[0].at(-1)).toBeNaN();
    expect(few.ratioToFloor).toBeGreaterThan(0.5);
  });

  it('leaves several starts in a typical trajectory, and refuses data with nothing held out', () => {
    expect(assess(springs, lifted, 10, { steps: 400 }).steps.length).toBe(38);
    expect(assess(springs, lifted, 45, { steps: 400 }).steps.length).toBe(45);
    const none = { ...springs, trajectories: springs.trajectories.filter((t) => t.role === 'fit') };
    expect(() => assess(none, lifted)).toThrow(UnusableDataError);
  });

  it('counts a prediction that explodes as an infinite error and does not say that it helps', () => {
    const settings = { form: 'linear', route: 'auto', ridge: 0 } as const;
    const predictor = fitPredictor({ ...common, ...lifted, dataset: springs, settings, horizon: 5 });
    const exploding = { ...predictor, A: { ...predictor.A, data: predictor.A.data.map((a) => a * 1e200) } };
    const plainLinear = fitPlainLinear({ ...common, dataset: springs });
    const trust = assessTrust({
      dataset: springs,
      predictor: exploding,
      bound: lifted.bound,
      rivals: { plainLinear, linearised: null },
      horizon: 5,
      tolerance: 0.05,
    });
    expect(trust.series.map((s) => s.model)).not.toContain('linearised');
    expect(rmsOf(trust, 'lifted').rms[4]).toBe(Number.POSITIVE_INFINITY);
    expect(rmsOf(trust, 'lifted').q95[4]).toBe(Number.POSITIVE_INFINITY);
    expect(trust.lifting.helps).toBe(false);
    expect(trust.trustedSteps).toBe(0);
  });
});

describe('the rivals', () => {
  it('linearise exactly about a point that is no equilibrium: one step from it is the affine flow (closed form)', () => {
    // ẋ = −x² + u about x = 2, u = 1: f₀ = −3, F = −4; δ(Ts) = f₀ (e^{F Ts} − 1) / F.
    const plant = {
      ...springPlant,
      states: channels('x', 1),
      derivative: (x: ArrayLike<number>, u: ArrayLike<number>) => [-(x[0] ** 2) + u[0]],
    };
    const unit = { centre: [7], half: [3] };
    const predictor = linearisePredictor({
      plant,
      operatingPoint: { x: [2], u: [1] },
      sampleTime: 0.2,
      scaling: { x: unit, u: { centre: [-1], half: [5] }, y: unit },
      outputs: channels('y', 1),
      readout: [0],
    });
    const z = new Float64Array(2);
    bindPlainLifting(1).liftInto(z, [(2 - 7) / 3]);
    const next =
      predictor.A.data[0] * z[0] + predictor.A.data[1] * z[1] + predictor.B.data[0] * ((1 + 1) / 5);
    const expected = 2 + (-3 * (Math.exp(-0.8) - 1)) / -4;
    expect(7 + 3 * next).toBeCloseTo(expected, 9);
    expect(predictor.fit.route).toBe('given');
  });

  it('refuse a derivative that is not finite at the operating point', () => {
    const plant = { ...springPlant, derivative: () => [Number.NaN, 0] };
    const at = { x: [0, 0], u: [0] };
    expect(() => linearisePredictor({ ...common, plant, operatingPoint: at, sampleTime: 0.1 })).toThrow(
      UnusableDataError,
    );
  });

  it('regress the plain linear model exactly on affine data', () => {
    const step = (x: readonly number[], u: readonly number[]) => [0.5 * x[0] + 0.2 + u[0], x[0] - 0.3 * x[1]];
    const dataset = simulate({ step, nx: 2, nu: 1, trajectories: 4, steps: 20, seed: 1 });
    const { A, B } = fitPlainLinear({ ...common, scaling: unitScaling(2, 1), dataset });
    expect(largestDifference(A.data, [0.5, 0, 0.2, 1, -0.3, 0, 0, 0, 1])).toBeLessThan(1e-13);
    expect(largestDifference(B.data, [1, 0, 0])).toBeLessThan(1e-13);
  });
});

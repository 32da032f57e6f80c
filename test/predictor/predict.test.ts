import { describe, expect, it } from 'vitest';
import { createRandom } from '../../src/numerics/random.ts';
import { fitPredictor } from '../../src/predictor/fit.ts';
import { predict, predictWindows, predictWindowsRelifted, rollOut } from '../../src/predictor/predict.ts';
import { cutWindows } from '../../src/predictor/windows.ts';
import { channels, largestDifference, liftBy, rk4, simulate, thinPlates, unitScaling } from './synthetic.ts';

const flow = (x: readonly number[], u: readonly number[]) => [x[1], -x[0] - x[0] ** 3 + u[0]];
const dataset = simulate({
  step: (x, u) => rk4(flow, x, u, 0.1),
  nx: 2,
  nu: 1,
  trajectories: 20,
  steps: 30,
  seed: 3,
});
const scaling = {
  x: { centre: [0.1, -0.2], half: [2, 0.5] },
  u: { centre: [0.3], half: [4] },
  y: { centre: [0.1], half: [2] },
};
const common = { dataset, scaling, outputs: channels('y', 1), readout: [0], horizon: 5 };

function fitted(form: 'linear' | 'bilinear') {
  const lifted = thinPlates(10, createRandom(8), true);
  return {
    ...lifted,
    predictor: fitPredictor({ ...common, ...lifted, settings: { form, route: 'auto', ridge: 1e-6 } }),
  };
}

describe('roll-out of a predictor', () => {
  for (const form of ['linear', 'bilinear'] as const) {
    it(`of many windows at once is the roll-out of each alone (twin): ${form}`, () => {
      const { bound, predictor } = fitted(form);
      const windows = cutWindows(dataset, 'fit', scaling, 12, 17);
      const together = predictWindows(predictor, bound, windows);
      for (let w = 0; w < 17; w++) {
        const U = windows.inputs.subarray(w * 12, (w + 1) * 12);
        const Z = predict(predictor, bound, windows.start.subarray(2 * w, 2 * w + 2), U, 12);
        const alone = Array.from({ length: 24 }, (_, i) => Z[((i >> 1) + 1) * bound.nz + (i & 1)]);
        expect(largestDifference(together.subarray(24 * w, 24 * (w + 1)), alone)).toBeLessThan(1e-10);
      }
    });

    it(`in physical units is the scaled one mapped back, lifted once or anew (relation): ${form}`, () => {
      const { bound, predictor } = fitted(form);
      const { x, u } = dataset.trajectories[0];
      const windows = cutWindows(dataset, 'fit', scaling, 30, 20);
      for (const mode of ['fixed', 'relifted'] as const) {
        const X = rollOut(predictor, bound, x.subarray(0, 2), u, mode);
        const scaled = (mode === 'fixed' ? predictWindows : predictWindowsRelifted)(
          predictor,
          bound,
          windows,
        );
        expect(X.length).toBe(62);
        for (let k = 0; k < 30; k++) {
          for (let i = 0; i < 2; i++) {
            const mapped = scaling.x.centre[i] + scaling.x.half[i] * scaled[2 * k + i];
            expect(Math.abs(X[2 * (k + 1) + i] - mapped)).toBeLessThan(1e-10);
          }
        }
      }
    });
  }

  it('is exact over 20 steps, lifted once or anew, where the lifting is exact (closed form)', () => {
    // x1⁺ = a x1, x2⁺ = b x2 + c x1² + u: invariant under (x1, x2, x1²).
    const step = (x: readonly number[], u: readonly number[]) => [
      0.9 * x[0],
      0.8 * x[1] + 0.3 * x[0] ** 2 + u[0],
    ];
    const data = simulate({ step, nx: 2, nu: 1, trajectories: 6, steps: 20, seed: 4 });
    const lifted = liftBy(2, { square: (x) => x[0] ** 2 });
    const settings = { form: 'linear', route: 'orthogonal', ridge: 0 } as const;
    const predictor = fitPredictor({
      ...common,
      ...lifted,
      dataset: data,
      scaling: unitScaling(2, 1),
      settings,
    });
    for (const { x, u } of data.trajectories) {
      for (const mode of ['fixed', 'relifted'] as const) {
        const X = rollOut(predictor, lifted.bound, x.subarray(0, 2), u, mode);
        expect(largestDifference(X, x)).toBeLessThan(1e-12);
      }
    }
  });
});

describe('windows of trajectories', () => {
  it('hold the samples as they stand, evenly spaced, and never span two trajectories', () => {
    const numbered = simulate({
      step: (x) => [x[0] + 1],
      nx: 1,
      nu: 1,
      trajectories: 4,
      steps: 9,
      seed: 1,
      role: (t) => (t === 1 ? 'held-out' : 'fit'),
    });
    const windows = cutWindows(numbered, 'fit', unitScaling(1, 1), 7, 100);
    expect(windows.count).toBe(3 * 3);
    for (let w = 0; w < 9; w++) {
      for (let j = 0; j < 7; j++) {
        expect(windows.states[7 * w + j] - windows.start[w]).toBeCloseTo(j + 1, 12);
      }
    }
    const starts = [0, 2, 3].flatMap((t) => Array.from(numbered.trajectories[t].x.subarray(0, 3)));
    expect(Array.from(windows.start)).toEqual(starts);
    expect(Array.from(cutWindows(numbered, 'fit', unitScaling(1, 1), 7, 3).start)).toEqual([
      starts[1],
      starts[4],
      starts[7],
    ]);
    expect(cutWindows(numbered, 'fit', unitScaling(1, 1), 10, 100).count).toBe(0);
  });
});

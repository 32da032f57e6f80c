import { describe, expect, it } from 'vitest';
import { fromRows, zeros } from '../../src/numerics/matrix.ts';
import { chooseRidge } from '../../src/predictor/chooseRidge.ts';
import type { RegressionFactor } from '../../src/predictor/factor.ts';

/** One state, no lifting; the "regression" gives a = 0.5 + ridge, the truth is 0.5 from x = 1, two steps. */
const windows = {
  count: 1,
  steps: 2,
  nx: 1,
  nu: 1,
  start: Float64Array.of(1),
  inputs: Float64Array.of(0, 0),
  states: Float64Array.of(0.5, 0.25),
};
const bound = {
  nx: 1,
  nz: 1,
  liftInto: (z: Float64Array, x: ArrayLike<number>) => z.set(x),
  jacobianInto: (J: Float64Array) => J.fill(1),
};
const choose = (a: (ridge: number) => number) =>
  chooseRidge(
    { solve: (ridge: number) => fromRows([[a(ridge)]]) } as unknown as RegressionFactor,
    windows,
    bound,
    (theta) => ({ A: theta, B: zeros(1, 1), C: fromRows([[1]]), N: [] }),
  );

describe('the choice of the ridge', () => {
  it('judges by the geometric mean over the steps ahead of the RMS errors, closed form', () => {
    const { ridge, tried } = choose((r) => 0.5 + r);
    expect(ridge).toBe(0);
    const last = tried.find((entry) => entry.ridge === 1e-2);
    expect(last?.error).toBeCloseTo(Math.sqrt(0.01 * (0.51 ** 2 - 0.25)), 12);
  });

  it('takes the best in the middle of the grid', () => {
    expect(choose((r) => 0.5 + Math.abs(Math.log10(Math.max(r, 1e-12)) + 5)).ridge).toBe(1e-5);
  });

  it('an exploding predictor loses against any finite one', () => {
    const { ridge, tried } = choose((r) => (r < 1e-3 ? Number.POSITIVE_INFINITY : 9));
    expect(ridge).toBe(1e-3);
    expect(tried[0].error).toBe(Number.POSITIVE_INFINITY);
  });
});

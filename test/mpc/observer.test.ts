import { describe, expect, it } from 'vitest';
import { createObserver } from '../../src/mpc/observer.ts';
import { fromRows, identity } from '../../src/numerics/matrix.ts';
import { bindIdentity, linearPredictor } from './linearProblem.ts';

const A = [
  [0.9, 0.2],
  [-0.1, 0.8],
];
const B = [[0.1], [0.5]];
const predictor = linearPredictor(fromRows(A), fromRows(B), identity(2));

/** The plant itself, with a constant push on each state. */
function next(x: readonly number[], u: number, push: readonly number[] = [0, 0]): number[] {
  return A.map((row, i) => row[0] * x[0] + row[1] * x[1] + B[i][0] * u + push[i]);
}

describe('the disturbance estimate', () => {
  it('closes on a constant push by the factor 1 − gain a sample, closed form of the first-order filter', () => {
    const [gain, push] = [0.25, [0.03, -0.01]];
    const observer = createObserver(predictor, bindIdentity(2), gain);
    let x = [0.2, -0.4];
    observer.measure(x);
    for (let k = 1; k <= 20; k++) {
      const u = Math.sin(k);
      observer.act(Float64Array.of(u));
      x = next(x, u, push);
      observer.measure(x);
      for (let i = 0; i < 2; i++) expect(observer.d[i]).toBeCloseTo(push[i] * (1 - (1 - gain) ** k), 14);
    }
  });

  it('is zero on the true model, and stays so across lost measurements: there is no one-step residual to learn from', () => {
    const observer = createObserver(predictor, bindIdentity(2), 1);
    let x = [1, 1];
    for (let k = 0; k < 30; k++) {
      const lost = k % 7 === 3 || k % 7 === 4;
      expect(observer.measure(lost ? [x[0], Number.NaN] : x)).toBe(!lost);
      for (const value of observer.d) expect(Math.abs(value)).toBeLessThan(1e-14);
      const u = Math.cos(k);
      observer.act(Float64Array.of(u));
      x = next(x, u);
    }
  });

  it('takes infinity for a lost measurement too, and forgets everything on reset', () => {
    const observer = createObserver(predictor, bindIdentity(2), 0.5);
    observer.measure([0, 0]);
    observer.act(Float64Array.of(0));
    observer.measure([1, 1]);
    expect(observer.d[0]).toBe(0.5);
    expect(observer.measure([Number.POSITIVE_INFINITY, 0])).toBe(false);
    expect(observer.d[0]).toBe(0.5);
    observer.reset();
    expect(Array.from(observer.d)).toEqual([0, 0]);
    observer.measure([3, 3]);
    expect(Array.from(observer.d)).toEqual([0, 0]);
  });
});

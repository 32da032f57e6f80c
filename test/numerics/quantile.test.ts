import { describe, expect, it } from 'vitest';
import { quantileOfSorted, quantiles } from '../../src/numerics/quantile.ts';

describe('quantiles', () => {
  it('interpolate at (n − 1) share: the closed form on 0 … 10', () => {
    const values = [10, 3, 7, 1, 9, 0, 5, 2, 8, 4, 6];
    expect(quantiles(values, [0, 0.25, 0.5, 0.95, 1])).toEqual([0, 2.5, 5, 9.5, 10]);
    expect(values[0]).toBe(10);
  });

  it('of one value are that value, of none NaN', () => {
    expect(quantiles([3], [0, 0.3, 1])).toEqual([3, 3, 3]);
    expect(quantileOfSorted([], 0.5)).toBeNaN();
  });

  it('are infinite, not NaN, among infinite values', () => {
    const values = [1, Number.POSITIVE_INFINITY, Number.POSITIVE_INFINITY];
    expect(quantiles(values, [0, 0.75, 0.9])).toEqual([
      1,
      Number.POSITIVE_INFINITY,
      Number.POSITIVE_INFINITY,
    ]);
  });

  it('show a NaN among the values in the uppermost one', () => {
    expect(quantiles([Number.NaN, 1, 2], [0, 1])).toEqual([1, Number.NaN]);
  });
});

import { describe, expect, it } from 'vitest';
import { exponentiate } from '../../src/numerics/exponential.ts';
import { addScaled, fromRows, identity, multiply, zeros } from '../../src/numerics/matrix.ts';

const worst = (values: Float64Array, expected: readonly number[]) =>
  Math.max(...expected.map((value, i) => Math.abs(values[i] - value)));

describe('the matrix exponential', () => {
  it('of zero is the identity, of a nilpotent matrix its finite series (closed form)', () => {
    expect(exponentiate(zeros(3, 3))).toEqual(identity(3));
    const E = exponentiate(
      fromRows([
        [0, 3, 5],
        [0, 0, 7],
        [0, 0, 0],
      ]),
    );
    expect(worst(E.data, [1, 3, 15.5, 0, 1, 7, 0, 0, 1])).toBeLessThan(1e-13);
  });

  it('of a rotation rate is the rotation (closed form), small and large', () => {
    for (const angle of [1e-9, 0.4, 3, 40]) {
      const E = exponentiate(
        fromRows([
          [0, -angle],
          [angle, 0],
        ]),
      );
      const [c, s] = [Math.cos(angle), Math.sin(angle)];
      // Each squaring doubles the relative error.
      expect(worst(E.data, [c, -s, s, c])).toBeLessThan(Number.EPSILON * 8 * Math.max(1, 2 * angle));
    }
  });

  it('of a stiff triangle has the closed form of its divided difference', () => {
    const [a, b] = [-950.8, -0.83];
    const E = exponentiate(
      fromRows([
        [a, 1],
        [0, b],
      ]),
    );
    const corner = (Math.exp(a) - Math.exp(b)) / (a - b);
    expect(Math.abs(E.data[1] / corner - 1)).toBeLessThan(1e-12);
    expect(Math.abs(E.data[3] / Math.exp(b) - 1)).toBeLessThan(1e-12);
  });

  it('satisfies e^M e^{−M} = I, and refuses NaN', () => {
    const M = fromRows([
      [0.3, -2, 1],
      [1.5, 0.1, 0.4],
      [-0.7, 0.9, -1.1],
    ]);
    const product = multiply(exponentiate(M), exponentiate(addScaled(-1, M, 0, M)));
    expect(worst(product.data, Array.from(identity(3).data))).toBeLessThan(1e-14);
    expect(() => exponentiate(fromRows([[Number.NaN]]))).toThrow(RangeError);
  });
});

import { describe, expect, it } from 'vitest';
import {
  decomposeGeneral,
  decomposeSingular,
  decomposeSymmetric,
  singularValues,
} from '../../src/numerics/eigen.ts';
import { fromRows, type Matrix, multiply, transpose } from '../../src/numerics/matrix.ts';
import { createRandom } from '../../src/numerics/random.ts';

function draw(rows: number, cols: number, seed: number): Matrix {
  const random = createRandom(seed);
  return { rows, cols, data: Float64Array.from({ length: rows * cols }, () => 2 * random() - 1) };
}

const largest = (values: Iterable<number>) => Math.max(...Array.from(values, Math.abs));

describe('decompositions at set-up', () => {
  it('refuse a matrix that holds NaN or infinity instead of never returning', () => {
    for (const bad of [Number.NaN, Number.POSITIVE_INFINITY]) {
      const M = fromRows([
        [1, 0],
        [bad, 1],
      ]);
      for (const decompose of [decomposeGeneral, decomposeSymmetric, decomposeSingular, singularValues]) {
        expect(() => decompose(M)).toThrow(RangeError);
      }
    }
  });

  it('give the closed form for a damped rotation: r e^{±iφ}', () => {
    const [r, phi] = [0.9, 0.3];
    const A = fromRows([
      [r * Math.cos(phi), -r * Math.sin(phi)],
      [r * Math.sin(phi), r * Math.cos(phi)],
    ]);
    const { real, imaginary } = decomposeGeneral(A);
    for (const value of real) expect(Math.abs(value - r * Math.cos(phi))).toBeLessThan(1e-15);
    expect(imaginary[0]).toBeCloseTo(r * Math.sin(phi), 14);
    expect(imaginary[1]).toBe(-imaginary[0]);
  });

  it('satisfy A V = V D with vectors in real form', () => {
    const A = draw(9, 9, 4);
    const { real, imaginary, vectors: V } = decomposeGeneral(A);
    const AV = multiply(A, V).data;
    const D = { rows: 9, cols: 9, data: new Float64Array(81) };
    for (let j = 0; j < 9; j++) {
      D.data[j * 10] = real[j];
      if (imaginary[j] > 0) {
        D.data[j * 9 + j + 1] = imaginary[j];
        D.data[(j + 1) * 9 + j] = -imaginary[j];
      }
    }
    expect(largest(imaginary)).toBeGreaterThan(0);
    const VD = multiply(V, D).data;
    expect(largest(AV.map((value, i) => value - VD[i]))).toBeLessThan(1e-13 * largest(AV));
  });

  it('satisfy S V = V Λ ascending, reading the lower triangle only', () => {
    const M = draw(8, 5, 2);
    const S = multiply(transpose(M), M);
    S.data[1] = 99;
    const { values, vectors } = decomposeSymmetric(S);
    S.data[1] = S.data[5];
    const SV = multiply(S, vectors);
    expect(Array.from(values)).toEqual(Array.from(values).sort((a, b) => a - b));
    const error = SV.data.map((value, i) => value - vectors.data[i] * values[i % 5]);
    expect(largest(error)).toBeLessThan(1e-13 * values[4]);
  });

  it('satisfy M = U Σ Vᵀ for tall and wide matrices', () => {
    for (const M of [draw(7, 4, 1), draw(4, 7, 1)]) {
      const { values, U, V } = decomposeSingular(M);
      expect(values.length).toBe(4);
      const scaled = { ...U, data: U.data.map((value, i) => value * values[i % U.cols]) };
      const product = multiply(scaled, transpose(V)).data;
      expect(largest(product.map((value, i) => value - M.data[i]))).toBeLessThan(1e-14 * values[0] * 8);
      expect(largest(singularValues(M).map((value, i) => value - values[i]))).toBeLessThan(1e-14 * values[0]);
    }
    expect(singularValues({ rows: 0, cols: 3, data: new Float64Array(0) }).length).toBe(0);
  });
});

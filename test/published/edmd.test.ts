import { describe, expect, it } from 'vitest';
import { createRandom, drawNormal } from '../../src/numerics/random.ts';
import { fitPredictor } from '../../src/predictor/fit.ts';
import { computeSpectrum } from '../../src/predictor/spectrum.ts';
import { channels, datasetOf, liftBy, trajectoryOf, unitScaling } from '../predictor/synthetic.ts';

/*
 * M. O. Williams, I. G. Kevrekidis, C. W. Rowley, "A data-driven approximation of the Koopman operator: extending
 * dynamic mode decomposition", J. Nonlinear Sci. 25:1307–1346 (2015): from memory, recomputed.
 * x⁺ = J x, J = [0.9 −0.04; 0 0.8], x ~ N(0, I); Hermite products. The eigenvalues are 0.9^i 0.8^j.
 */
const step = ([x, y]: readonly number[]) => [0.9 * x - 0.04 * y, 0.8 * y];
const EIGENVALUES = [
  1, 0.9, 0.81, 0.8, 0.729, 0.72, 0.6561, 0.648, 0.64, 0.5832, 0.576, 0.5184, 0.512, 0.4608, 0.4096,
];

/** Probabilists' Hermite polynomials of degree 0 … 4. */
const HERMITE = [
  () => 1,
  (x: number) => x,
  (x: number) => x * x - 1,
  (x: number) => x ** 3 - 3 * x,
  (x: number) => x ** 4 - 6 * x * x + 3,
];

/** The products with `keep(i, j)`; x and y themselves lead the lifting and are left out of the rest. */
function dictionary(keep: (i: number, j: number) => boolean) {
  const functions: Record<string, (x: ArrayLike<number>) => number> = {};
  for (let i = 0; i <= 4; i++) {
    for (let j = 0; j <= 4; j++) {
      if (i + j === 1 || !keep(i, j)) continue;
      functions[i + j === 0 ? 'constant' : `H${i}(x)H${j}(y)`] = (x) => HERMITE[i](x[0]) * HERMITE[j](x[1]);
    }
  }
  return liftBy(2, functions);
}

function regress(keep: (i: number, j: number) => boolean, route: 'gram' | 'orthogonal') {
  const random = createRandom(7);
  const pairs = Array.from({ length: 2000 }, () => {
    const x = [drawNormal(random), drawNormal(random)];
    return trajectoryOf([x, step(x)], [[]]);
  });
  return fitPredictor({
    ...dictionary(keep),
    dataset: datasetOf(pairs, 2, 0, 1),
    scaling: unitScaling(2, 0),
    outputs: channels('y', 1),
    readout: [0],
    settings: { form: 'linear', route, ridge: 0 },
    horizon: 1,
  });
}

describe('Hermite products of a linear map', () => {
  for (const route of ['gram', 'orthogonal'] as const) {
    it(`of total degree ≤ 4 have the 15 eigenvalues 0.9^i 0.8^j to 1e-10, by the ${route} route`, () => {
      const predictor = regress((i, j) => i + j <= 4, route);
      expect(predictor.lifting.nz).toBe(15);
      const spectrum = computeSpectrum(predictor);
      const sorted = Array.from(spectrum.real).sort((a, b) => b - a);
      sorted.forEach((value, i) => {
        expect(Math.abs(value - EIGENVALUES[i])).toBeLessThan(1e-10);
      });
      expect(Math.max(...spectrum.imaginary.map(Math.abs))).toBeLessThan(1e-10);
      expect(Math.abs(spectrum.radius - 1)).toBeLessThan(1e-10);
      // The constant at 1 does not count: the slowest mode that decays is 0.9.
      expect(Math.abs(spectrum.slowest - -1 / Math.log(0.9))).toBeLessThan(1e-6);
    });
  }

  it('have the eigenfunctions x − 0.4 y (0.9) and y (0.8): w A = λ w', () => {
    const { A } = regress((i, j) => i + j <= 4, 'orthogonal');
    for (const [w, lambda] of [
      [[1, -0.4], 0.9],
      [[0, 1], 0.8],
    ] as const) {
      for (let j = 0; j < 15; j++) {
        const value = w[0] * A.data[j] + w[1] * A.data[15 + j];
        expect(Math.abs(value - (j < 2 ? lambda * w[j] : 0))).toBeLessThan(1e-12);
      }
    }
  });

  it('of order ≤ 4 on each axis (25) do not span an invariant space: the tail is wrong, and a residual shows it', () => {
    const predictor = regress((i, j) => i <= 4 && j <= 4, 'orthogonal');
    expect(predictor.lifting.nz).toBe(25);
    const invariant = predictor.lifting.names.map((name) => {
      const [, i, j] = /H(\d)\(x\)H(\d)/.exec(name) ?? ['', '0', '0'];
      return Number(i) + Number(j) <= 4;
    });
    predictor.fit.residuals.forEach((residual, i) => {
      if (invariant[i]) expect(residual).toBeLessThan(1e-12);
    });
    expect(Math.max(...predictor.fit.residuals)).toBeGreaterThan(1e-3);
    const { real, imaginary } = computeSpectrum(predictor);
    const exact = Array.from({ length: 25 }, (_, k) => 0.9 ** Math.floor(k / 5) * 0.8 ** (k % 5));
    const misses = exact.map((value) =>
      Math.min(...real.map((re, i) => Math.hypot(re - value, imaginary[i]))),
    );
    expect(Math.max(...misses)).toBeGreaterThan(1e-3);
  });
});

import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { decomposeGeneral } from '../../src/numerics/eigen.ts';
import {
  addScaled,
  apply,
  diagonal,
  fromRows,
  type Matrix,
  multiply,
  toRows,
  zeros,
} from '../../src/numerics/matrix.ts';
import { createRandom } from '../../src/numerics/random.ts';
import { solveRiccati } from '../../src/numerics/riccati.ts';

const golden = (1 + Math.sqrt(5)) / 2;

/*
 * P. Benner, A. Laub, V. Mehrmann, "A collection of benchmark examples for the numerical solution of algebraic Riccati
 * equations II: discrete-time case", SPC 95_23 (1995), examples 1, 2, 3 and 5: read; closed forms verified. The scalar
 * case: closed form.
 */
const CASES: readonly {
  name: string;
  A: number[][];
  B: number[][];
  Q: number[][];
  R: number[][];
  X: number[][];
}[] = [
  {
    name: 'example 1',
    A: [
      [4, 3],
      [-4.5, -3.5],
    ],
    B: [[1], [-1]],
    Q: [
      [9, 6],
      [6, 4],
    ],
    R: [[1]],
    X: [
      [9 * golden, 6 * golden],
      [6 * golden, 4 * golden],
    ],
  },
  {
    name: 'example 2',
    A: [
      [0.9512, 0],
      [0, 0.9048],
    ],
    B: [
      [4.877, 4.877],
      [-1.1895, 3.569],
    ],
    Q: [
      [0.005, 0],
      [0, 0.02],
    ],
    R: [
      [1 / 3, 0],
      [0, 3],
    ],
    X: [
      [0.010459082320970092, 0.003224644477419543],
      [0.003224644477419543, 0.050397741135642805],
    ],
  },
  {
    name: 'example 3, whose input weight is zero',
    A: [
      [2, -1],
      [1, 0],
    ],
    B: [[1], [0]],
    Q: [
      [0, 0],
      [0, 1],
    ],
    R: [[0]],
    X: [
      [1, 0],
      [0, 1],
    ],
  },
  {
    name: 'example 5',
    A: [
      [0, 1],
      [0, 0],
    ],
    B: [[0], [1]],
    Q: [
      [1, 2],
      [2, 4],
    ],
    R: [[1]],
    X: [
      [1, 2],
      [2, 2 + Math.sqrt(5)],
    ],
  },
  { name: 'the scalar case a = b = q = r = 1', A: [[1]], B: [[1]], Q: [[1]], R: [[1]], X: [[golden]] },
];

describe('the discrete Riccati equation', () => {
  it.each(CASES)('has the published solution of $name to 1e-11', ({ A, B, Q, R, X }) => {
    const solution = solveRiccati(fromRows(A), fromRows(B), fromRows(Q), fromRows(R));
    expect(solution.converged).toBe(true);
    const expected = fromRows(X);
    const size = Math.hypot(...expected.data);
    expect(Math.hypot(...addScaled(1, solution.X, -1, expected).data) / size).toBeLessThan(1e-11);
    expect(solution.residual).toBeLessThan(1e-11);
  });

  it('has the gain 0.6180339887498949 in the scalar case, closed form', () => {
    const one = fromRows([[1]]);
    expect(solveRiccati(one, one, one, one).K.data[0]).toBeCloseTo(0.6180339887498949, 14);
  });

  it('leaves a symmetric solution that stabilises, for random plants, by its defining equation', () => {
    fc.assert(
      fc.property(fc.integer({ min: 0, max: 1e9 }), fc.integer({ min: 1, max: 8 }), (seed, n) => {
        const random = createRandom(seed);
        const draw = (rows: number, cols: number): Matrix => {
          const M = zeros(rows, cols);
          for (let i = 0; i < M.data.length; i++) M.data[i] = 2 * random() - 1;
          return M;
        };
        const A = draw(n, n);
        const B = draw(n, 2);
        const Q = fromRows(toRows(zeros(n, n)).map((row, i) => row.map((_, j) => (i === j ? 1 : 0))));
        const { X, K, converged, residual } = solveRiccati(
          A,
          B,
          Q,
          fromRows([
            [0.1, 0],
            [0, 0.1],
          ]),
        );
        expect(converged).toBe(true);
        expect(residual).toBeLessThan(1e-9);
        for (let i = 0; i < n; i++) {
          for (let j = 0; j < n; j++) expect(X.data[i * n + j]).toBe(X.data[j * n + i]);
        }
        const { real, imaginary } = decomposeGeneral(addScaled(1, A, -1, multiply(B, K)));
        expect(Math.max(...real.map((re, i) => Math.hypot(re, imaginary[i])))).toBeLessThan(1);
      }),
      { numRuns: 60 },
    );
  });

  it('says that it did not converge for a constant mode that no input moves and the cost sees', () => {
    const A = fromRows([
      [1, 0],
      [0.3, 0.5],
    ]);
    const solution = solveRiccati(
      A,
      fromRows([[0], [1]]),
      fromRows([
        [1, 0],
        [0, 1],
      ]),
      fromRows([[1]]),
    );
    expect(solution.converged).toBe(false);
  });

  it('takes a cross weight: shifting it into the plant by hand gives the same solution, relation', () => {
    const A = fromRows([
      [1.1, 0.2],
      [-0.3, 0.8],
    ]);
    const B = fromRows([[0.1], [1]]);
    const Q = fromRows([
      [2, 0.1],
      [0.1, 1],
    ]);
    const R = fromRows([[0.5]]);
    const S = fromRows([[0.2], [-0.1]]);
    const K = multiply(fromRows([[1 / 0.5]]), fromRows([[0.2, -0.1]]));
    const shifted = solveRiccati(
      addScaled(1, A, -1, multiply(B, K)),
      B,
      addScaled(1, Q, -1, multiply(S, K)),
      R,
    );
    const direct = solveRiccati(A, B, Q, R, S);
    for (let i = 0; i < 4; i++) expect(direct.X.data[i]).toBeCloseTo(shifted.X.data[i], 11);
  });
});

/*
 * S. L. Brunton, B. W. Brunton, J. L. Proctor, J. N. Kutz, "Koopman invariant subspaces and finite linear representations of
 * nonlinear dynamical systems for control", PLoS ONE 11:e0150171 (2016), the regulator of x1' = mu x1, x2' = lambda (x2 − x1²) + u lifted
 * by (x1, x2, x1²), mu = −0.1, lambda = 1, Q = diag(1, 1, 0), R = 1: read; recomputed; closed form. Continuous gain, and cost from (−5, 5).
 */
describe('the lifted regulator of Brunton, Brunton, Proctor and Kutz', () => {
  const [mu, lambda] = [-0.1, 1];
  const continuousGain = [0, 1 + Math.SQRT2, -1.4955973723971818];
  const continuousCost = 990.1798154491086;
  const start = [-5, 5, 25];

  /** Gain and cost of the exact discretisation with the weights of one sample, `Ts Q` and `Ts R`. */
  function discrete(Ts: number): number[] {
    const [slow, square, fast] = [Math.exp(mu * Ts), Math.exp(2 * mu * Ts), Math.exp(lambda * Ts)];
    const { X, K, converged } = solveRiccati(
      fromRows([
        [slow, 0, 0],
        [0, fast, (lambda * (square - fast)) / (lambda - 2 * mu)],
        [0, 0, square],
      ]),
      fromRows([[0], [(fast - 1) / lambda], [0]]),
      diagonal([Ts, Ts, 0]),
      fromRows([[Ts]]),
    );
    expect(converged).toBe(true);
    const cost = apply(X, start).reduce((sum, value, i) => sum + value * start[i], 0);
    return [...K.data, cost];
  }

  it('is the limit of the discrete one: the difference halves with the sample time, and is gone once that is extrapolated', () => {
    const exact = [...continuousGain, continuousCost];
    const [coarse, fine] = [discrete(2e-3), discrete(1e-3)];
    exact.forEach((value, i) => {
      const extrapolated = 2 * fine[i] - coarse[i];
      expect(Math.abs(extrapolated - value)).toBeLessThan(1e-5 * Math.max(1, Math.abs(value)));
      if (value === 0) return;
      expect((coarse[i] - value) / (fine[i] - value)).toBeCloseTo(2, 1);
    });
  });
});

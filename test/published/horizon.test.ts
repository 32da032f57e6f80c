import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { condenseQp } from '../../src/mpc/condense.ts';
import { designController } from '../../src/mpc/design.ts';
import { findTarget } from '../../src/mpc/target.ts';
import { decomposeGeneral } from '../../src/numerics/eigen.ts';
import { solveSquare } from '../../src/numerics/linearSolve.ts';
import { addScaled, block, fromRows, multiply, transpose, zeros } from '../../src/numerics/matrix.ts';
import { createRandom } from '../../src/numerics/random.ts';
import { solveRiccati } from '../../src/numerics/riccati.ts';
import { linearProblem } from '../mpc/linearProblem.ts';

/*
 * J. Rawlings, D. Mayne, M. Diehl, Model Predictive Control, 2nd ed., chapter 1, the example of a finite horizon that does
 * not stabilise: from memory, recomputed. Largest modulus of the closed loop by horizon, terminal weight Q.
 */
const A = fromRows([
  [4 / 3, -2 / 3],
  [1, 0],
]);
const B = fromRows([[1], [0]]);
const c = [-2 / 3, 1];
const Q = fromRows(c.map((ci, i) => c.map((cj, j) => ci * cj + (i === j ? 0.001 : 0))));
const TABLE = [
  [3, 1.458082],
  [5, 1.306725],
  [6, 1.158412],
  [7, 0.988569],
  [10, 0.707004],
  [20, 0.664051],
] as const;

const problemWith = (horizon: number) =>
  linearProblem(
    {
      A: [
        [4 / 3, -2 / 3],
        [1, 0],
      ],
      B: [[1], [0]],
    },
    { horizon, Q, S: fromRows([[0.001]]), R: fromRows([[0]]) },
  );

function radius(K: { data: Float64Array }): number {
  const gain = { rows: 1, cols: 2, data: K.data.slice(0, 2) };
  const { real, imaginary } = decomposeGeneral(addScaled(1, A, -1, multiply(B, gain)));
  return Math.max(...real.map((re, i) => Math.hypot(re, imaginary[i])));
}

describe('horizon and stability, the example of Rawlings, Mayne and Diehl', () => {
  it.each(TABLE)('horizon %i gives the recomputed largest modulus %f', (horizon, modulus) => {
    expect(radius(designController(problemWith(horizon)).K)).toBeCloseTo(modulus, 6);
  });

  it('the Riccati terminal weight gives the modulus of the infinite horizon, 0.664038, for any horizon', () => {
    for (const horizon of [1, 2, 5, 12]) {
      const design = designController({ ...problemWith(horizon), terminal: 'riccati' });
      expect(radius(design.K)).toBeCloseTo(0.664038, 6);
    }
  });
});

describe('the identity of the Riccati terminal weight, closed form', () => {
  it('for any horizon the first move is −K z and the optimal cost zᵀ P z (less the stage at 0)', () => {
    fc.assert(
      fc.property(fc.integer({ min: 0, max: 1e9 }), fc.integer({ min: 1, max: 15 }), (seed, horizon) => {
        const random = createRandom(seed);
        const draw = (rows: number, cols: number) =>
          Array.from({ length: rows }, () => Array.from({ length: cols }, () => 2 * random() - 1));
        const rows = { A: draw(3, 3), B: draw(3, 2) };
        const S = fromRows([
          [0.3, 0],
          [0, 0.2],
        ]);
        const problem = linearProblem(rows, { horizon, S, R: zeros(2, 2), terminal: 'riccati' });
        const { Q: stage, predictor } = problem;
        const { X, K } = solveRiccati(predictor.A, predictor.B, stage, S);
        const design = designController(problem);
        const size = Math.max(1, Math.hypot(...K.data));
        for (let i = 0; i < 2; i++) {
          for (let j = 0; j < 3; j++) {
            expect(Math.abs(design.K.data[i * design.qp.ntheta + j] - K.data[i * 3 + j])).toBeLessThan(
              1e-8 * size,
            );
          }
        }
        // Cost from stage 1 on: zᵀ(P − Q)z with the optimal U = −H⁻¹ F z is −½ (Fz)ᵀ H⁻¹ F z plus the free response.
        const { H, F, n } = design.qp;
        const Fz = block(F, 0, n, 0, 3);
        const U = solveSquare(H, Fz);
        if (!U) throw new Error('H is singular');
        const gained = multiply(transpose(Fz), U);
        const free = freeCost(problem, X);
        for (let i = 0; i < 9; i++) {
          const expected = X.data[i] - stage.data[i];
          const scale = Math.max(1, ...free.data.map(Math.abs));
          expect(Math.abs(free.data[i] - 0.5 * gained.data[i] - expected)).toBeLessThan(1e-9 * scale);
        }
      }),
      { numRuns: 40 },
    );
  });
});

/** `Σ_{k=1}^{N−1} (Aᵏ)ᵀQAᵏ + (A^N)ᵀ P A^N`: the cost of no input. */
function freeCost(problem: ReturnType<typeof linearProblem>, P: ReturnType<typeof fromRows>) {
  const { A: plant } = problem.predictor;
  let power = plant;
  let sum = zeros(3, 3);
  for (let k = 1; k < problem.horizon; k++) {
    sum = addScaled(1, sum, 1, multiply(transpose(power), multiply(problem.Q, power)));
    power = multiply(power, plant);
  }
  return addScaled(1, sum, 1, multiply(transpose(power), multiply(P, power)));
}

describe('without terminal weight', () => {
  it('Q weighs the last step as any other: the terminal weight Q given by hand condenses to the same H, twin', () => {
    const problem = problemWith(6);
    const target = findTarget(problem.predictor, [true, true]);
    const wide = zeros(3, 3);
    for (let i = 0; i < 2; i++) for (let j = 0; j < 2; j++) wide.data[i * 3 + j] = Q.data[i * 2 + j];
    const byHand = condenseQp(problem, wide, target);
    const plain = condenseQp(problem, null, target);
    for (let i = 0; i < byHand.H.data.length; i++) expect(byHand.H.data[i]).toBeCloseTo(plain.H.data[i], 12);
  });
});

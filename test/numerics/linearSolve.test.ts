import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { solveLeastNorm, solveSquare } from '../../src/numerics/linearSolve.ts';
import { addScaled, fromRows, identity, type Matrix, multiply, zeros } from '../../src/numerics/matrix.ts';
import { createRandom } from '../../src/numerics/random.ts';

function draw(rows: number, cols: number, random: () => number): Matrix {
  const M = zeros(rows, cols);
  for (let i = 0; i < M.data.length; i++) M.data[i] = 2 * random() - 1;
  return M;
}

const norm = (M: Matrix) => Math.hypot(...M.data);

describe('square systems', () => {
  it('leave a residual at rounding relative to ‖A‖ ‖X‖, at scales 1e±9 too, defining equation', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 0, max: 1e9 }),
        fc.integer({ min: 1, max: 12 }),
        fc.constantFrom(1e-9, 1, 1e9),
        (seed, n, scale) => {
          const random = createRandom(seed);
          const A = addScaled(scale, draw(n, n, random), 0, identity(n));
          const B = draw(n, 3, random);
          const [keptA, keptB] = [A.data.slice(), B.data.slice()];
          const X = solveSquare(A, B);
          expect([A.data, B.data]).toEqual([keptA, keptB]);
          if (!X) throw new Error('a random matrix is singular with probability zero');
          // Partial pivoting is backward stable: n² ε covers its growth at these sizes.
          const bound = 20 * n * n * Number.EPSILON * norm(A) * norm(X);
          expect(norm(addScaled(1, multiply(A, X), -1, B))).toBeLessThanOrEqual(bound);
        },
      ),
      { numRuns: 200 },
    );
  });

  it('take the pivot of largest modulus, a negative one too: a tiny leading entry costs no digit, closed form', () => {
    // x = y = 1 up to 1e-17 whichever way the rows stand.
    const A = fromRows([
      [1e-17, 1],
      [-1, 1],
    ]);
    const X = solveSquare(A, fromRows([[1], [0]]));
    expect(Array.from(X?.data ?? [])).toEqual([1, 1]);
  });

  it('are refused with null when singular or not finite, and solved when there is nothing to solve', () => {
    const singular = fromRows([
      [1, 2],
      [2, 4],
    ]);
    expect(solveSquare(singular, identity(2))).toBeNull();
    expect(solveSquare(fromRows([[Number.NaN]]), fromRows([[1]]))).toBeNull();
    expect(solveSquare(fromRows([[1]]), fromRows([[Number.POSITIVE_INFINITY]]))).toBeNull();
    expect(solveSquare(zeros(2, 2), identity(2))).toBeNull();
    expect(solveSquare(zeros(0, 0), zeros(0, 4))).toEqual(zeros(0, 4));
    expect(solveSquare(identity(2), zeros(2, 0))).toEqual(zeros(2, 0));
  });
});

describe('least squares of least norm', () => {
  it('splits one equation in two unknowns evenly, and averages two equations in one, closed form', () => {
    const wide = solveLeastNorm(fromRows([[1, 1]]), fromRows([[3]]), 1e-10);
    for (const value of wide.data) expect(value).toBeCloseTo(1.5, 14);
    const tall = solveLeastNorm(fromRows([[1], [1]]), fromRows([[1], [4]]), 1e-10);
    expect(tall.data[0]).toBeCloseTo(2.5, 14);
  });

  it('leaves a direction below the cut-off at zero, whatever the scale of the matrix', () => {
    for (const scale of [1e-9, 1, 1e9]) {
      const A = fromRows([
        [scale, 0],
        [0, 1e-12 * scale],
      ]);
      const X = solveLeastNorm(A, fromRows([[scale], [scale]]), 1e-8);
      expect(X.data[0]).toBeCloseTo(1, 14);
      expect(Math.abs(X.data[1])).toBe(0);
    }
  });
});

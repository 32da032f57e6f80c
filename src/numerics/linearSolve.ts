import { Matrix as Dense, LuDecomposition } from 'ml-matrix';
import { decomposeSingular } from './eigen.ts';
import { type Matrix, multiply, transpose, zeros } from './matrix.ts';

/**
 * `X` with `A X = B` by LU with partial pivoting, A square; null when A is singular or not finite.
 * Cost `⅔ n³ + 2 n² q` flops.
 */
export function solveSquare(A: Matrix, B: Matrix): Matrix | null {
  if (A.rows === 0) return zeros(0, B.cols);
  const lu = new LuDecomposition(Dense.from1DArray(A.rows, A.cols, A.data));
  if (lu.isSingular()) return null;
  const X = lu.solve(Dense.from1DArray(B.rows, B.cols, B.data)).to1DArray();
  if (!X.every(Number.isFinite)) return null;
  return { rows: A.cols, cols: B.cols, data: Float64Array.from(X) };
}

/**
 * The least-squares solution of least norm of `A X = B`: singular values below `cutoff` times the largest count as zero.
 * @throws RangeError when an entry is not finite.
 */
export function solveLeastNorm(A: Matrix, B: Matrix, cutoff: number): Matrix {
  const { values, U, V } = decomposeSingular(A);
  const X = multiply(transpose(U), B);
  for (let i = 0; i < X.rows; i++) {
    const factor = values[i] > cutoff * values[0] ? 1 / values[i] : 0;
    for (let c = 0; c < X.cols; c++) X.data[i * X.cols + c] *= factor;
  }
  return multiply(V, X);
}

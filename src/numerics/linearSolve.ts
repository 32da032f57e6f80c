import { decomposeSingular } from './eigen.ts';
import { type Matrix, multiply, transpose } from './matrix.ts';

/**
 * `X` with `A X = B` by LU with partial pivoting, A square (neither is modified); null when a pivot is exactly zero or the
 * outcome is not finite. A matrix that is singular but for rounding is not noticed: judge the residual.
 * Cost `⅔ n³ + 2 n² q` flops for q right sides.
 */
export function solveSquare(A: Matrix, B: Matrix): Matrix | null {
  const n = A.rows;
  const q = B.cols;
  const lu = A.data.slice();
  const X = { rows: n, cols: q, data: B.data.slice() };
  for (let k = 0; k < n; k++) {
    let pivot = k;
    for (let i = k + 1; i < n; i++) {
      if (Math.abs(lu[i * n + k]) > Math.abs(lu[pivot * n + k])) pivot = i;
    }
    if (!(Math.abs(lu[pivot * n + k]) > 0)) return null;
    swapRows(lu, n, k, pivot);
    swapRows(X.data, q, k, pivot);
    for (let i = k + 1; i < n; i++) {
      const factor = lu[i * n + k] / lu[k * n + k];
      if (factor === 0) continue;
      subtractRow(lu, n, i, k, factor, k + 1);
      subtractRow(X.data, q, i, k, factor, 0);
    }
  }
  for (let k = n - 1; k >= 0; k--) {
    for (let j = k + 1; j < n; j++) {
      const factor = lu[k * n + j];
      if (factor !== 0) subtractRow(X.data, q, k, j, factor, 0);
    }
    for (let c = 0; c < q; c++) X.data[k * q + c] /= lu[k * n + k];
  }
  return X.data.every(Number.isFinite) ? X : null;
}

function swapRows(M: Float64Array, cols: number, a: number, b: number): void {
  if (a === b) return;
  for (let c = 0; c < cols; c++) {
    const kept = M[a * cols + c];
    M[a * cols + c] = M[b * cols + c];
    M[b * cols + c] = kept;
  }
}

/** Row `a` −= factor · row `b`, from column `from` on. */
function subtractRow(
  M: Float64Array,
  cols: number,
  a: number,
  b: number,
  factor: number,
  from: number,
): void {
  const rowA = a * cols;
  const rowB = b * cols;
  for (let c = from; c < cols; c++) M[rowA + c] -= factor * M[rowB + c];
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

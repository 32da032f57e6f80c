import { decomposeSymmetric } from '../numerics/eigen.ts';
import { plainKernels } from '../numerics/kernels/plain.ts';

/**
 * The rows of a horizon are far from independent, and only some are active: five times the formula's step was best on closed-loop
 * sequences (of 1, 3, 5, 10, 30, 100), at over-relaxation 1.8.
 */
const LARGER = 5;

/**
 * Step sizes of the rows: `rho_i = 5 / (d_i √(λ_least λ_most))` with `d` the diagonal of the dual matrix `A P⁻¹ Aᵀ + softness` and λ the
 * eigenvalues other than zero of `A P⁻¹ Aᵀ` with its rows scaled by `d^−½`: 5 times the optimum for a quadratic program with independent rows by
 * E. Ghadimi, A. Teixeira, I. Shames, M. Johansson, "Optimal parameter selection for the alternating direction method of multipliers
 * (ADMM): quadratic problems", IEEE TAC 60:644–658 (2015).
 */
export function chooseRho(
  P: Float64Array,
  A: Float64Array,
  softness: Float64Array,
  n: number,
  m: number,
): Float64Array {
  const L = P.slice();
  plainKernels.factorCholesky(L, n);
  const T = A.slice();
  const rho = new Float64Array(m).fill(1);
  for (let i = 0; i < m; i++) {
    const row = T.subarray(i * n, (i + 1) * n);
    plainKernels.solveLower(L, n, n, row);
    const d = plainKernels.dot(row, row, n) + softness[i];
    if (!(d > 0)) continue;
    rho[i] = 1 / d;
    for (let j = 0; j < n; j++) row[j] /= Math.sqrt(d);
  }
  const M = new Float64Array(n * n);
  for (let i = 0; i < m; i++) plainKernels.rankOneUpdate(M, 1, T.subarray(i * n, (i + 1) * n), n);
  const { values } = decomposeSymmetric({ rows: n, cols: n, data: M });
  const most = values[n - 1];
  let least = most;
  for (const value of values) if (value > 1e-9 * most) least = Math.min(least, value);
  const factor = n > 0 && most > 0 ? LARGER / Math.sqrt(least * most) : 1;
  return rho.map((value) => value * factor);
}

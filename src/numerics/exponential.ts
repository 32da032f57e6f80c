import { addScaled, identity, type Matrix, multiply } from './matrix.ts';

/**
 * The matrix exponential `e^M` by a Taylor polynomial of degree 18 of `M / 2^s` and s squarings, s chosen so that
 * `‖M‖₁ / 2^s ≤ 1/2`: the first term left out is then below 2⁻⁷⁴ of the norm.
 * Method: scaling and squaring (C. Moler, C. Van Loan, SIAM Review 45:3–49, 2003, method 3). Cost (18 + s) n³.
 * @throws RangeError when an entry is not finite.
 */
export function exponentiate(M: Matrix): Matrix {
  let norm = 0;
  for (let j = 0; j < M.cols; j++) {
    let sum = 0;
    for (let i = 0; i < M.rows; i++) sum += Math.abs(M.data[i * M.cols + j]);
    if (!(sum <= norm)) norm = sum;
  }
  if (!Number.isFinite(norm))
    throw new RangeError('a matrix to exponentiate holds a value that is not finite');
  const squarings = Math.max(0, Math.ceil(Math.log2(Math.max(norm, Number.MIN_VALUE))) + 1);
  const I = identity(M.rows);
  const X = addScaled(2 ** -squarings, M, 0, M);
  // Horner: I + X(I + X/2 (I + X/3 (…))).
  let E = I;
  for (let k = 18; k >= 1; k--) E = addScaled(1, I, 1 / k, multiply(X, E));
  for (let s = 0; s < squarings; s++) E = multiply(E, E);
  return E;
}

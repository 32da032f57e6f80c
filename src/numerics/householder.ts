import type { RowBlock } from './rowBlock.ts';

/**
 * Folds the first `count` rows of a block into an accumulated orthogonal factorisation (a QR decomposition of a tall
 * matrix, one block of rows after another): given `R` with `RᵀR = WᵀW` of all rows so far, finds `R` of the rows so far
 * and the block together. The targets are rotated along, so that least squares over all rows is `R θ = Q`.
 *
 * @param R `targets × stride`, padded as the block is: left part the triangular factor (upper), right part `Q`, the
 * rotated targets. Start with zeros. Diagonal entries may have either sign.
 * @param block overwritten.
 * @param leftOver q entries: for each target the sum of squares that no combination of regressors can express,
 * added to. Nothing is subtracted, so a tiny residual keeps its digits.
 * Method: Householder reflections of a triangle on top of a rectangle, four columns at a time in compact form
 * `I − V T Vᵀ` (R. Schreiber, C. Van Loan, SIAM J. Sci. Stat. Comput. 10:53–57, 1989). Cost `4pq + 2p²` flops a row.
 */
export function foldRows(R: Float64Array, block: RowBlock, count: number, leftOver: Float64Array): void {
  const { targets, stride, data, q } = block;
  const T = new Float64Array(16);
  for (let j = 0; j < targets; j += 4) {
    factorPanel(R, data, stride, count, j, T);
    for (let c = j + 4; c < stride; c += 4) applyPanel(R, data, stride, count, j, c, T);
  }
  for (let k = 0; k < count; k++) {
    const row = k * stride + targets;
    for (let c = 0; c < q; c++) leftOver[c] += data[row + c] * data[row + c];
  }
}

/**
 * Annihilates columns j … j+3 of the block against rows j … j+3 of `R`. The vectors' lower parts replace the columns;
 * their upper parts are unit vectors. `T` (4 × 4, upper triangular) receives the compact form's middle factor.
 */
function factorPanel(
  R: Float64Array,
  X: Float64Array,
  stride: number,
  count: number,
  j: number,
  T: Float64Array,
): void {
  T.fill(0);
  for (let i = 0; i < 4; i++) {
    const col = j + i;
    const top = col * stride;
    let scale = Math.abs(R[top + col]);
    for (let k = 0; k < count; k++) {
      const size = Math.abs(X[k * stride + col]);
      if (!(size <= scale)) scale = size;
    }
    let tau = 0;
    // Both tests let NaN through to R, where the caller looks for it.
    if (scale !== 0) {
      let sum = (R[top + col] / scale) ** 2;
      let below = 0;
      for (let k = 0; k < count; k++) below += (X[k * stride + col] / scale) ** 2;
      sum += below;
      if (below !== 0) {
        const alpha = R[top + col];
        const beta = alpha > 0 ? -scale * Math.sqrt(sum) : scale * Math.sqrt(sum);
        tau = (beta - alpha) / beta;
        const inverse = 1 / (alpha - beta);
        for (let k = 0; k < count; k++) X[k * stride + col] *= inverse;
        R[top + col] = beta;
      }
    }
    if (tau === 0) for (let k = 0; k < count; k++) X[k * stride + col] = 0;
    for (let c = col + 1; c < j + 4; c++) {
      let s = R[top + c];
      for (let k = 0; k < count; k++) s += X[k * stride + col] * X[k * stride + c];
      s *= tau;
      R[top + c] -= s;
      for (let k = 0; k < count; k++) X[k * stride + c] -= s * X[k * stride + col];
    }
    // T[0..i−1][i] = −tau T[0..i−1][0..i−1] (Vᵀ v_i); the unit parts of different vectors are orthogonal.
    T[i * 4 + i] = tau;
    for (let a = 0; a < i; a++) {
      let dot = 0;
      for (let k = 0; k < count; k++) dot += X[k * stride + j + a] * X[k * stride + col];
      for (let b = 0; b <= a; b++) T[b * 4 + i] -= tau * T[b * 4 + a] * dot;
    }
  }
}

/** Applies the panel's reflections `I − V Tᵀ Vᵀ` to columns c … c+3 of the block and of rows j … j+3 of `R`. */
function applyPanel(
  R: Float64Array,
  X: Float64Array,
  stride: number,
  count: number,
  j: number,
  c: number,
  T: Float64Array,
): void {
  const r0 = j * stride + c;
  const r1 = r0 + stride;
  const r2 = r1 + stride;
  const r3 = r2 + stride;
  let s00 = R[r0];
  let s01 = R[r0 + 1];
  let s02 = R[r0 + 2];
  let s03 = R[r0 + 3];
  let s10 = R[r1];
  let s11 = R[r1 + 1];
  let s12 = R[r1 + 2];
  let s13 = R[r1 + 3];
  let s20 = R[r2];
  let s21 = R[r2 + 1];
  let s22 = R[r2 + 2];
  let s23 = R[r2 + 3];
  let s30 = R[r3];
  let s31 = R[r3 + 1];
  let s32 = R[r3 + 2];
  let s33 = R[r3 + 3];
  let v = j;
  let x = c;
  for (let k = 0; k < count; k++) {
    const v0 = X[v];
    const v1 = X[v + 1];
    const v2 = X[v + 2];
    const v3 = X[v + 3];
    const x0 = X[x];
    const x1 = X[x + 1];
    const x2 = X[x + 2];
    const x3 = X[x + 3];
    s00 += v0 * x0;
    s01 += v0 * x1;
    s02 += v0 * x2;
    s03 += v0 * x3;
    s10 += v1 * x0;
    s11 += v1 * x1;
    s12 += v1 * x2;
    s13 += v1 * x3;
    s20 += v2 * x0;
    s21 += v2 * x1;
    s22 += v2 * x2;
    s23 += v2 * x3;
    s30 += v3 * x0;
    s31 += v3 * x1;
    s32 += v3 * x2;
    s33 += v3 * x3;
    v += stride;
    x += stride;
  }
  // S ← Tᵀ S, from the last row up, since T is upper triangular.
  const t03 = T[3];
  const t13 = T[7];
  const t23 = T[11];
  const t33 = T[15];
  s30 = t03 * s00 + t13 * s10 + t23 * s20 + t33 * s30;
  s31 = t03 * s01 + t13 * s11 + t23 * s21 + t33 * s31;
  s32 = t03 * s02 + t13 * s12 + t23 * s22 + t33 * s32;
  s33 = t03 * s03 + t13 * s13 + t23 * s23 + t33 * s33;
  const t02 = T[2];
  const t12 = T[6];
  const t22 = T[10];
  s20 = t02 * s00 + t12 * s10 + t22 * s20;
  s21 = t02 * s01 + t12 * s11 + t22 * s21;
  s22 = t02 * s02 + t12 * s12 + t22 * s22;
  s23 = t02 * s03 + t12 * s13 + t22 * s23;
  const t01 = T[1];
  const t11 = T[5];
  s10 = t01 * s00 + t11 * s10;
  s11 = t01 * s01 + t11 * s11;
  s12 = t01 * s02 + t11 * s12;
  s13 = t01 * s03 + t11 * s13;
  const t00 = T[0];
  s00 *= t00;
  s01 *= t00;
  s02 *= t00;
  s03 *= t00;
  R[r0] -= s00;
  R[r0 + 1] -= s01;
  R[r0 + 2] -= s02;
  R[r0 + 3] -= s03;
  R[r1] -= s10;
  R[r1 + 1] -= s11;
  R[r1 + 2] -= s12;
  R[r1 + 3] -= s13;
  R[r2] -= s20;
  R[r2 + 1] -= s21;
  R[r2 + 2] -= s22;
  R[r2 + 3] -= s23;
  R[r3] -= s30;
  R[r3 + 1] -= s31;
  R[r3 + 2] -= s32;
  R[r3 + 3] -= s33;
  v = j;
  x = c;
  for (let k = 0; k < count; k++) {
    const v0 = X[v];
    const v1 = X[v + 1];
    const v2 = X[v + 2];
    const v3 = X[v + 3];
    X[x] -= v0 * s00 + v1 * s10 + v2 * s20 + v3 * s30;
    X[x + 1] -= v0 * s01 + v1 * s11 + v2 * s21 + v3 * s31;
    X[x + 2] -= v0 * s02 + v1 * s12 + v2 * s22 + v3 * s32;
    X[x + 3] -= v0 * s03 + v1 * s13 + v2 * s23 + v3 * s33;
    v += stride;
    x += stride;
  }
}

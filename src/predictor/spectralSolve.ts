import { decomposeSingular } from '../numerics/eigen.ts';
import { type Matrix, zeros } from '../numerics/matrix.ts';

/** Rows that compress a least-squares problem: `TᵀT = WᵀW / M` and `TᵀQ = WᵀY / M`, columns standardised. */
export interface CompressedRows {
  /** r × p. */
  readonly T: Matrix;
  /** r × q. */
  readonly Q: Matrix;
  /** Column of the constant, −1 if there is none. */
  readonly constant: number;
}

/**
 * Ridge solutions of a compressed problem by singular values: `θ(ρ) = V diag(s / (s² + ρ)) Uᵀ Q`, singular values not
 * above `cutoff · s₁` left out (the solution of least norm when the rank is deficient).
 *
 * The constant is not penalised: one reflection turns its column into a multiple of the first unit vector; the other
 * rows are the problem of the centred columns, and the first row gives the constant's coefficient afterwards.
 */
export function prepareSpectralSolve(rows: CompressedRows, cutoff: number): (ridge: number) => Matrix {
  const p = rows.T.cols;
  const q = rows.Q.cols;
  const { T, Q } = rows.constant < 0 ? rows : reflectToFirst(rows);
  const first = rows.constant < 0 ? 0 : 1;
  const kept = Array.from({ length: p }, (_, j) => j).filter((j) => j !== rows.constant);
  const rest = zeros(T.rows - first, kept.length);
  for (let i = 0; i < rest.rows; i++) {
    for (let j = 0; j < kept.length; j++) {
      rest.data[i * kept.length + j] = T.data[(i + first) * p + kept[j]];
    }
  }
  const empty = rest.rows === 0 || rest.cols === 0;
  const { values, U, V } = empty
    ? { values: new Float64Array(0), U: zeros(rest.rows, 0), V: zeros(rest.cols, 0) }
    : decomposeSingular(rest);
  // P = Uᵀ Q of the remaining rows.
  const P = zeros(values.length, q);
  for (let i = 0; i < rest.rows; i++) {
    for (let k = 0; k < values.length; k++) {
      const u = U.data[i * U.cols + k];
      for (let c = 0; c < q; c++) P.data[k * q + c] += u * Q.data[(i + first) * q + c];
    }
  }
  return (ridge) => {
    const theta = zeros(p, q);
    for (let k = 0; k < values.length; k++) {
      const s = values[k];
      if (!(s > cutoff * values[0])) continue;
      const gain = s / (s * s + ridge);
      for (let j = 0; j < kept.length; j++) {
        const v = V.data[j * V.cols + k] * gain;
        const row = kept[j] * q;
        for (let c = 0; c < q; c++) theta.data[row + c] += v * P.data[k * q + c];
      }
    }
    if (first === 1 && T.data[rows.constant] !== 0) {
      const row = rows.constant * q;
      for (let c = 0; c < q; c++) {
        let sum = Q.data[c];
        for (const j of kept) sum -= T.data[j] * theta.data[j * q + c];
        theta.data[row + c] = sum / T.data[rows.constant];
      }
    }
    return theta;
  };
}

/** Both matrices with the rows reflected so that the constant's column is zero below the first row. */
function reflectToFirst({ T, Q, constant }: CompressedRows): { T: Matrix; Q: Matrix } {
  const { rows, cols: p } = T;
  const v = Float64Array.from({ length: rows }, (_, i) => T.data[i * p + constant]);
  const norm = Math.hypot(...v);
  const reflected = { T: { ...T, data: T.data.slice() }, Q: { ...Q, data: Q.data.slice() } };
  if (norm === 0) return reflected;
  v[0] += v[0] > 0 ? norm : -norm;
  let square = 0;
  for (const entry of v) square += entry * entry;
  for (const M of [reflected.T, reflected.Q]) {
    for (let c = 0; c < M.cols; c++) {
      let dot = 0;
      for (let i = 0; i < rows; i++) dot += v[i] * M.data[i * M.cols + c];
      const factor = (2 * dot) / square;
      for (let i = 0; i < rows; i++) M.data[i * M.cols + c] -= factor * v[i];
    }
  }
  return reflected;
}

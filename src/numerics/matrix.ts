/** A dense real matrix, row-major: entry (i, j) is `data[i * cols + j]`. */
export interface Matrix {
  readonly rows: number;
  readonly cols: number;
  /** `rows * cols` entries. */
  readonly data: Float64Array;
}

/** The `rows × cols` zero matrix. */
export function zeros(rows: number, cols: number): Matrix {
  return { rows, cols, data: new Float64Array(rows * cols) };
}

/** The `n × n` identity. */
export function identity(n: number): Matrix {
  const I = zeros(n, n);
  for (let i = 0; i < n; i++) I.data[i * n + i] = 1;
  return I;
}

/** A matrix from its rows, all of one length. */
export function fromRows(rows: readonly ArrayLike<number>[]): Matrix {
  const cols = rows[0]?.length ?? 0;
  const M = zeros(rows.length, cols);
  for (let i = 0; i < rows.length; i++) {
    if (rows[i].length !== cols) throw new RangeError(`row ${i} has ${rows[i].length} entries, not ${cols}`);
    M.data.set(rows[i], i * cols);
  }
  return M;
}

/** The rows of `M` as plain arrays, copied. */
export function toRows(M: Matrix): number[][] {
  return Array.from({ length: M.rows }, (_, i) => Array.from(M.data.subarray(i * M.cols, (i + 1) * M.cols)));
}

/** The diagonal matrix of `d`. */
export function diagonal(d: ArrayLike<number>): Matrix {
  const D = zeros(d.length, d.length);
  for (let i = 0; i < d.length; i++) D.data[i * d.length + i] = d[i];
  return D;
}

/** `Mᵀ`, a new matrix. */
export function transpose(M: Matrix): Matrix {
  const T = zeros(M.cols, M.rows);
  for (let i = 0; i < M.rows; i++) {
    for (let j = 0; j < M.cols; j++) T.data[j * M.rows + i] = M.data[i * M.cols + j];
  }
  return T;
}

/** `A B`, a new matrix; `A.cols` must equal `B.rows`. Cost `A.rows · A.cols · B.cols`. */
export function multiply(A: Matrix, B: Matrix): Matrix {
  if (A.cols !== B.rows) throw new RangeError(`cannot multiply ${A.rows}×${A.cols} by ${B.rows}×${B.cols}`);
  const C = zeros(A.rows, B.cols);
  const { data: a } = A;
  const { data: b, cols: n } = B;
  const { data: c } = C;
  for (let i = 0; i < A.rows; i++) {
    for (let k = 0; k < A.cols; k++) {
      const aik = a[i * A.cols + k];
      if (aik === 0) continue;
      const bRow = k * n;
      const cRow = i * n;
      for (let j = 0; j < n; j++) c[cRow + j] += aik * b[bRow + j];
    }
  }
  return C;
}

/** `αA + βB`, a new matrix; shapes must agree. */
export function addScaled(alpha: number, A: Matrix, beta: number, B: Matrix): Matrix {
  if (A.rows !== B.rows || A.cols !== B.cols) {
    throw new RangeError(`cannot add ${A.rows}×${A.cols} and ${B.rows}×${B.cols}`);
  }
  const C = zeros(A.rows, A.cols);
  for (let i = 0; i < C.data.length; i++) C.data[i] = alpha * A.data[i] + beta * B.data[i];
  return C;
}

/** `out = M v`; `out` has `M.rows` entries and must not alias `v`. */
export function applyInto(out: Float64Array, M: Matrix, v: ArrayLike<number>): void {
  const { rows, cols, data } = M;
  for (let i = 0; i < rows; i++) {
    let sum = 0;
    const row = i * cols;
    for (let j = 0; j < cols; j++) sum += data[row + j] * v[j];
    out[i] = sum;
  }
}

/** `M v`, a new vector of `M.rows` entries. */
export function apply(M: Matrix, v: ArrayLike<number>): Float64Array {
  const out = new Float64Array(M.rows);
  applyInto(out, M, v);
  return out;
}

/** Rows `[fromRow, toRow)` and columns `[fromCol, toCol)` of `M`, copied. */
export function block(M: Matrix, fromRow: number, toRow: number, fromCol: number, toCol: number): Matrix {
  const S = zeros(toRow - fromRow, toCol - fromCol);
  for (let i = 0; i < S.rows; i++) {
    const start = (fromRow + i) * M.cols;
    S.data.set(M.data.subarray(start + fromCol, start + toCol), i * S.cols);
  }
  return S;
}

/** Writes `S` into `M` with its first entry at (`row`, `col`). */
export function placeBlock(M: Matrix, row: number, col: number, S: Matrix): void {
  for (let i = 0; i < S.rows; i++) {
    M.data.set(S.data.subarray(i * S.cols, (i + 1) * S.cols), (row + i) * M.cols + col);
  }
}

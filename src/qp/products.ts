/*
 * Small kernels on flat row-major arrays. Each does one thing on one shape, so that the engine compiles it once.
 */

/** Rows that one pass of `multiplyRows` takes together. */
export const GROUP = 4;

/** `Σ a[at + i] b[bt + i]` over `count` entries, in four interleaved sums. */
export function dot(a: Float64Array, at: number, b: Float64Array, bt: number, count: number): number {
  const whole = count & ~3;
  let s0 = 0;
  let s1 = 0;
  let s2 = 0;
  let s3 = 0;
  for (let i = 0; i < whole; i += 4) {
    s0 += a[at + i] * b[bt + i];
    s1 += a[at + i + 1] * b[bt + i + 1];
    s2 += a[at + i + 2] * b[bt + i + 2];
    s3 += a[at + i + 3] * b[bt + i + 3];
  }
  for (let i = whole; i < count; i++) s0 += a[at + i] * b[bt + i];
  return s0 + s1 + (s2 + s3);
}

/** `out[i] += alpha M[at + i]` for `from ≤ i < to`. */
export function addRow(
  out: Float64Array,
  alpha: number,
  M: Float64Array,
  at: number,
  from: number,
  to: number,
): void {
  for (let i = from; i < to; i++) out[i] += alpha * M[at + i];
}

/** `out −= Σⱼ scale[rows[j]] mu[j] M[rows[j]]` over `k` rows of `cols` entries, four a pass. */
export function subtractRows(
  out: Float64Array,
  M: Float64Array,
  cols: number,
  rows: Int32Array,
  k: number,
  scale: Float64Array,
  mu: Float64Array,
): void {
  const whole = k & ~3;
  for (let j = 0; j < whole; j += 4) {
    const ra = rows[j];
    const rb = rows[j + 1];
    const rc = rows[j + 2];
    const rd = rows[j + 3];
    const wa = scale[ra] * mu[j];
    const wb = scale[rb] * mu[j + 1];
    const wc = scale[rc] * mu[j + 2];
    const wd = scale[rd] * mu[j + 3];
    const a = ra * cols;
    const b = rb * cols;
    const c = rc * cols;
    const d = rd * cols;
    for (let i = 0; i < cols; i++) {
      out[i] -= wa * M[a + i] + wb * M[b + i] + (wc * M[c + i] + wd * M[d + i]);
    }
  }
  for (let j = whole; j < k; j++) addRow(out, -scale[rows[j]] * mu[j], M, rows[j] * cols, 0, cols);
}

/**
 * `out = M v` for M rows × cols, whose rows are zero outside `[groupFrom[g], groupTo[g])`, g = ⌊row / 4⌋: four rows a pass
 * share each entry of `v`.
 */
export function multiplyRows(
  out: Float64Array,
  M: Float64Array,
  rows: number,
  cols: number,
  groupFrom: Int32Array,
  groupTo: Int32Array,
  v: Float64Array,
): void {
  const whole = rows & ~3;
  for (let i = 0; i < whole; i += 4) {
    const from = groupFrom[i >> 2];
    const to = groupTo[i >> 2];
    const a = i * cols;
    const b = a + cols;
    const c = b + cols;
    const d = c + cols;
    let sa = 0;
    let sb = 0;
    let sc = 0;
    let sd = 0;
    for (let j = from; j < to; j++) {
      const x = v[j];
      sa += M[a + j] * x;
      sb += M[b + j] * x;
      sc += M[c + j] * x;
      sd += M[d + j] * x;
    }
    out[i] = sa;
    out[i + 1] = sb;
    out[i + 2] = sc;
    out[i + 3] = sd;
  }
  for (let i = whole; i < rows; i++) {
    const from = groupFrom[i >> 2];
    out[i] = dot(M, i * cols + from, v, from, groupTo[i >> 2] - from);
  }
}

/** `out = v`; for short arrays faster than the built-in. */
export function copyInto(out: Float64Array, v: Float64Array): void {
  for (let i = 0; i < v.length; i++) out[i] = v[i];
}

/** Largest |v[i]|; NaN if one entry is NaN. */
export function largest(v: Float64Array): number {
  let most = 0;
  for (let i = 0; i < v.length; i++) {
    most = Math.max(most, Math.abs(v[i]));
  }
  return most;
}

/** Is every entry finite? */
export function allFinite(v: Float64Array): boolean {
  let sum = 0;
  for (let i = 0; i < v.length; i++) sum += v[i] - v[i];
  return sum === 0;
}

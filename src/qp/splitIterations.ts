/**
 * The numbers of one splitting iteration in scaled coordinates, and its state. With `R = diag(rho)`, `K = (P + sigma I + Aᵀ R A)⁻¹`:
 * ```
 * t = rho z − y;  r = sigma x − q + Aᵀ t;  s = K r
 * x ← alpha s + (1 − alpha) x
 * p = alpha A s + (1 − alpha) z + y / rho;  b = min(max(p, lower), upper);  d = p − b
 * z ← b + give d;  y ← hold d
 * ```
 * The last line is the proximal step of `½ dist²(z, [lower, upper]) / softness`: `give = softness rho / (1 + softness rho)`, 0 on a
 * hard row (the projection), and `hold = rho (1 − give)`, so that a multiplier is exactly 0 where the row is inside its bounds.
 * No step depends on the data except through min and max.
 */
export interface SplitState<A extends Float64Array | Float32Array> {
  readonly n: number;
  readonly m: number;
  /** n × n, symmetric. */
  readonly K: A;
  /** m × n. */
  readonly A: A;
  /** m entries each. */
  readonly rho: A;
  readonly inverseRho: A;
  readonly give: A;
  readonly hold: A;
  /** sigma, alpha, 1 − alpha. */
  readonly constants: A;
  readonly q: A;
  readonly lower: A;
  readonly upper: A;
  readonly x: A;
  readonly z: A;
  readonly y: A;
  /** Room for t (m), r and s (n). */
  readonly t: A;
  readonly r: A;
  readonly s: A;
}

export function createSplitState<A extends Float64Array | Float32Array>(
  n: number,
  m: number,
  array: (length: number) => A,
): SplitState<A> {
  return {
    n,
    m,
    K: array(n * n),
    A: array(m * n),
    rho: array(m),
    inverseRho: array(m),
    give: array(m),
    hold: array(m),
    constants: array(3),
    q: array(n),
    lower: array(m),
    upper: array(m),
    x: array(n),
    z: array(m),
    y: array(m),
    t: array(m),
    r: array(n),
    s: array(n),
  };
}

/** `count` iterations in double; sums run in the order of the index, one product and one sum at a time. */
export function iterateDouble(state: SplitState<Float64Array>, count: number): void {
  const { n, m, K, A, rho, inverseRho, give, hold, constants, q, lower, upper, x, z, y, t, r, s } = state;
  const [sigma, alpha, rest] = constants;
  for (let iteration = 0; iteration < count; iteration++) {
    for (let i = 0; i < m; i++) t[i] = rho[i] * z[i] - y[i];
    for (let j = 0; j < n; j++) r[j] = sigma * x[j] - q[j];
    for (let i = 0; i < m; i++) {
      const ti = t[i];
      const row = i * n;
      for (let j = 0; j < n; j++) r[j] += A[row + j] * ti;
    }
    for (let j = 0; j < n; j++) {
      const row = j * n;
      let sum = 0;
      for (let k = 0; k < n; k++) sum += K[row + k] * r[k];
      s[j] = sum;
    }
    for (let j = 0; j < n; j++) x[j] = alpha * s[j] + rest * x[j];
    for (let i = 0; i < m; i++) {
      const row = i * n;
      let sum = 0;
      for (let j = 0; j < n; j++) sum += A[row + j] * s[j];
      const p = alpha * sum + rest * z[i] + y[i] * inverseRho[i];
      const b = Math.min(Math.max(p, lower[i]), upper[i]);
      const d = p - b;
      z[i] = b + give[i] * d;
      y[i] = hold[i] * d;
    }
  }
}

/** The same in single precision: every product and every sum rounded, in the same order. */
export function iterateSingle(state: SplitState<Float32Array>, count: number): void {
  const { n, m, K, A, rho, inverseRho, give, hold, constants, q, lower, upper, x, z, y, t, r, s } = state;
  const [sigma, alpha, rest] = constants;
  const f = Math.fround;
  for (let iteration = 0; iteration < count; iteration++) {
    for (let i = 0; i < m; i++) t[i] = f(f(rho[i] * z[i]) - y[i]);
    for (let j = 0; j < n; j++) r[j] = f(f(sigma * x[j]) - q[j]);
    for (let i = 0; i < m; i++) {
      const ti = t[i];
      const row = i * n;
      for (let j = 0; j < n; j++) r[j] = f(r[j] + f(A[row + j] * ti));
    }
    for (let j = 0; j < n; j++) {
      const row = j * n;
      let sum = 0;
      for (let k = 0; k < n; k++) sum = f(sum + f(K[row + k] * r[k]));
      s[j] = sum;
    }
    for (let j = 0; j < n; j++) x[j] = f(f(alpha * s[j]) + f(rest * x[j]));
    for (let i = 0; i < m; i++) {
      const row = i * n;
      let sum = 0;
      for (let j = 0; j < n; j++) sum = f(sum + f(A[row + j] * s[j]));
      const p = f(f(f(alpha * sum) + f(rest * z[i])) + f(y[i] * inverseRho[i]));
      const b = Math.min(Math.max(p, lower[i]), upper[i]);
      const d = f(p - b);
      z[i] = f(b + f(give[i] * d));
      y[i] = f(hold[i] * d);
    }
  }
}

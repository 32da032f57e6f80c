import { dot } from './products.ts';

/**
 * `L D Lᵀ = Q[W, W]` for an ordered working set W, L unit lower triangular, kept up to date as rows come and go.
 * Beside it the forward substitution `L y = c` of one right side.
 */
export class WorkingFactor {
  /** Number of rows in W. */
  k = 0;
  /** Rows of W in order, `k` of them. */
  readonly rows: Int32Array;
  /** Place of each row in W, −1 outside. */
  readonly place: Int32Array;
  /** Right side, as the rows of W have it. */
  readonly c: Float64Array;
  /** Solution of `Q[W, W] mu = c` after `solve`. */
  readonly mu: Float64Array;
  /** Multipliers with right signs from which `mu` is approached; 0 for a row that has just joined. */
  readonly held: Float64Array;
  /** Removals since the factor was last built from Q. */
  removals = 0;
  readonly #Q: Float64Array;
  readonly #m: number;
  readonly #ld: number;
  readonly #L: Float64Array;
  readonly #D: Float64Array;
  readonly #y: Float64Array;
  readonly #p: Float64Array;
  readonly #beta: Float64Array;

  /** @param Q m × m with unit diagonal. @param capacity most rows that W can hold. */
  constructor(Q: Float64Array, m: number, capacity: number) {
    this.#Q = Q;
    this.#m = m;
    this.#ld = capacity;
    this.rows = new Int32Array(capacity);
    this.place = new Int32Array(m).fill(-1);
    this.c = new Float64Array(capacity);
    this.mu = new Float64Array(capacity);
    this.held = new Float64Array(capacity);
    this.#L = new Float64Array(capacity * capacity);
    this.#D = new Float64Array(capacity);
    this.#y = new Float64Array(capacity);
    this.#p = new Float64Array(capacity);
    this.#beta = new Float64Array(capacity);
  }

  get full(): boolean {
    return this.k === this.#ld;
  }

  clear(): void {
    for (let i = 0; i < this.k; i++) this.place[this.rows[i]] = -1;
    this.k = 0;
    this.removals = 0;
  }

  /**
   * Appends `row` with right side `c`, unless its pivot (the share of the row that W does not span, 0 … 1) is below
   * `least`. Returns the pivot. Cost ½ k².
   */
  append(row: number, c: number, least: number): number {
    const k = this.k;
    if (k === this.#ld) return 0;
    const pivot = factorRow(this.#L, this.#D, k, this.#ld, this.#Q, row * this.#m, this.rows, 1);
    if (!(pivot >= least)) return pivot;
    this.#D[k] = pivot;
    this.rows[k] = row;
    this.place[row] = k;
    this.c[k] = c;
    this.held[k] = 0;
    this.#y[k] = c - dot(this.#L, k * this.#ld, this.#y, 0, k);
    this.k = k + 1;
    return pivot;
  }

  /** Takes out the row at place `j` by a rank-one update of what stands after it. Cost 1.5 (k − j)². */
  removeAt(j: number): void {
    this.place[this.rows[j]] = -1;
    closeGap(this.#L, this.#D, this.#p, this.#beta, j, this.k, this.#ld);
    this.k--;
    this.removals++;
    for (let i = j; i < this.k; i++) {
      const row = this.rows[i + 1];
      this.rows[i] = row;
      this.place[row] = i;
      this.c[i] = this.c[i + 1];
      this.held[i] = this.held[i + 1];
    }
    this.forward(j);
  }

  /** Builds the factor anew for all rows from place `j` on, in their order. */
  rebuild(j: number): void {
    for (let i = j; i < this.k; i++) {
      const row = this.rows[i];
      const pivot = factorRow(this.#L, this.#D, i, this.#ld, this.#Q, row * this.#m, this.rows, 1);
      // Rows only ever leave, so a pivot cannot fall below the one it was taken in with, save for rounding.
      this.#D[i] = Math.max(pivot, LEAST);
    }
    if (j === 0) this.removals = 0;
    this.forward(j);
  }

  /** Takes out all rows marked in `leave` (one entry a place). Cost as the cheaper of rank-one updates and a rebuild. */
  removeMarked(leave: Uint8Array): void {
    const before = this.k;
    let first = 0;
    while (first < before && leave[first] === 0) first++;
    let count = 0;
    for (let i = first; i < before; i++) count += leave[i];
    if (count === 0) return;
    const after = before - first;
    const kept = before - count;
    const anew = kept ** 3 - first ** 3;
    if (9 * count * after * after < anew) {
      for (let i = before - 1; i >= first; i--) if (leave[i] === 1) this.removeAt(i);
      return;
    }
    let to = first;
    for (let i = first; i < before; i++) {
      const row = this.rows[i];
      if (leave[i] === 1) {
        this.place[row] = -1;
        continue;
      }
      this.rows[to] = row;
      this.place[row] = to;
      this.c[to] = this.c[i];
      this.held[to] = this.held[i];
      to++;
    }
    this.k = to;
    this.rebuild(first);
  }

  /** `y` from place `j` on, after `c` has changed there. */
  forward(j: number): void {
    for (let i = j; i < this.k; i++) this.#y[i] = this.c[i] - dot(this.#L, i * this.#ld, this.#y, 0, i);
  }

  /** `mu = Q[W, W]⁻¹ c`. Cost ½ k². */
  solve(): void {
    backward(this.mu, this.#L, this.#D, this.#y, this.k, this.#ld);
  }

  /** `½ cᵀ Q[W, W]⁻¹ c`: by how much W raises the minimum. */
  objective(): number {
    let sum = 0;
    for (let i = 0; i < this.k; i++) sum += (this.#y[i] * this.#y[i]) / this.#D[i];
    return 0.5 * sum;
  }

  /** `½ (trial − mu)ᵀ Q[W, W] (trial − mu)`: by how much `trial` falls short of `objective`. Cost ½ k². */
  shortfall(trial: Float64Array): number {
    for (let i = 0; i < this.k; i++) this.#p[i] = trial[i] - this.mu[i];
    return 0.5 * squareNorm(this.#p, this.#L, this.#D, this.k, this.#ld);
  }

  /** `out = Q[W, W]⁻¹ right` for another right side; `out` may be `right`. */
  solveOther(out: Float64Array, right: Float64Array): void {
    for (let i = 0; i < this.k; i++) this.#p[i] = right[i] - dot(this.#L, i * this.#ld, this.#p, 0, i);
    backward(out, this.#L, this.#D, this.#p, this.k, this.#ld);
  }

  /**
   * `out = Q[W, W]⁻¹ Q[W, row]`: how W makes up for a unit of `row`. Returns the pivot of `row`.
   */
  project(out: Float64Array, row: number): number {
    const k = this.k;
    const at = row * this.#m;
    for (let i = 0; i < k; i++) out[i] = this.#Q[at + this.rows[i]];
    for (let i = 0; i < k; i++) this.#p[i] = out[i] - dot(this.#L, i * this.#ld, this.#p, 0, i);
    let pivot = 1;
    for (let i = 0; i < k; i++) pivot -= (this.#p[i] * this.#p[i]) / this.#D[i];
    backward(out, this.#L, this.#D, this.#p, k, this.#ld);
    return pivot;
  }
}

const LEAST = 1e-16;

/** Writes row `k` of L for the row of Q that starts at `qAt`; returns its pivot. */
function factorRow(
  L: Float64Array,
  D: Float64Array,
  k: number,
  ld: number,
  Q: Float64Array,
  qAt: number,
  rows: Int32Array,
  diagonal: number,
): number {
  const at = k * ld;
  for (let i = 0; i < k; i++) L[at + i] = Q[qAt + rows[i]] - dot(L, i * ld, L, at, i);
  let pivot = diagonal;
  for (let i = 0; i < k; i++) {
    const z = L[at + i];
    const l = z / D[i];
    L[at + i] = l;
    pivot -= z * l;
  }
  return pivot;
}

/**
 * Takes row and column `j` out of L and D. What stands after it gains `d_j l lᵀ`, l being column j below the diagonal:
 * Gill, Golub, Murray, Saunders, "Methods for modifying matrix factorizations", Math. Comp. 28:505–535 (1974), method C1.
 */
function closeGap(
  L: Float64Array,
  D: Float64Array,
  p: Float64Array,
  beta: Float64Array,
  j: number,
  k: number,
  ld: number,
): void {
  let alpha = D[j];
  for (let i = j + 1; i < k; i++) {
    const from = i * ld;
    const to = from - ld;
    let l = L[from + j];
    for (let t = 0; t < j; t++) L[to + t] = L[from + t];
    for (let t = j + 1; t < i; t++) {
      const old = L[from + t];
      l -= p[t] * old;
      L[to + t - 1] = old + beta[t] * l;
    }
    p[i] = l;
    const old = D[i];
    const raised = old + alpha * l * l;
    beta[i] = (alpha * l) / raised;
    D[i - 1] = raised;
    alpha *= old / raised;
  }
}

/** `vᵀ L D Lᵀ v`; v is overwritten. */
function squareNorm(v: Float64Array, L: Float64Array, D: Float64Array, k: number, ld: number): number {
  let sum = 0;
  for (let i = 0; i < k; i++) {
    const at = i * ld;
    const value = v[i];
    for (let t = 0; t < i; t++) v[t] += value * L[at + t];
  }
  for (let i = 0; i < k; i++) sum += v[i] * v[i] * D[i];
  return sum;
}

/** `out = L⁻ᵀ D⁻¹ y`. */
function backward(
  out: Float64Array,
  L: Float64Array,
  D: Float64Array,
  y: Float64Array,
  k: number,
  ld: number,
): void {
  for (let i = 0; i < k; i++) out[i] = y[i] / D[i];
  for (let i = k - 1; i > 0; i--) {
    const value = out[i];
    const at = i * ld;
    for (let t = 0; t < i; t++) out[t] -= value * L[at + t];
  }
}

import type { PreparedQp } from './prepare.ts';
import { addRow, dot } from './products.ts';
import type { WorkingFactor } from './workingFactor.ts';

/**
 * The working set's rows `T̃ = S [G L⁻ᵀ, softness^½]` as `T̃ᵀ = Vᵀ R`, V with orthonormal rows, R upper triangular: pivots and
 * directions in which the condition of the working set counts once, not squared as in `WorkingFactor`. Each soft row
 * has a coordinate of its own. Shares the list of rows and the multipliers with a `WorkingFactor`.
 */
export class OrthogonalFactor {
  readonly #qp: PreparedQp;
  readonly #set: WorkingFactor;
  readonly #length: number;
  readonly #room: number;
  /** Coordinate of each soft row beyond the first n; −1 for a hard one. */
  readonly #slot: Int32Array;
  readonly #V: Float64Array;
  /** Column j starts at `j * room`. */
  readonly #R: Float64Array;
  readonly #rest: Float64Array;
  readonly #share: Float64Array;
  readonly #h: Float64Array;

  constructor(qp: PreparedQp, set: WorkingFactor) {
    this.#qp = qp;
    this.#set = set;
    this.#slot = new Int32Array(qp.m);
    let length = qp.n;
    for (let i = 0; i < qp.m; i++) this.#slot[i] = qp.softness[i] > 0 ? length++ : -1;
    this.#length = length;
    this.#room = set.rows.length;
    this.#V = new Float64Array(this.#room * length);
    this.#R = new Float64Array(this.#room * this.#room);
    this.#rest = new Float64Array(length);
    this.#share = new Float64Array(this.#room);
    this.#h = new Float64Array(this.#room);
  }

  /** Norm of what the working set does not span of `row`, 0 … 1; leaves the spanned part in `#share`. */
  #split(row: number): number {
    const { n, T, softness, scale } = this.#qp;
    const length = this.#length;
    const rest = this.#rest;
    const share = this.#share;
    const { k } = this.#set;
    rest.fill(0);
    for (let j = 0; j < n; j++) rest[j] = T[row * n + j];
    if (this.#slot[row] >= 0) rest[this.#slot[row]] = scale[row] * Math.sqrt(softness[row]);
    share.fill(0, 0, k);
    // Twice is enough (W. Kahan, in B. N. Parlett, "The Symmetric Eigenvalue Problem", 1980).
    for (let pass = 0; pass < 2; pass++) {
      for (let i = 0; i < k; i++) {
        const along = dot(this.#V, i * length, rest, 0, length);
        share[i] += along;
        addRow(rest, -along, this.#V, i * length, 0, length);
      }
    }
    return Math.sqrt(dot(rest, 0, rest, 0, length));
  }

  /** `out = (coefficients of `row` on the working set)`; returns the norm of what is left of it. */
  project(out: Float64Array, row: number): number {
    const norm = this.#split(row);
    for (let i = 0; i < this.#set.k; i++) out[i] = this.#share[i];
    this.#solveUpper(out);
    return norm;
  }

  /** Appends `row`, unless less than `least` of it is left beside the working set. */
  append(row: number, least: number): boolean {
    const { k, rows, place, mu } = this.#set;
    if (k === this.#room) return false;
    const norm = this.#split(row);
    if (!(norm > least)) return false;
    const length = this.#length;
    for (let j = 0; j < length; j++) this.#V[k * length + j] = this.#rest[j] / norm;
    for (let i = 0; i < k; i++) this.#R[k * this.#room + i] = this.#share[i];
    this.#R[k * this.#room + k] = norm;
    rows[k] = row;
    place[row] = k;
    mu[k] = 0;
    this.#set.k = k + 1;
    return true;
  }

  /** Takes out the row at place `j`; Givens rotations make R triangular again. */
  removeAt(j: number): void {
    const set = this.#set;
    const { rows, place, mu } = set;
    const room = this.#room;
    const R = this.#R;
    place[rows[j]] = -1;
    for (let c = j; c + 1 < set.k; c++) {
      rows[c] = rows[c + 1];
      place[rows[c]] = c;
      mu[c] = mu[c + 1];
      for (let i = 0; i <= c + 1; i++) R[c * room + i] = R[(c + 1) * room + i];
    }
    set.k--;
    for (let i = j; i < set.k; i++) {
      const a = R[i * room + i];
      const b = R[i * room + i + 1];
      const norm = Math.hypot(a, b);
      const cos = a / norm;
      const sin = b / norm;
      for (let c = i; c < set.k; c++) turn(R, c * room + i, c * room + i + 1, cos, sin);
      const v = i * this.#length;
      for (let t = 0; t < this.#length; t++) turn(this.#V, v + t, v + this.#length + t, cos, sin);
    }
  }

  /**
   * Solves `dw + T̃ᵀ dmu = −r`, `T̃ dw = −p`. @param r n entries, the residual of the stationarity in w = Lᵀ x; overwritten by dw.
   * @param p k entries; overwritten by dmu.
   */
  correct(r: Float64Array, p: Float64Array): void {
    const { k } = this.#set;
    const { n } = this.#qp;
    const room = this.#room;
    const R = this.#R;
    const V = this.#V;
    const h = this.#h;
    for (let i = 0; i < k; i++) h[i] = (p[i] - dot(R, i * room, h, 0, i)) / R[i * room + i];
    for (let i = 0; i < k; i++) p[i] = h[i] - dot(V, i * this.#length, r, 0, n);
    for (let j = 0; j < n; j++) r[j] = -r[j];
    for (let i = 0; i < k; i++) addRow(r, -p[i], V, i * this.#length, 0, n);
    this.#solveUpper(p);
  }

  /** `½ ‖T̃ᵀ mu‖²`: by how much the working set raises the minimum. */
  objective(): number {
    const { k, mu } = this.#set;
    const h = this.#h;
    h.fill(0, 0, k);
    for (let j = 0; j < k; j++) addRow(h, mu[j], this.#R, j * this.#room, 0, j + 1);
    return 0.5 * dot(h, 0, h, 0, k);
  }

  /** Solves `R x = b` in place. */
  #solveUpper(x: Float64Array): void {
    const room = this.#room;
    for (let i = this.#set.k - 1; i >= 0; i--) {
      x[i] /= this.#R[i * room + i];
      addRow(x, -x[i], this.#R, i * room, 0, i);
    }
  }
}

function turn(M: Float64Array, at: number, below: number, cos: number, sin: number): void {
  const a = M[at];
  const b = M[below];
  M[at] = cos * a + sin * b;
  M[below] = cos * b - sin * a;
}

import { decomposeSymmetric } from '../numerics/eigen.ts';
import { plainKernels } from '../numerics/kernels/plain.ts';
import { dot, GROUP } from './products.ts';
import type { QpStructure } from './qp.ts';
import { UnusableQpError } from './unusableQp.ts';

/** Everything about a structure that is computed once. Rows scaled so that `Q` has a unit diagonal. */
export interface PreparedQp {
  readonly n: number;
  readonly m: number;
  /** n × n, exactly symmetric. */
  readonly H: Float64Array;
  /** n × n, inverse of the lower Cholesky factor of H. */
  readonly Linv: Float64Array;
  /** n × n, `H⁻¹`. */
  readonly Hinv: Float64Array;
  /** m × n. */
  readonly G: Float64Array;
  /** m × n, `G H⁻¹`. */
  readonly Y: Float64Array;
  /** m × n, `S G L⁻ᵀ`. */
  readonly T: Float64Array;
  /** m × m, `S (G H⁻¹ Gᵀ + diag(softness)) S`, unit diagonal. */
  readonly Q: Float64Array;
  /** m entries: S; 0 for a row that is all zero. */
  readonly scale: Float64Array;
  readonly softness: Float64Array;
  /** Row i of G is zero outside `[from[i], to[i])`. */
  readonly from: Int32Array;
  readonly to: Int32Array;
  /** The same for four rows together, and for all columns (for products with H). */
  readonly groupFrom: Int32Array;
  readonly groupTo: Int32Array;
  readonly fullFrom: Int32Array;
  readonly fullTo: Int32Array;
  /** Largest |G[i, j]| of each row. */
  readonly rowSize: Float64Array;
  /** Largest |H[i, j]|. */
  readonly sizeH: number;
  /** `‖H‖₁ ‖H⁻¹‖₁`. */
  readonly condition: number;
}

/** Asymmetry of H beyond this, relative to its largest entry, is taken for a mistake. */
const ASYMMETRY = 1e-8;

/** A pivot of H below this share of its diagonal entry leaves no digit in the optimum. */
const LEAST_PIVOT = 1e-15;

/**
 * Checks a structure and forms `H⁻¹`, `G H⁻¹` and the scaled dual matrix.
 * @throws UnusableQpError when shapes disagree, entries are not finite, a softness is negative, or H is not symmetric
 * positive definite (then with its smallest eigenvalue). Cost `n³ + m n² + ½ m² n` multiply-adds.
 */
export function prepareQp({ H: givenH, G: givenG, softness }: QpStructure): PreparedQp {
  const n = givenH.rows;
  const m = givenG.rows;
  checkShapes(givenH.cols, n, givenG.cols, m, softness);
  const H = symmetrise(givenH.data, n);
  const G = givenG.data.slice();
  const L = factor(H, n);
  const Linv = invertLower(L, n);
  const Hinv = new Float64Array(n * n);
  for (let k = 0; k < n; k++) {
    for (let i = 0; i <= k; i++) {
      const factorKi = Linv[k * n + i];
      for (let j = 0; j <= i; j++) Hinv[i * n + j] += factorKi * Linv[k * n + j];
    }
  }
  mirror(Hinv, n);

  const { from, to, rowSize } = rowRanges(G, m, n);
  const { T, Y } = transformRows(G, Linv, m, n, from);
  const scale = new Float64Array(m);
  for (let i = 0; i < m; i++) {
    const size = dot(T, i * n, T, i * n, n) + softness[i];
    scale[i] = size > 0 ? 1 / Math.sqrt(size) : 0;
  }
  for (let i = 0; i < m; i++) for (let j = 0; j < n; j++) T[i * n + j] *= scale[i];
  const Q = new Float64Array(m * m);
  for (let i = 0; i < m; i++) {
    for (let j = 0; j < i; j++) Q[i * m + j] = dot(T, i * n, T, j * n, n);
    Q[i * m + i] = 1;
  }
  mirror(Q, m);

  const groups = Math.ceil(Math.max(m, n) / GROUP);
  const groupFrom = new Int32Array(groups).fill(n);
  const groupTo = new Int32Array(groups);
  for (let i = 0; i < m; i++) {
    const g = Math.floor(i / GROUP);
    if (to[i] > from[i]) {
      groupFrom[g] = Math.min(groupFrom[g], from[i]);
      groupTo[g] = Math.max(groupTo[g], to[i]);
    }
  }
  for (let g = 0; g < groups; g++) if (groupTo[g] === 0) groupFrom[g] = 0;
  return {
    n,
    m,
    H,
    Linv,
    Hinv,
    G,
    Y,
    T,
    Q,
    scale,
    softness: softness.slice(),
    from,
    to,
    groupFrom,
    groupTo,
    fullFrom: new Int32Array(groups),
    fullTo: new Int32Array(groups).fill(n),
    rowSize,
    sizeH: H.reduce((most, value) => Math.max(most, Math.abs(value)), 0),
    condition: n === 0 ? 1 : norm1(H, n) * norm1(Hinv, n),
  };
}

function checkShapes(hCols: number, n: number, gCols: number, m: number, softness: Float64Array): void {
  const refuse = (key: string, must: string, got: string): never => {
    throw new UnusableQpError({ key, must, got, wayOut: 'rebuild the matrices of the quadratic program' });
  };
  if (hCols !== n) refuse('H', 'square', `${n} × ${hCols}`);
  if (m > 0 && gCols !== n) refuse('G', `a matrix of ${n} columns`, `${gCols} columns`);
  if (softness.length !== m) refuse('softness', `${m} entries`, `${softness.length}`);
  for (const value of softness) {
    if (!(value >= 0 && value < Number.POSITIVE_INFINITY)) refuse('softness', 'finite and ≥ 0', `${value}`);
  }
}

function symmetrise(data: Float64Array, n: number): Float64Array {
  const H = new Float64Array(n * n);
  let size = 0;
  let skew = 0;
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      H[i * n + j] = 0.5 * data[i * n + j] + 0.5 * data[j * n + i];
      size = Math.max(size, Math.abs(H[i * n + j]));
      skew = Math.max(skew, Math.abs(data[i * n + j] - data[j * n + i]));
    }
  }
  mirror(H, n);
  if (!(size < Number.POSITIVE_INFINITY)) {
    throw new UnusableQpError({
      key: 'H',
      must: 'finite',
      got: `${size}`,
      wayOut: 'look for NaN or infinite entries in what it is made from',
    });
  }
  if (!(skew <= ASYMMETRY * size)) {
    throw new UnusableQpError({
      key: 'H',
      must: 'symmetric',
      got: `an asymmetry of ${skew}`,
      wayOut: 'only the symmetric part acts: pass ½ (H + Hᵀ)',
    });
  }
  return H;
}

/** Lower Cholesky factor; @throws UnusableQpError with the smallest eigenvalue. */
function factor(H: Float64Array, n: number): Float64Array {
  const L = H.slice();
  let fine = plainKernels.factorCholesky(L, n) === n;
  for (let i = 0; i < n && fine; i++) fine = L[i * n + i] ** 2 > LEAST_PIVOT * H[i * n + i];
  if (fine) return L;
  const smallest = decomposeSymmetric({ rows: n, cols: n, data: H }).values[0];
  const size = H.reduce((most, value) => Math.max(most, Math.abs(value)), 0);
  // Three digits are told: one percent more than it takes.
  const enough = 1.01 * Math.max(0, -smallest) + 1e-6 * size;
  throw new UnusableQpError(
    {
      key: 'H',
      must: 'positive definite',
      got: `a smallest eigenvalue of ${smallest.toPrecision(6)}`,
      wayOut: `not convex: raise the weights that make it, or add at least ${enough.toPrecision(3)} to its diagonal`,
    },
    smallest,
  );
}

function invertLower(L: Float64Array, n: number): Float64Array {
  const X = new Float64Array(n * n);
  for (let i = 0; i < n; i++) {
    for (let k = 0; k < i; k++) {
      const lik = L[i * n + k];
      if (lik !== 0) for (let j = 0; j <= k; j++) X[i * n + j] -= lik * X[k * n + j];
    }
    X[i * n + i] = 1;
    for (let j = 0; j <= i; j++) X[i * n + j] /= L[i * n + i];
  }
  return X;
}

/** `T = G L⁻ᵀ` and `Y = T L⁻¹`. */
function transformRows(G: Float64Array, Linv: Float64Array, m: number, n: number, from: Int32Array) {
  const T = new Float64Array(m * n);
  const Y = new Float64Array(m * n);
  for (let i = 0; i < m; i++) {
    const at = i * n;
    for (let k = from[i]; k < n; k++) {
      const t = dot(Linv, k * n + from[i], G, at + from[i], k + 1 - from[i]);
      T[at + k] = t;
      for (let j = 0; j <= k; j++) Y[at + j] += t * Linv[k * n + j];
    }
  }
  return { T, Y };
}

function rowRanges(G: Float64Array, m: number, n: number) {
  const from = new Int32Array(m);
  const to = new Int32Array(m);
  const rowSize = new Float64Array(m);
  for (let i = 0; i < m; i++) {
    from[i] = n;
    for (let j = 0; j < n; j++) {
      const value = G[i * n + j];
      if (!Number.isFinite(value)) {
        const wayOut = 'look for NaN or infinite entries in what it is made from';
        throw new UnusableQpError({ key: `G[${i}, ${j}]`, must: 'finite', got: `${value}`, wayOut });
      }
      if (value === 0) continue;
      if (from[i] === n) from[i] = j;
      to[i] = j + 1;
      rowSize[i] = Math.max(rowSize[i], Math.abs(value));
    }
    if (to[i] === 0) from[i] = 0;
  }
  return { from, to, rowSize };
}

function norm1(M: Float64Array, n: number): number {
  let most = 0;
  for (let i = 0; i < n; i++) {
    let sum = 0;
    for (let j = 0; j < n; j++) sum += Math.abs(M[i * n + j]);
    most = Math.max(most, sum);
  }
  return most;
}

/** Copies the lower triangle onto the upper one. */
function mirror(M: Float64Array, n: number): void {
  for (let i = 0; i < n; i++) for (let j = 0; j < i; j++) M[j * n + i] = M[i * n + j];
}

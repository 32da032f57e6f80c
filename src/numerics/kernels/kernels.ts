/**
 * Dense kernels on flat row-major `Float64Array`s. There are two spellings, WebAssembly and plain TypeScript, which add
 * in the same order and so give the same bits. No call allocates; arguments must not overlap unless it is said.
 */
export interface Kernels {
  readonly kind: 'wasm' | 'plain';
  /**
   * A zeroed array that these kernels reach without copying. The WebAssembly kernels take any other array too, but
   * hand the call to their plain twin.
   */
  readonly allocate: (length: number) => Float64Array;
  /** `Σ a[i] b[i]` over n entries; `a` and `b` may be the same. */
  readonly dot: (a: Float64Array, b: Float64Array, n: number) => number;
  /** `y += alpha x` over n entries. */
  readonly addScaled: (y: Float64Array, alpha: number, x: Float64Array, n: number) => void;
  /** `out = M v`, M rows × cols. */
  readonly apply: (out: Float64Array, M: Float64Array, v: Float64Array, rows: number, cols: number) => void;
  /** `out = Mᵀ v`, M rows × cols. */
  readonly applyTransposed: (
    out: Float64Array,
    M: Float64Array,
    v: Float64Array,
    rows: number,
    cols: number,
  ) => void;
  /** `C += A B`, A rows × inner, B inner × cols. */
  readonly multiplyAdd: (
    C: Float64Array,
    A: Float64Array,
    B: Float64Array,
    rows: number,
    inner: number,
    cols: number,
  ) => void;
  /** `C += A Bᵀ`, A rows × inner, B cols × inner. */
  readonly multiplyTransposedAdd: (
    C: Float64Array,
    A: Float64Array,
    B: Float64Array,
    rows: number,
    inner: number,
    cols: number,
  ) => void;
  /** Lower triangle of `S += alpha v vᵀ`, S n × n; the upper one is not touched. */
  readonly rankOneUpdate: (S: Float64Array, alpha: number, v: Float64Array, n: number) => void;
  /**
   * `G += Wᵀ [W | Y]` over the first `count` rows of `A = [W | Y]` (row length `stride`, W in the first `targets`
   * columns; both multiples of four). G is targets × stride; tiles left of the diagonal are not touched.
   */
  readonly gramAdd: (
    G: Float64Array,
    A: Float64Array,
    targets: number,
    stride: number,
    count: number,
  ) => void;
  /**
   * `A = L Lᵀ`: the lower triangle of A, n × n, is overwritten by L; the upper one is neither read nor written.
   * Returns n, or the index of the first pivot that is not positive (NaN included).
   */
  readonly factorCholesky: (L: Float64Array, n: number) => number;
  /** Solves `L x = b` in place; L holds its rows `ld` entries apart. */
  readonly solveLower: (L: Float64Array, ld: number, n: number, x: Float64Array) => void;
  /** Solves `Lᵀ x = b` in place; L holds its rows `ld` entries apart. */
  readonly solveLowerTransposed: (L: Float64Array, ld: number, n: number, x: Float64Array) => void;
  /** Solves `L X = B` in place for q right sides, X n × q. */
  readonly solveLowerMany: (L: Float64Array, n: number, X: Float64Array, q: number) => void;
  /** Solves `Lᵀ X = B` in place for q right sides, X n × q. */
  readonly solveLowerTransposedMany: (L: Float64Array, n: number, X: Float64Array, q: number) => void;
}

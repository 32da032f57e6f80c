// Dense kernels on float64 arrays in linear memory, compiled by AssemblyScript. Arguments are byte addresses (16-byte
// aligned where `allocate` made them) and sizes in entries; matrices are row-major. No call allocates. Each kernel has a
// twin in ../plain.ts that adds in the same order, so that both give the same bits: sums over a row run in two
// interleaved lanes (even and odd entries), joined at the end as even + odd, then the tail.

// @ts-ignore: decorator
@inline
function at(base: usize, index: i32): usize {
  return base + (<usize>index << 3);
}

/** Σ a[i] b[i] over n entries. */
// @ts-ignore: decorator
@inline
function dotOf(a: usize, b: usize, n: i32): f64 {
  let lanes = f64x2.splat(0);
  const even = n & ~1;
  for (let i = 0; i < even; i += 2) {
    lanes = f64x2.add(lanes, f64x2.mul(v128.load(at(a, i)), v128.load(at(b, i))));
  }
  let sum = f64x2.extract_lane(lanes, 0) + f64x2.extract_lane(lanes, 1);
  if (even < n) sum += load<f64>(at(a, even)) * load<f64>(at(b, even));
  return sum;
}

/** y += alpha x over n entries. */
// @ts-ignore: decorator
@inline
function axpy(y: usize, alpha: f64, x: usize, n: i32): void {
  const factor = f64x2.splat(alpha);
  const even = n & ~1;
  for (let i = 0; i < even; i += 2) {
    v128.store(at(y, i), f64x2.add(v128.load(at(y, i)), f64x2.mul(factor, v128.load(at(x, i)))));
  }
  if (even < n) store<f64>(at(y, even), load<f64>(at(y, even)) + alpha * load<f64>(at(x, even)));
}

export function dot(a: usize, b: usize, n: i32): f64 {
  return dotOf(a, b, n);
}

export function addScaled(y: usize, alpha: f64, x: usize, n: i32): void {
  axpy(y, alpha, x, n);
}

/** out = M v, M rows × cols. */
export function apply(out: usize, M: usize, v: usize, rows: i32, cols: i32): void {
  const step = <usize>cols << 3;
  for (let i = 0; i < rows; i++, M += step) store<f64>(at(out, i), dotOf(M, v, cols));
}

/** out = Mᵀ v, M rows × cols. */
export function applyTransposed(out: usize, M: usize, v: usize, rows: i32, cols: i32): void {
  for (let j = 0; j < cols; j++) store<f64>(at(out, j), 0);
  const step = <usize>cols << 3;
  for (let i = 0; i < rows; i++, M += step) axpy(out, load<f64>(at(v, i)), M, cols);
}

/** C += A B, A rows × inner, B inner × cols. */
export function multiplyAdd(C: usize, A: usize, B: usize, rows: i32, inner: i32, cols: i32): void {
  const step = <usize>cols << 3;
  for (let i = 0; i < rows; i++, C += step) {
    let row = B;
    for (let k = 0; k < inner; k++, row += step) axpy(C, load<f64>(at(A, i * inner + k)), row, cols);
  }
}

/** C += A Bᵀ, A rows × inner, B cols × inner. */
export function multiplyTransposedAdd(C: usize, A: usize, B: usize, rows: i32, inner: i32, cols: i32): void {
  const step = <usize>inner << 3;
  for (let i = 0; i < rows; i++, A += step) {
    let row = B;
    for (let j = 0; j < cols; j++, row += step) {
      const c = at(C, i * cols + j);
      store<f64>(c, load<f64>(c) + dotOf(A, row, inner));
    }
  }
}

/** Lower triangle of S += alpha v vᵀ, S n × n. */
export function rankOneUpdate(S: usize, alpha: f64, v: usize, n: i32): void {
  for (let i = 0; i < n; i++) axpy(at(S, i * n), alpha * load<f64>(at(v, i)), v, i + 1);
}

/** One 4 × 4 tile of the Gram sum, the sample index innermost. */
function addTile(G: usize, A: usize, stride: i32, count: i32, i: i32, j: i32): void {
  let g00 = f64x2.splat(0), g01 = g00, g10 = g00, g11 = g00, g20 = g00, g21 = g00, g30 = g00, g31 = g00;
  let a = at(A, i);
  let b = at(A, j);
  const step = <usize>stride << 3;
  for (let k = 0; k < count; k++) {
    const b0 = v128.load(b);
    const b1 = v128.load(b, 16);
    const a0 = v128.load_splat<f64>(a);
    g00 = f64x2.add(g00, f64x2.mul(a0, b0));
    g01 = f64x2.add(g01, f64x2.mul(a0, b1));
    const a1 = v128.load_splat<f64>(a, 8);
    g10 = f64x2.add(g10, f64x2.mul(a1, b0));
    g11 = f64x2.add(g11, f64x2.mul(a1, b1));
    const a2 = v128.load_splat<f64>(a, 16);
    g20 = f64x2.add(g20, f64x2.mul(a2, b0));
    g21 = f64x2.add(g21, f64x2.mul(a2, b1));
    const a3 = v128.load_splat<f64>(a, 24);
    g30 = f64x2.add(g30, f64x2.mul(a3, b0));
    g31 = f64x2.add(g31, f64x2.mul(a3, b1));
    a += step;
    b += step;
  }
  let c = at(G, i * stride + j);
  v128.store(c, f64x2.add(v128.load(c), g00));
  v128.store(c, f64x2.add(v128.load(c, 16), g01), 16);
  c += step;
  v128.store(c, f64x2.add(v128.load(c), g10));
  v128.store(c, f64x2.add(v128.load(c, 16), g11), 16);
  c += step;
  v128.store(c, f64x2.add(v128.load(c), g20));
  v128.store(c, f64x2.add(v128.load(c, 16), g21), 16);
  c += step;
  v128.store(c, f64x2.add(v128.load(c), g30));
  v128.store(c, f64x2.add(v128.load(c, 16), g31), 16);
}

/** G += Wᵀ [W | Y] over `count` rows of A = [W | Y]; upper tiles only. `targets` and `stride` are multiples of four. */
export function gramAdd(G: usize, A: usize, targets: i32, stride: i32, count: i32): void {
  for (let i = 0; i < targets; i += 4) {
    for (let j = i; j < stride; j += 4) addTile(G, A, stride, count, i, j);
  }
}

/** A = L Lᵀ in place of the lower triangle; returns n, or the index of the first pivot that is not positive. */
export function factorCholesky(L: usize, n: i32): i32 {
  for (let i = 0; i < n; i++) {
    const rowI = at(L, i * n);
    for (let j = 0; j <= i; j++) {
      const rowJ = at(L, j * n);
      const sum = load<f64>(at(rowI, j)) - dotOf(rowI, rowJ, j);
      if (i > j) {
        store<f64>(at(rowI, j), sum / load<f64>(at(rowJ, j)));
      } else {
        if (!(sum > 0)) return i;
        store<f64>(at(rowI, i), Math.sqrt(sum));
      }
    }
  }
  return n;
}

/** Solves L x = b in place, L n × n with row length `ld`. */
export function solveLower(L: usize, ld: i32, n: i32, x: usize): void {
  for (let i = 0; i < n; i++) {
    const row = at(L, i * ld);
    store<f64>(at(x, i), (load<f64>(at(x, i)) - dotOf(row, x, i)) / load<f64>(at(row, i)));
  }
}

/** Solves Lᵀ x = b in place, L n × n with row length `ld`. */
export function solveLowerTransposed(L: usize, ld: i32, n: i32, x: usize): void {
  for (let i = n - 1; i >= 0; i--) {
    const row = at(L, i * ld);
    const value = load<f64>(at(x, i)) / load<f64>(at(row, i));
    store<f64>(at(x, i), value);
    axpy(x, -value, row, i);
  }
}

/** Solves L X = B in place for q right sides, X n × q. */
export function solveLowerMany(L: usize, n: i32, X: usize, q: i32): void {
  for (let i = 0; i < n; i++) {
    const row = at(X, i * q);
    for (let k = 0; k < i; k++) axpy(row, -load<f64>(at(L, i * n + k)), at(X, k * q), q);
    const pivot = load<f64>(at(L, i * n + i));
    for (let c = 0; c < q; c++) store<f64>(at(row, c), load<f64>(at(row, c)) / pivot);
  }
}

/** Solves Lᵀ X = B in place for q right sides, X n × q. */
export function solveLowerTransposedMany(L: usize, n: i32, X: usize, q: i32): void {
  for (let i = n - 1; i >= 0; i--) {
    const row = at(X, i * q);
    const pivot = load<f64>(at(L, i * n + i));
    for (let c = 0; c < q; c++) store<f64>(at(row, c), load<f64>(at(row, c)) / pivot);
    for (let k = 0; k < i; k++) axpy(at(X, k * q), -load<f64>(at(L, i * n + k)), row, q);
  }
}

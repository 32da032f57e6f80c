import type { Kernels } from './kernels.ts';

/** The kernels in plain TypeScript: the fallback, and the check of the WebAssembly ones. */
export const plainKernels: Kernels = {
  kind: 'plain',
  allocate: (length) => new Float64Array(length),
  dot: (a, b, n) => dotAt(a, 0, b, 0, n),
  addScaled: (y, alpha, x, n) => addScaledAt(y, 0, alpha, x, 0, n),
  apply(out, M, v, rows, cols) {
    for (let i = 0; i < rows; i++) out[i] = dotAt(M, i * cols, v, 0, cols);
  },
  applyTransposed(out, M, v, rows, cols) {
    out.fill(0, 0, cols);
    for (let i = 0; i < rows; i++) addScaledAt(out, 0, v[i], M, i * cols, cols);
  },
  multiplyAdd(C, A, B, rows, inner, cols) {
    for (let i = 0; i < rows; i++) {
      for (let k = 0; k < inner; k++) addScaledAt(C, i * cols, A[i * inner + k], B, k * cols, cols);
    }
  },
  multiplyTransposedAdd(C, A, B, rows, inner, cols) {
    for (let i = 0; i < rows; i++) {
      for (let j = 0; j < cols; j++) C[i * cols + j] += dotAt(A, i * inner, B, j * inner, inner);
    }
  },
  rankOneUpdate(S, alpha, v, n) {
    for (let i = 0; i < n; i++) addScaledAt(S, i * n, alpha * v[i], v, 0, i + 1);
  },
  gramAdd(G, A, targets, stride, count) {
    for (let i = 0; i < targets; i += 4) {
      for (let j = i; j < stride; j += 4) addTile(G, A, stride, count, i, j);
    }
  },
  factorCholesky(L, n) {
    for (let i = 0; i < n; i++) {
      const rowI = i * n;
      for (let j = 0; j <= i; j++) {
        const rowJ = j * n;
        const sum = L[rowI + j] - dotAt(L, rowI, L, rowJ, j);
        if (i > j) {
          L[rowI + j] = sum / L[rowJ + j];
        } else {
          if (!(sum > 0)) return i;
          L[rowI + i] = Math.sqrt(sum);
        }
      }
    }
    return n;
  },
  solveLower(L, ld, n, x) {
    for (let i = 0; i < n; i++) x[i] = (x[i] - dotAt(L, i * ld, x, 0, i)) / L[i * ld + i];
  },
  solveLowerTransposed(L, ld, n, x) {
    for (let i = n - 1; i >= 0; i--) {
      x[i] /= L[i * ld + i];
      addScaledAt(x, 0, -x[i], L, i * ld, i);
    }
  },
  solveLowerMany(L, n, X, q) {
    for (let i = 0; i < n; i++) {
      for (let k = 0; k < i; k++) addScaledAt(X, i * q, -L[i * n + k], X, k * q, q);
      divideAt(X, i * q, L[i * n + i], q);
    }
  },
  solveLowerTransposedMany(L, n, X, q) {
    for (let i = n - 1; i >= 0; i--) {
      divideAt(X, i * q, L[i * n + i], q);
      for (let k = 0; k < i; k++) addScaledAt(X, k * q, -L[i * n + k], X, i * q, q);
    }
  },
};

/** Two interleaved sums, joined as even + odd, then the tail: the order of a two-lane vector unit. */
function dotAt(a: Float64Array, ai: number, b: Float64Array, bi: number, n: number): number {
  const whole = n & ~1;
  let even = 0;
  let odd = 0;
  for (let i = 0; i < whole; i += 2) {
    even += a[ai + i] * b[bi + i];
    odd += a[ai + i + 1] * b[bi + i + 1];
  }
  let sum = even + odd;
  if (whole < n) sum += a[ai + whole] * b[bi + whole];
  return sum;
}

function addScaledAt(
  y: Float64Array,
  yi: number,
  alpha: number,
  x: Float64Array,
  xi: number,
  n: number,
): void {
  for (let i = 0; i < n; i++) y[yi + i] += alpha * x[xi + i];
}

function divideAt(X: Float64Array, at: number, divisor: number, q: number): void {
  for (let c = 0; c < q; c++) X[at + c] /= divisor;
}

/** One 4 × 4 tile: `G[i..i+3][j..j+3] += Σₖ A[k][i..i+3]ᵀ A[k][j..j+3]`. */
function addTile(
  G: Float64Array,
  A: Float64Array,
  stride: number,
  count: number,
  i: number,
  j: number,
): void {
  let g00 = 0;
  let g01 = 0;
  let g02 = 0;
  let g03 = 0;
  let g10 = 0;
  let g11 = 0;
  let g12 = 0;
  let g13 = 0;
  let g20 = 0;
  let g21 = 0;
  let g22 = 0;
  let g23 = 0;
  let g30 = 0;
  let g31 = 0;
  let g32 = 0;
  let g33 = 0;
  let a = i;
  let b = j;
  for (let k = 0; k < count; k++) {
    const a0 = A[a];
    const a1 = A[a + 1];
    const a2 = A[a + 2];
    const a3 = A[a + 3];
    const b0 = A[b];
    const b1 = A[b + 1];
    const b2 = A[b + 2];
    const b3 = A[b + 3];
    g00 += a0 * b0;
    g01 += a0 * b1;
    g02 += a0 * b2;
    g03 += a0 * b3;
    g10 += a1 * b0;
    g11 += a1 * b1;
    g12 += a1 * b2;
    g13 += a1 * b3;
    g20 += a2 * b0;
    g21 += a2 * b1;
    g22 += a2 * b2;
    g23 += a2 * b3;
    g30 += a3 * b0;
    g31 += a3 * b1;
    g32 += a3 * b2;
    g33 += a3 * b3;
    a += stride;
    b += stride;
  }
  let c = i * stride + j;
  G[c] += g00;
  G[c + 1] += g01;
  G[c + 2] += g02;
  G[c + 3] += g03;
  c += stride;
  G[c] += g10;
  G[c + 1] += g11;
  G[c + 2] += g12;
  G[c + 3] += g13;
  c += stride;
  G[c] += g20;
  G[c + 1] += g21;
  G[c + 2] += g22;
  G[c + 3] += g23;
  c += stride;
  G[c] += g30;
  G[c + 1] += g31;
  G[c + 2] += g32;
  G[c + 3] += g33;
}

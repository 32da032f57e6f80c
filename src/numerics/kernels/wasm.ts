import type { Kernels } from './kernels.ts';
import { plainKernels } from './plain.ts';
import { WASM_CODE } from './wasmCode.ts';

/** The compiled functions: byte addresses and sizes in entries. */
type Compiled = Record<Exclude<keyof Kernels, 'kind' | 'allocate'>, (...args: number[]) => number>;

const PAGE = 65536;
/** `allocate` keeps arrays apart by whole 16-byte vectors. */
const ALIGN = 16;

let compiled: WebAssembly.Module | null | undefined;

/** The module, compiled once a thread; null where WebAssembly with vectors is not to be had. */
function compileOnce(): WebAssembly.Module | null {
  if (compiled === undefined) {
    try {
      const text = atob(WASM_CODE);
      compiled = new WebAssembly.Module(Uint8Array.from(text, (char) => char.charCodeAt(0)));
    } catch {
      compiled = null;
    }
  }
  return compiled;
}

/**
 * Kernels with room for `length` entries in arrays made by `allocate` (each array takes up to one entry more).
 * WebAssembly where it can be had, else the plain twins, which give the same bits. The memory goes when the kernels and
 * the arrays are no longer referred to. Works in Node, in a worker and in a page: nothing is fetched.
 */
export function createKernels(length: number): Kernels {
  const module = compileOnce();
  if (!module) return plainKernels;
  const bytes = Math.ceil((length * 8 + ALIGN * 64) / PAGE) * PAGE;
  const memory = new WebAssembly.Memory({ initial: bytes / PAGE });
  const { exports } = new WebAssembly.Instance(module, { env: { memory } });
  return wrap(exports as unknown as Compiled, memory.buffer);
}

function wrap(wasm: Compiled, buffer: ArrayBuffer): Kernels {
  const plain = plainKernels;
  let free = ALIGN;
  return {
    kind: 'wasm',
    allocate(count) {
      const start = free;
      const end = start + Math.ceil((count * 8) / ALIGN) * ALIGN;
      if (end > buffer.byteLength) return new Float64Array(count);
      free = end;
      return new Float64Array(buffer, start, count);
    },
    dot: (a, b, n) =>
      a.buffer === buffer && b.buffer === buffer
        ? wasm.dot(a.byteOffset, b.byteOffset, n)
        : plain.dot(a, b, n),
    addScaled(y, alpha, x, n) {
      if (y.buffer !== buffer || x.buffer !== buffer) plain.addScaled(y, alpha, x, n);
      else wasm.addScaled(y.byteOffset, alpha, x.byteOffset, n);
    },
    apply(out, M, v, rows, cols) {
      if (out.buffer !== buffer || M.buffer !== buffer || v.buffer !== buffer)
        plain.apply(out, M, v, rows, cols);
      else wasm.apply(out.byteOffset, M.byteOffset, v.byteOffset, rows, cols);
    },
    applyTransposed(out, M, v, rows, cols) {
      if (out.buffer !== buffer || M.buffer !== buffer || v.buffer !== buffer) {
        plain.applyTransposed(out, M, v, rows, cols);
      } else wasm.applyTransposed(out.byteOffset, M.byteOffset, v.byteOffset, rows, cols);
    },
    multiplyAdd(C, A, B, rows, inner, cols) {
      if (C.buffer !== buffer || A.buffer !== buffer || B.buffer !== buffer) {
        plain.multiplyAdd(C, A, B, rows, inner, cols);
      } else wasm.multiplyAdd(C.byteOffset, A.byteOffset, B.byteOffset, rows, inner, cols);
    },
    multiplyTransposedAdd(C, A, B, rows, inner, cols) {
      if (C.buffer !== buffer || A.buffer !== buffer || B.buffer !== buffer) {
        plain.multiplyTransposedAdd(C, A, B, rows, inner, cols);
      } else wasm.multiplyTransposedAdd(C.byteOffset, A.byteOffset, B.byteOffset, rows, inner, cols);
    },
    rankOneUpdate(S, alpha, v, n) {
      if (S.buffer !== buffer || v.buffer !== buffer) plain.rankOneUpdate(S, alpha, v, n);
      else wasm.rankOneUpdate(S.byteOffset, alpha, v.byteOffset, n);
    },
    gramAdd(G, A, targets, stride, count) {
      if (G.buffer !== buffer || A.buffer !== buffer) plain.gramAdd(G, A, targets, stride, count);
      else wasm.gramAdd(G.byteOffset, A.byteOffset, targets, stride, count);
    },
    factorCholesky: (L, n) =>
      L.buffer === buffer ? wasm.factorCholesky(L.byteOffset, n) : plain.factorCholesky(L, n),
    solveLower(L, ld, n, x) {
      if (L.buffer !== buffer || x.buffer !== buffer) plain.solveLower(L, ld, n, x);
      else wasm.solveLower(L.byteOffset, ld, n, x.byteOffset);
    },
    solveLowerTransposed(L, ld, n, x) {
      if (L.buffer !== buffer || x.buffer !== buffer) plain.solveLowerTransposed(L, ld, n, x);
      else wasm.solveLowerTransposed(L.byteOffset, ld, n, x.byteOffset);
    },
    solveLowerMany(L, n, X, q) {
      if (L.buffer !== buffer || X.buffer !== buffer) plain.solveLowerMany(L, n, X, q);
      else wasm.solveLowerMany(L.byteOffset, n, X.byteOffset, q);
    },
    solveLowerTransposedMany(L, n, X, q) {
      if (L.buffer !== buffer || X.buffer !== buffer) plain.solveLowerTransposedMany(L, n, X, q);
      else wasm.solveLowerTransposedMany(L.byteOffset, n, X.byteOffset, q);
    },
  };
}

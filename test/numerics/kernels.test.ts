import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import type { Kernels } from '../../src/numerics/kernels/kernels.ts';
import { plainKernels } from '../../src/numerics/kernels/plain.ts';
import { createKernels } from '../../src/numerics/kernels/wasm.ts';
import { createRandom } from '../../src/numerics/random.ts';

const ROOM = 20_000;

/** Numbers of both signs whose size varies over 18 decades, with some exact zeros. */
function filler(seed: number) {
  const random = createRandom(seed);
  return (array: Float64Array) => {
    for (let i = 0; i < array.length; i++) {
      array[i] = random() < 0.1 ? 0 : (random() - 0.5) * 10 ** (18 * random() - 9);
    }
    return array;
  };
}

/** A symmetric, strongly diagonally dominant matrix: positive definite (Gershgorin). */
function definite(n: number, seed: number): Float64Array {
  const random = createRandom(seed);
  const S = new Float64Array(n * n);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < i; j++) S[i * n + j] = S[j * n + i] = random() - 0.5;
    S[i * n + i] = n;
  }
  return S;
}

interface Shape {
  readonly rows: number;
  readonly inner: number;
  readonly cols: number;
  readonly seed: number;
}

/** Each case runs one kernel on fresh arrays and returns everything it may have written. */
const CASES: Record<string, (k: Kernels, shape: Shape) => Float64Array | number> = {
  dot: (k, { rows, seed }) => {
    const fill = filler(seed);
    return k.dot(fill(k.allocate(rows)), fill(k.allocate(rows)), rows);
  },
  addScaled: (k, { rows, seed }) => {
    const fill = filler(seed);
    const y = fill(k.allocate(rows));
    k.addScaled(y, -1.7, fill(k.allocate(rows)), rows);
    return y;
  },
  apply: (k, { rows, cols, seed }) => {
    const fill = filler(seed);
    const out = fill(k.allocate(rows));
    k.apply(out, fill(k.allocate(rows * cols)), fill(k.allocate(cols)), rows, cols);
    return out;
  },
  applyTransposed: (k, { rows, cols, seed }) => {
    const fill = filler(seed);
    const out = fill(k.allocate(cols));
    k.applyTransposed(out, fill(k.allocate(rows * cols)), fill(k.allocate(rows)), rows, cols);
    return out;
  },
  multiplyAdd: (k, { rows, inner, cols, seed }) => {
    const fill = filler(seed);
    const C = fill(k.allocate(rows * cols));
    k.multiplyAdd(C, fill(k.allocate(rows * inner)), fill(k.allocate(inner * cols)), rows, inner, cols);
    return C;
  },
  multiplyTransposedAdd: (k, { rows, inner, cols, seed }) => {
    const fill = filler(seed);
    const C = fill(k.allocate(rows * cols));
    const A = fill(k.allocate(rows * inner));
    k.multiplyTransposedAdd(C, A, fill(k.allocate(cols * inner)), rows, inner, cols);
    return C;
  },
  rankOneUpdate: (k, { rows, seed }) => {
    const fill = filler(seed);
    const S = fill(k.allocate(rows * rows));
    k.rankOneUpdate(S, 0.3, fill(k.allocate(rows)), rows);
    return S;
  },
  gramAdd: (k, { rows, inner, cols, seed }) => {
    const fill = filler(seed);
    const targets = Math.ceil(inner / 4) * 4;
    const stride = targets + Math.ceil(cols / 4) * 4;
    const G = fill(k.allocate(targets * stride));
    k.gramAdd(G, fill(k.allocate(rows * stride)), targets, stride, rows);
    return G;
  },
  factorCholesky: (k, { rows, seed }) => {
    const L = k.allocate(rows * rows);
    L.set(definite(rows, seed));
    expect(k.factorCholesky(L, rows)).toBe(rows);
    return L;
  },
  solveLower: (k, { rows, seed }) => solveOne(k, rows, seed, k.solveLower),
  solveLowerTransposed: (k, { rows, seed }) => solveOne(k, rows, seed, k.solveLowerTransposed),
  solveLowerMany: (k, { rows, cols, seed }) => solveMany(k, rows, cols, seed, k.solveLowerMany),
  solveLowerTransposedMany: (k, { rows, cols, seed }) =>
    solveMany(k, rows, cols, seed, k.solveLowerTransposedMany),
};

function solveOne(k: Kernels, n: number, seed: number, solve: Kernels['solveLower']): Float64Array {
  const L = k.allocate(n * (n + 3));
  const S = definite(n, seed);
  for (let i = 0; i < n; i++) L.set(S.subarray(i * n, (i + 1) * n), i * (n + 3));
  const x = filler(seed)(k.allocate(n));
  solve(L, n + 3, n, x);
  return x;
}

function solveMany(
  k: Kernels,
  n: number,
  q: number,
  seed: number,
  solve: Kernels['solveLowerMany'],
): Float64Array {
  const L = k.allocate(n * n);
  L.set(definite(n, seed));
  const X = filler(seed)(k.allocate(n * q));
  solve(L, n, X, q);
  return X;
}

const shapes = fc.record({
  rows: fc.integer({ min: 0, max: 23 }),
  inner: fc.integer({ min: 0, max: 23 }),
  cols: fc.integer({ min: 0, max: 23 }),
  seed: fc.integer({ min: 0, max: 2 ** 31 }),
});

describe('the WebAssembly kernels', () => {
  it('are what createKernels gives on this machine', () => {
    expect(createKernels(100).kind).toBe('wasm');
  });

  it.each(Object.keys(CASES))('%s gives the bits of its plain twin, sizes 0 to 23', (name) => {
    fc.assert(
      fc.property(shapes, (shape) => {
        const ours = CASES[name](createKernels(ROOM), shape);
        const twin = CASES[name](plainKernels, shape);
        expect(new Uint8Array(bitsOf(ours))).toEqual(new Uint8Array(bitsOf(twin)));
      }),
      { numRuns: 60 },
    );
  });

  it('take arrays from outside their memory and give the same bits', () => {
    const kernels = createKernels(ROOM);
    const far: Kernels = { ...kernels, allocate: (length) => new Float64Array(length) };
    const shape = { rows: 9, inner: 7, cols: 11, seed: 5 };
    for (const run of Object.values(CASES)) {
      expect(bitsOf(run(far, shape))).toEqual(bitsOf(run(plainKernels, shape)));
    }
  });

  it('allocate plain arrays once the room is used up', () => {
    const kernels = createKernels(10);
    const large = kernels.allocate(10_000_000);
    expect(large).toHaveLength(10_000_000);
    expect(kernels.dot(large, large, 4)).toBe(0);
  });
});

describe.each([
  ['plain', plainKernels],
  ['wasm', createKernels(ROOM)],
] as const)('the %s kernels against the defining equations', (_, k) => {
  it('factorCholesky gives L Lᵀ = A to rounding', () => {
    const n = 30;
    const A = definite(n, 3);
    const L = k.allocate(n * n);
    L.set(A);
    k.factorCholesky(L, n);
    for (let i = 0; i < n; i++) {
      for (let j = 0; j <= i; j++) {
        let sum = 0;
        for (let m = 0; m <= j; m++) sum += L[i * n + m] * L[j * n + m];
        expect(Math.abs(sum - A[i * n + j])).toBeLessThanOrEqual(n * n * Number.EPSILON);
      }
    }
  });

  it('factorCholesky stops at the first pivot that is not positive, NaN included', () => {
    for (const bad of [-1, 0, Number.NaN]) {
      const L = k.allocate(9);
      L.set([1, 0, 0, 0, 1, 0, 0, 0, bad]);
      expect(k.factorCholesky(L, 3)).toBe(2);
    }
  });

  it('gramAdd sums the products of the columns, row by row', () => {
    const A = k.allocate(2 * 8);
    A.set([1, 2, 0, 0, 3, 0, 0, 0, 4, 5, 0, 0, 6, 0, 0, 0]);
    const G = k.allocate(4 * 8);
    k.gramAdd(G, A, 4, 8, 2);
    expect([G[0], G[1], G[4], G[9], G[12]]).toEqual([1 + 16, 2 + 20, 3 + 24, 4 + 25, 6 + 30]);
  });

  it('the triangular solves undo the products', () => {
    const n = 7;
    const L = k.allocate(n * n);
    L.set(definite(n, 8));
    const x = k.allocate(n).map((_, i) => i - 2.5);
    const lower = new Float64Array(n);
    const upper = new Float64Array(n);
    for (let i = 0; i < n; i++) {
      for (let j = 0; j <= i; j++) {
        lower[i] += L[i * n + j] * x[j];
        upper[j] += L[i * n + j] * x[i];
      }
    }
    k.solveLower(L, n, n, lower);
    k.solveLowerTransposed(L, n, n, upper);
    for (let i = 0; i < n; i++) {
      expect(lower[i]).toBeCloseTo(x[i], 13);
      expect(upper[i]).toBeCloseTo(x[i], 13);
    }
  });
});

function bitsOf(value: Float64Array | number): ArrayBuffer {
  return Float64Array.from(typeof value === 'number' ? [value] : value).buffer;
}

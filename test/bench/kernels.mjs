// Gram plus cross-correlation of many rows, and a Cholesky factorisation: WebAssembly against the plain twins.
import { plainKernels } from '../../dist/numerics/kernels/plain.js';
import { createKernels } from '../../dist/numerics/kernels/wasm.js';
import { createRandom } from '../../dist/numerics/random.js';
import { heading, quantile, smoke, timeInTurn } from './measure.mjs';

const ROWS = smoke ? 2_000 : 200_000;
const BLOCK = 128;

heading(`Kernels: Gram plus cross of ${ROWS} rows in blocks of ${BLOCK}; Cholesky factor`);
console.log('functions | plain ms | wasm ms | wasm GFlop/s | ratio (medians) | Cholesky ratio');
for (const functions of [36, 100]) {
  const times = timeInTurn({
    plain: gram(plainKernels, functions),
    wasm: gram(createKernels(BLOCK * functions * 4 + functions * functions * 4), functions),
  });
  const factors = timeInTurn({
    plain: cholesky(plainKernels, functions),
    wasm: cholesky(createKernels(functions * functions * 3), functions),
  });
  const plain = quantile(times.plain, 0.5);
  const wasm = quantile(times.wasm, 0.5);
  const flops = ROWS * (functions * functions + 2 * functions * functions);
  console.log(
    `${functions} | ${(plain * 1e3).toFixed(0)} | ${(wasm * 1e3).toFixed(0)} | ${(flops / wasm / 1e9).toFixed(1)} | ` +
      `${(plain / wasm).toFixed(2)} | ${(quantile(factors.plain, 0.5) / quantile(factors.wasm, 0.5)).toFixed(2)}`,
  );
}

/** @param {typeof plainKernels} k @param {number} functions */
function gram(k, functions) {
  const targets = Math.ceil(functions / 4) * 4;
  const stride = 2 * targets;
  const block = k.allocate(BLOCK * stride);
  const random = createRandom(1);
  for (let i = 0; i < block.length; i++) block[i] = random() - 0.5;
  const G = k.allocate(targets * stride);
  return () => {
    G.fill(0);
    for (let row = 0; row < ROWS; row += BLOCK) k.gramAdd(G, block, targets, stride, BLOCK);
    return G[0];
  };
}

/** @param {typeof plainKernels} k @param {number} n */
function cholesky(k, n) {
  const L = k.allocate(n * n);
  return () => {
    for (let repeat = 0; repeat < 50; repeat++) {
      L.fill(0.1);
      for (let i = 0; i < n; i++) L[i * n + i] = n;
      k.factorCholesky(L, n);
    }
    return L[0];
  };
}

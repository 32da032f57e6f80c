// Fit of 100 thin-plate functions on 200,000 samples, lifting included, against the bare Gram kernel on the same numbers.
import { createKernels } from '../../dist/numerics/kernels/wasm.js';
import { createRandom } from '../../dist/numerics/random.js';
import { fitPredictor } from '../../dist/predictor/fit.js';
import { heading, quantile, smoke, timeInTurn } from './measure.mjs';

const TRAJECTORIES = smoke ? 10 : 200;
const STEPS = smoke ? 100 : 1000;
const FUNCTIONS = smoke ? 10 : 100;
const BLOCK = 128;

/** Forced van der Pol oscillator, one classical Runge–Kutta step of 0.01 s. @param {number[]} x @param {number} u */
function step(x, u) {
  const h = 0.01;
  /** @param {number} a @param {number} b */
  const f = (a, b) => [2 * b, -0.8 * a + 2 * b - 10 * a * a * b + u];
  const k1 = f(x[0], x[1]);
  const k2 = f(x[0] + (h / 2) * k1[0], x[1] + (h / 2) * k1[1]);
  const k3 = f(x[0] + (h / 2) * k2[0], x[1] + (h / 2) * k2[1]);
  const k4 = f(x[0] + h * k3[0], x[1] + h * k3[1]);
  return [0, 1].map((i) => x[i] + (h / 6) * (k1[i] + 2 * k2[i] + 2 * k3[i] + k4[i]));
}

const random = createRandom(1);
const draw = () => 2 * random() - 1;
const trajectories = Array.from({ length: TRAJECTORIES }, () => {
  const x = new Float64Array(2 * (STEPS + 1));
  const u = Float64Array.from({ length: STEPS }, draw);
  let state = [draw(), draw()];
  x.set(state);
  for (let k = 0; k < STEPS; k++) {
    state = step(state, u[k]);
    x.set(state, 2 * (k + 1));
  }
  return { role: /** @type {const} */ ('fit'), steps: STEPS, x, u };
});
const centres = Float64Array.from({ length: 2 * FUNCTIONS }, draw);
const nz = FUNCTIONS + 3;

/** `z = (x, r² log r about each centre, 1)`. @param {Float64Array} z @param {ArrayLike<number>} x */
function liftInto(z, x) {
  z[0] = x[0];
  z[1] = x[1];
  for (let i = 0; i < FUNCTIONS; i++) {
    const a = x[0] - centres[2 * i];
    const b = x[1] - centres[2 * i + 1];
    const square = a * a + b * b;
    z[2 + i] = square > 0 ? 0.5 * square * Math.log(square) : 0;
  }
  z[nz - 1] = 1;
}

/** @param {string} letter @param {number} n */
const channels = (letter, n) =>
  Array.from({ length: n }, (_, i) => ({ name: `${letter}${i}`, unit: '1', min: -1, max: 1 }));
/** @param {number} n */
const unit = (n) => ({ centre: new Array(n).fill(0), half: new Array(n).fill(1) });
const bound = { nx: 2, nz, liftInto, jacobianInto: () => {} };
const lifting = {
  nx: 2,
  nz,
  names: Array.from({ length: nz }, (_, i) => `z${i}`),
  parts: [],
  dropped: [],
  constantIndex: nz - 1,
};
const dataset = {
  sampleTime: 0.01,
  coordinates: channels('x', 2),
  inputs: channels('u', 1),
  trajectories,
  cuts: { diverged: 0, leftRange: 0 },
};

/** @param {'gram' | 'orthogonal'} route */
const regress = (route) => () =>
  fitPredictor({
    dataset,
    lifting,
    bound,
    scaling: { x: unit(2), u: unit(1), y: unit(1) },
    outputs: channels('y', 1),
    readout: [0],
    settings: { form: 'linear', route, ridge: 0 },
    horizon: 1,
  }).A.data[0];

const samples = TRAJECTORIES * STEPS;
const targets = Math.ceil((nz + 1) / 4) * 4;
const stride = targets + Math.ceil(nz / 4) * 4;

/** The lifted samples as the fit sees them, all in memory: rows `[z, u | z⁺]`, block after block. */
const blocks = (() => {
  const all = [];
  const z = new Float64Array(nz);
  let data = new Float64Array(0);
  let row = BLOCK;
  for (const { x, u } of trajectories) {
    for (let k = 0; k < STEPS; k++, row++) {
      if (row === BLOCK) {
        data = new Float64Array(BLOCK * stride);
        all.push(data);
        row = 0;
      }
      liftInto(z, x.subarray(2 * k, 2 * k + 2));
      data.set(z, row * stride);
      data[row * stride + nz] = u[k];
      liftInto(z, x.subarray(2 * k + 2, 2 * k + 4));
      data.set(z, row * stride + targets);
    }
  }
  return all;
})();

const kernels = createKernels(BLOCK * stride + targets * stride);
const work = kernels.allocate(BLOCK * stride);
const G = kernels.allocate(targets * stride);
/** The bare kernel: each block copied into its memory, then `G += Wᵀ [W | Y]`. */
const bare = () => {
  G.fill(0);
  for (const data of blocks) {
    work.set(data);
    kernels.gramAdd(G, work, targets, stride, BLOCK);
  }
  return G[0];
};
const lift = () => {
  const z = new Float64Array(nz);
  let sum = 0;
  for (const { x } of trajectories) {
    for (let k = 0; k <= STEPS; k++) {
      liftInto(z, x.subarray(2 * k, 2 * k + 2));
      sum += z[2];
    }
  }
  return sum;
};

heading(`Fit: ${samples} samples, ${FUNCTIONS} thin-plate functions, kernels: ${kernels.kind}`);
const times = timeInTurn({ bare, lift, gram: regress('gram') }, smoke ? 2 : 7, smoke ? 1 : 2);
const slow = timeInTurn({ orthogonal: regress('orthogonal') }, smoke ? 2 : 5, 1);
const median = quantile(times.bare, 0.5);
console.log('what | median ms | least ms | ratio to the bare kernel (medians)');
for (const [name, list] of Object.entries({
  'bare Gram kernel': times.bare,
  'lifting alone': times.lift,
  'fit, Gram route': times.gram,
  'fit, orthogonal route': slow.orthogonal,
})) {
  const middle = quantile(list, 0.5);
  console.log(
    `${name} | ${(middle * 1e3).toFixed(0)} | ${(Math.min(...list) * 1e3).toFixed(0)} | ${(middle / median).toFixed(2)}`,
  );
}

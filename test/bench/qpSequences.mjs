// Closed-loop sequences of condensed quadratic programs on random stable lifted predictors, for the bench of the solvers.
import { createRandom, drawNormal } from '../../dist/numerics/random.js';

/** Weight of the quadratic slack on a soft output limit. */
const SLACK_WEIGHT = 1e4;
const MOVE_WEIGHT = 0.02;
const INPUT_LIMIT = 1;
const RATE_LIMIT = 0.25;
const OUTPUT_LIMIT = 0.8;

/**
 * @param {{ nz: number, nu: number, N: number, soft: boolean, seed: number }} shape
 * @returns the structure (H, G, softness), the labels of its rows, and `drive(solve, steps)`, which runs the loop on the predictor
 * with process noise, references beyond the output limits and hands out `q`, `lower`, `upper` of each step.
 */
export function createSequence({ nz, nu, N, soft, seed }) {
  const random = createRandom(seed);
  const ny = nu;
  const { A, B, C } = drawPredictor(random, nz, nu, ny);
  const n = N * nu;
  const gamma = stackOutputs(A, B, C, nz, nu, ny, N);

  const H = new Float64Array(n * n);
  for (let k = 0; k < N * ny; k++) {
    for (let i = 0; i < n; i++) {
      const g = 2 * gamma[k * n + i];
      if (g !== 0) for (let j = 0; j < n; j++) H[i * n + j] += g * gamma[k * n + j];
    }
  }
  for (let i = 0; i < n; i++) {
    H[i * n + i] += 2 * MOVE_WEIGHT * (i + nu < n ? 2 : 1);
    if (i + nu < n) {
      H[i * n + i + nu] -= 2 * MOVE_WEIGHT;
      H[(i + nu) * n + i] -= 2 * MOVE_WEIGHT;
    }
  }

  const rows = [];
  const m = 2 * n + N * ny;
  const G = new Float64Array(m * n);
  const softness = new Float64Array(m);
  for (let i = 0; i < n; i++) {
    rows.push({ kind: 'input', channel: i % nu, step: Math.floor(i / nu) });
    G[i * n + i] = 1;
  }
  for (let i = 0; i < n; i++) {
    rows.push({ kind: 'rate', channel: i % nu, step: Math.floor(i / nu) });
    G[(n + i) * n + i] = 1;
    if (i >= nu) G[(n + i) * n + i - nu] = -1;
  }
  for (let k = 0; k < N * ny; k++) {
    rows.push({ kind: 'output', channel: k % ny, step: 1 + Math.floor(k / ny) });
    G.set(gamma.subarray(k * n, (k + 1) * n), (2 * n + k) * n);
    softness[2 * n + k] = soft ? 1 / (2 * SLACK_WEIGHT) : 0;
  }

  const drive = (solve, steps) => {
    let z = new Float64Array(nz);
    let uPrev = new Float64Array(nu);
    const q = new Float64Array(n);
    const lower = new Float64Array(m);
    const upper = new Float64Array(m);
    const levels = new Float64Array(ny);
    const phase = Array.from({ length: ny }, () => 2 * Math.PI * random());
    for (let t = 0; t < steps; t++) {
      if (t % 60 === 0) for (let i = 0; i < ny; i++) levels[i] = 2.4 * (random() - 0.5);
      const free = predictFree(A, C, z, nz, ny, N);
      for (let j = 0; j < n; j++) q[j] = j < nu ? -2 * MOVE_WEIGHT * uPrev[j] : 0;
      for (let k = 0; k < N * ny; k++) {
        const channel = k % ny;
        const ahead = t + Math.floor(k / ny);
        const wave = 0.15 * Math.sin((2 * Math.PI * ahead) / 25 + phase[channel]);
        const error = 2 * (free[k] - levels[channel] - wave);
        for (let j = 0; j < n; j++) q[j] += error * gamma[k * n + j];
      }
      lower.fill(-INPUT_LIMIT, 0, n);
      upper.fill(INPUT_LIMIT, 0, n);
      for (let i = 0; i < n; i++) {
        const before = i < nu ? uPrev[i] : 0;
        lower[n + i] = before - RATE_LIMIT;
        upper[n + i] = before + RATE_LIMIT;
      }
      for (let k = 0; k < N * ny; k++) {
        lower[2 * n + k] = -OUTPUT_LIMIT - free[k];
        upper[2 * n + k] = OUTPUT_LIMIT - free[k];
      }
      const u = solve(q, lower, upper);
      const next = multiply(A, z, nz, nz);
      const effect = multiply(B, u, nz, nu);
      for (let i = 0; i < nz; i++) next[i] += effect[i] + 0.002 * drawNormal(random);
      z = next;
      uPrev = Float64Array.from(u);
    }
  };
  return {
    n,
    m,
    nu,
    rows,
    structure: { H: { rows: n, cols: n, data: H }, G: { rows: m, cols: n, data: G }, softness },
    drive,
  };
}

/** Modes of decay 0.5 … 0.99 in turned axes; every output reaches 1.2 to 2.4 at full input, when all inputs help. */
function drawPredictor(random, nz, nu, ny) {
  let A = new Float64Array(nz * nz);
  for (let i = 0; i < nz; i++) {
    const decay = 0.5 + 0.49 * random() ** 0.5;
    if (i + 1 < nz && random() < 0.6) {
      const angle = 0.6 * random();
      A[i * nz + i] = decay * Math.cos(angle);
      A[i * nz + i + 1] = -decay * Math.sin(angle);
      A[(i + 1) * nz + i] = decay * Math.sin(angle);
      A[(i + 1) * nz + i + 1] = decay * Math.cos(angle);
      i++;
    } else A[i * nz + i] = decay;
  }
  for (let turn = 0; turn < 3; turn++) A = reflect(A, nz, random);
  const B = Float64Array.from({ length: nz * nu }, () => drawNormal(random) / Math.sqrt(nz));
  const C = Float64Array.from({ length: ny * nz }, () => drawNormal(random) / Math.sqrt(nz));
  // Scale each output by its largest value in the response to full inputs held for 400 steps.
  const most = new Float64Array(ny);
  for (let channel = 0; channel < nu; channel++) {
    let z = new Float64Array(nz);
    const u = new Float64Array(nu);
    u[channel] = 1;
    const effect = multiply(B, u, nz, nu);
    const largest = new Float64Array(ny);
    for (let t = 0; t < 400; t++) {
      z = multiply(A, z, nz, nz);
      for (let i = 0; i < nz; i++) z[i] += effect[i];
      const y = multiply(C, z, ny, nz);
      for (let i = 0; i < ny; i++) largest[i] = Math.max(largest[i], Math.abs(y[i]));
    }
    for (let i = 0; i < ny; i++) most[i] += largest[i];
  }
  for (let i = 0; i < ny; i++) {
    const factor = (1.2 + 1.2 * random()) / most[i];
    for (let j = 0; j < nz; j++) C[i * nz + j] *= factor;
  }
  return { A, B, C };
}

function reflect(A, nz, random) {
  const v = Float64Array.from({ length: nz }, () => drawNormal(random));
  const norm = Math.hypot(...v);
  const P = new Float64Array(nz * nz);
  for (let i = 0; i < nz; i++) {
    for (let j = 0; j < nz; j++) P[i * nz + j] = (i === j ? 1 : 0) - (2 * v[i] * v[j]) / (norm * norm);
  }
  return square(square(P, A, nz), P, nz);
}

function square(X, Y, n) {
  const Z = new Float64Array(n * n);
  for (let i = 0; i < n; i++) {
    for (let k = 0; k < n; k++) for (let j = 0; j < n; j++) Z[i * n + j] += X[i * n + k] * Y[k * n + j];
  }
  return Z;
}

function multiply(M, v, rows, cols) {
  const out = new Float64Array(rows);
  for (let i = 0; i < rows; i++) for (let j = 0; j < cols; j++) out[i] += M[i * cols + j] * v[j];
  return out;
}

/** y₁ … y_N without input. */
function predictFree(A, C, z, nz, ny, N) {
  const free = new Float64Array(N * ny);
  let now = z;
  for (let k = 0; k < N; k++) {
    now = multiply(A, now, nz, nz);
    free.set(multiply(C, now, ny, nz), k * ny);
  }
  return free;
}

/** `y_{k+1} = … + Σ_{i≤k} C A^{k−i} B u_i`, built from the columns of B alone. */
function stackOutputs(A, B, C, nz, nu, ny, N) {
  const n = N * nu;
  const gamma = new Float64Array(N * ny * n);
  for (let channel = 0; channel < nu; channel++) {
    let column = Float64Array.from({ length: nz }, (_, i) => B[i * nu + channel]);
    for (let lag = 0; lag < N; lag++) {
      const y = multiply(C, column, ny, nz);
      for (let k = lag; k < N; k++) {
        for (let i = 0; i < ny; i++) gamma[(k * ny + i) * n + (k - lag) * nu + channel] = y[i];
      }
      column = multiply(A, column, nz, nz);
    }
  }
  return gamma;
}

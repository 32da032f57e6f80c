import { zeros } from '../numerics/matrix.ts';
import type { StackedPrediction } from './prediction.ts';
import type { CondensedQp, ControlProblem, RowLabel } from './problem.ts';

/** The limits as rows `Wl + E θ ≤ G U ≤ Wu + E θ`: input boxes, rates, then outputs. */
export function limitRows(
  problem: ControlProblem,
  { Phi, Gamma, Psi }: StackedPrediction,
  theta: CondensedQp['theta'],
  ntheta: number,
) {
  const { predictor, blocks, horizon: N, inputLimits, rateLimits, outputLimits } = problem;
  const { scaling, sampleTime } = predictor;
  const nu = predictor.B.cols;
  const ny = predictor.C.rows;
  const nz = predictor.A.rows;
  const n = blocks.length * nu;
  const rows: RowLabel[] = [];
  const lower: number[] = [];
  const upper: number[] = [];
  const softness: number[] = [];
  const starts: number[] = [];
  let start = 0;
  for (const length of blocks) {
    starts.push(start);
    start += length;
  }
  const add = (row: RowLabel, low: number, high: number, soft: number) => {
    rows.push(row);
    lower.push(low);
    upper.push(high);
    softness.push(soft);
  };
  starts.forEach((step) => {
    for (let channel = 0; channel < nu; channel++) {
      const scaled = (value: number) => (value - scaling.u.centre[channel]) / scaling.u.half[channel];
      const [low, high] = [inputLimits.min[channel], inputLimits.max[channel]];
      add({ kind: 'input', channel, step }, scaled(low), scaled(high), 0);
    }
  });
  starts.forEach((step) => {
    for (let channel = 0; channel < nu; channel++) {
      const most = (rateLimits[channel] * sampleTime) / scaling.u.half[channel];
      if (most < Number.POSITIVE_INFINITY) add({ kind: 'rate', channel, step }, -most, most, 0);
    }
  });
  for (const limit of outputLimits) {
    const scaled = (value: number) => (value - scaling.y.centre[limit.output]) / scaling.y.half[limit.output];
    // Cost w e² is ½ e² / softness.
    const soft = limit.weight === Number.POSITIVE_INFINITY ? 0 : 1 / (2 * limit.weight);
    for (let step = Math.max(1, limit.fromStep); step <= N; step++) {
      add({ kind: 'output', channel: limit.output, step }, scaled(limit.min), scaled(limit.max), soft);
    }
  }

  const G = zeros(rows.length, n);
  const E = zeros(rows.length, ntheta);
  rows.forEach(({ kind, channel, step }, i) => {
    if (kind === 'output') {
      const from = (step - 1) * ny + channel;
      G.data.set(Gamma.data.subarray(from * n, (from + 1) * n), i * n);
      for (let j = 0; j < nz; j++) {
        E.data[i * ntheta + theta.z + j] = -Phi.data[from * nz + j];
        E.data[i * ntheta + theta.d + j] = -Psi.data[from * nz + j];
      }
      return;
    }
    const block = starts.indexOf(step);
    G.data[i * n + block * nu + channel] = 1;
    if (kind === 'input') return;
    if (block > 0) G.data[i * n + (block - 1) * nu + channel] = -1;
    else E.data[i * ntheta + theta.uPrev + channel] = 1;
  });
  return {
    G,
    E,
    Wl: Float64Array.from(lower),
    Wu: Float64Array.from(upper),
    softness: Float64Array.from(softness),
    rows,
  };
}

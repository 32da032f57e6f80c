import { decomposeGeneral, decomposeSingular } from '../numerics/eigen.ts';
import { type Matrix, multiply, zeros } from '../numerics/matrix.ts';
import type { Predictor } from './predictor.ts';
import type { Spectrum } from './trust.ts';

/** A mode matters when its share in the states' step response is at least this part of the largest mode's. */
const MATTERS = 0.02;

/**
 * Eigenvalues of `A`, the spectral radius and the time constants of the modes that matter.
 *
 * With `A = V Λ V⁻¹`, mode i answers a step of the input in the states by `‖C_x v_i‖ ‖(V⁻¹B)_i‖ / |1 − λ_i|` (conjugate
 * pairs together); those that reach 2 % of the largest matter, so that the many modes near zero by which a large
 * dictionary only fits its own functions, and the constant at 1, which no input moves, do not count.
 * `fastest` is the smallest `Ts / |ln λ|` of them (1/|s| of the continuous mode, oscillation included), `slowest` the
 * largest `Ts / −ln |λ|` of those that decay; Infinity when none does. Without inputs every mode but a 1 counts.
 */
export function computeSpectrum(predictor: Pick<Predictor, 'A' | 'B' | 'lifting' | 'sampleTime'>): Spectrum {
  const { A, B, lifting, sampleTime } = predictor;
  const { real, imaginary, vectors } = decomposeGeneral(A);
  const shares = stepResponseShares(vectors, real, imaginary, B, lifting.nx);
  const largest = Math.max(...shares);
  let radius = 0;
  let fastest = Number.POSITIVE_INFINITY;
  let slowest = 0;
  for (let i = 0; i < real.length; i++) {
    const modulus = Math.hypot(real[i], imaginary[i]);
    radius = Math.max(radius, modulus);
    if (!(shares[i] >= MATTERS * largest) || !(shares[i] > 0)) continue;
    const decay = Math.log(modulus);
    fastest = Math.min(fastest, sampleTime / Math.hypot(decay, Math.atan2(imaginary[i], real[i])));
    if (decay < 0) slowest = Math.max(slowest, -sampleTime / decay);
  }
  return {
    real: Array.from(real),
    imaginary: Array.from(imaginary),
    radius,
    fastest,
    slowest: slowest > 0 ? slowest : Number.POSITIVE_INFINITY,
  };
}

function stepResponseShares(
  vectors: Matrix,
  real: Float64Array,
  imaginary: Float64Array,
  B: Matrix,
  nx: number,
): number[] {
  const n = real.length;
  const V = normaliseColumns(vectors);
  // Without inputs each mode is excited alike, except the constant.
  const excited = B.cols > 0 ? multiply(pseudoInverse(V), B) : null;
  const shares = new Array<number>(n).fill(0);
  for (let i = 0; i < n; i++) {
    const width = imaginary[i] > 0 && i + 1 < n ? 2 : 1;
    let seen = 0;
    let driven = 0;
    for (let k = i; k < i + width; k++) {
      for (let r = 0; r < nx; r++) seen += V.data[r * n + k] ** 2;
      if (excited) for (let m = 0; m < B.cols; m++) driven += excited.data[k * B.cols + m] ** 2;
    }
    if (!excited) driven = 1;
    const distance = Math.hypot(1 - real[i], imaginary[i]);
    // An eigenvalue 1 to rounding with no input effect is the constant; with one, it is an integrator and matters.
    const share = Math.sqrt(seen * driven) / Math.max(distance, Math.sqrt(Number.EPSILON));
    const constant = distance < 1e-9 && (!excited || !(driven > 1e-18));
    shares.fill(constant ? 0 : share, i, i + width);
    i += width - 1;
  }
  return shares;
}

/** Inverse by singular values, those below 1e-12 of the largest left out: nearly parallel modes do not blow up. */
function pseudoInverse(V: Matrix): Matrix {
  const { values, U, V: W } = decomposeSingular(V);
  const n = V.rows;
  const inverse = zeros(n, n);
  for (let k = 0; k < n; k++) {
    if (!(values[k] > 1e-12 * values[0])) continue;
    for (let i = 0; i < n; i++) {
      const weight = W.data[i * n + k] / values[k];
      for (let j = 0; j < n; j++) inverse.data[i * n + j] += weight * U.data[j * n + k];
    }
  }
  return inverse;
}

function normaliseColumns(M: Matrix): Matrix {
  const out = zeros(M.rows, M.cols);
  for (let j = 0; j < M.cols; j++) {
    let square = 0;
    for (let i = 0; i < M.rows; i++) square += M.data[i * M.cols + j] ** 2;
    const factor = square > 0 ? 1 / Math.sqrt(square) : 0;
    for (let i = 0; i < M.rows; i++) out.data[i * M.cols + j] = factor * M.data[i * M.cols + j];
  }
  return out;
}

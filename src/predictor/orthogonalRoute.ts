import { singularValues } from '../numerics/eigen.ts';
import { foldRows } from '../numerics/householder.ts';
import { zeros } from '../numerics/matrix.ts';
import { accumulateSquares } from '../numerics/rowBlock.ts';
import { findDependent } from './dependent.ts';
import type { RegressionFactor } from './factor.ts';
import { columnOrder, type RegressionStream, refuseNonFinite, streamRows } from './regressors.ts';
import { prepareSpectralSolve } from './spectralSolve.ts';

/** Relative cut-off of singular values: 1e-15 lets noise through and predictors explode; 1e-10 … 1e-12 do not. */
const CUTOFF = 1e-12;

/**
 * Orthogonal factorisation of the rows, accumulated block by block so that memory does not grow with the number of
 * samples, then singular values of the triangle. Cost `4pq + 2p²` flops a sample; loses `log₁₀ κ` digits.
 */
export function factorByQr(stream: RegressionStream): RegressionFactor {
  const { names, nz: q, constant } = stream.layout;
  const p = names.length;
  let R = new Float64Array(0);
  let targets = 0;
  let stride = 0;
  const targetSquares = new Float64Array(q);
  const leftOver = new Float64Array(q);
  const allocate = (length: number) => new Float64Array(length);
  const samples = streamRows(stream, allocate, (block, count) => {
    if (R.length === 0) {
      ({ targets, stride } = block);
      R = allocate(targets * stride);
    }
    accumulateSquares(targetSquares, block, count);
    foldRows(R, block, count, leftOver);
  });
  refuseNonFinite(R, targetSquares, stream.layout);

  // Standardised: a column's length in R is its length over all samples.
  const unit = new Float64Array(p);
  for (let j = 0; j < p; j++) {
    let square = 0;
    for (let i = 0; i <= j; i++) square += R[i * stride + j] ** 2;
    unit[j] = square > 0 ? Math.sqrt(samples / square) : 1;
  }
  const root = 1 / Math.sqrt(samples);
  const T = zeros(p, p);
  const Q = zeros(p, q);
  for (let i = 0; i < p; i++) {
    for (let j = i; j < p; j++) T.data[i * p + j] = R[i * stride + j] * unit[j] * root;
    for (let c = 0; c < q; c++) Q.data[i * q + c] = R[i * stride + targets + c] * root;
  }
  const singular = singularValues(T);
  const rank = singular.filter((s) => s > CUTOFF * singular[0]).length;
  const solveStandardised = prepareSpectralSolve({ T, Q, constant }, CUTOFF);
  return {
    route: 'orthogonal',
    samples,
    singular,
    cutoff: CUTOFF,
    rank,
    dependent: findDependent(T, columnOrder(p, constant), CUTOFF, p - rank),
    targetSquares,
    solve: (ridge) => {
      const theta = solveStandardised(ridge);
      for (let i = 0; i < p; i++) for (let c = 0; c < q; c++) theta.data[i * q + c] *= unit[i];
      return theta;
    },
    // ‖Wθ − y‖² = ‖Rθ − Q‖² + what no combination expresses.
    residualSquares: (theta) => {
      const squares = leftOver.slice();
      const row = new Float64Array(q);
      for (let i = 0; i < p; i++) {
        for (let c = 0; c < q; c++) row[c] = -R[i * stride + targets + c];
        for (let j = i; j < p; j++) {
          const r = R[i * stride + j];
          for (let c = 0; c < q; c++) row[c] += r * theta.data[j * q + c];
        }
        for (let c = 0; c < q; c++) squares[c] += row[c] * row[c];
      }
      return squares;
    },
  };
}

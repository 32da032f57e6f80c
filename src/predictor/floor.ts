import type { BoundLifting } from '../lift/lifting.ts';
import { createKernels } from '../numerics/kernels/wasm.ts';
import { createRowBlock, rowBlockLength } from '../numerics/rowBlock.ts';
import { BLOCK_ROWS } from './regressors.ts';
import { UnusableDataError } from './unusableData.ts';
import type { Windows } from './windows.ts';

/**
 * Ridges of the direct regressions, on columns of mean square one, tried in turn until the factorisation succeeds. They
 * keep the normal equations solvable when functions are dependent; the first moves no prediction that the Gram matrix
 * resolves (1e-10 would cost a fifth of the accuracy of a hundred thin-plate functions), the last cannot fail.
 */
const FLOOR_RIDGES = [1e-12, 1e-10, 1e-8];

/**
 * The floor that no predictor with constant matrices and this lifting can beat: for each j the direct regression of
 * `x_{k+j}` on `[psi(x_k), u_k … u_{k+j−1}]`, of which `C_x Aʲ psi + Σ C_x A^{j−1−i} B u_{k+i}` is a special case.
 * It is the least error on the fitting windows; on others it holds up to what a finite sample leaves open.
 *
 * One factorisation serves all j: the regressors of step j are the leading columns of those of the last step, so that
 * the Cholesky factor and the forward-solved targets are leading parts too, and each j is one back substitution.
 *
 * @param fit windows of the fitting trajectories. @param held windows to predict, of at least as many steps.
 * @param after steps up to this one are left alone.
 * @param out held.count × held.steps × nx, scaled: steps after + 1 … fit.steps are written.
 * Cost `p (p + 2 q)` flops a fitting window with p = nz + fit.steps·nu and q = fit.steps·nx.
 */
export function predictByFloorInto(
  out: Float64Array,
  fit: Windows,
  held: Windows,
  bound: BoundLifting,
  after: number,
): void {
  const { steps, nx, nu } = fit;
  const { nz } = bound;
  const q = steps * nx;
  const { L, X, unit } = factorWindows(fit, bound);
  const p = unit.length;
  const z = new Float64Array(nz);
  const Z = new Float64Array(held.count * nz);
  for (let w = 0; w < held.count; w++) {
    bound.liftInto(z, held.start.subarray(w * nx, (w + 1) * nx));
    Z.set(z, w * nz);
  }
  const theta = new Float64Array(p);
  for (let c = after * nx; c < q; c++) {
    const size = nz + (Math.floor(c / nx) + 1) * nu;
    for (let i = 0; i < size; i++) theta[i] = X[i * q + c];
    for (let i = size - 1; i >= 0; i--) {
      theta[i] /= L[i * p + i];
      for (let k = 0; k < i; k++) theta[k] -= L[i * p + k] * theta[i];
    }
    for (let i = 0; i < size; i++) theta[i] *= unit[i];
    for (let w = 0; w < held.count; w++) {
      let sum = 0;
      for (let i = 0; i < nz; i++) sum += theta[i] * Z[w * nz + i];
      const inputs = w * held.steps * nu - nz;
      for (let i = nz; i < size; i++) sum += theta[i] * held.inputs[inputs + i];
      out[w * held.steps * nx + c] = sum;
    }
  }
}

/**
 * Of the rows `[psi(x_k), u_k … u_{k+steps−1} | x_{k+1} … x_{k+steps}]`, regressors standardised by `unit`: the Cholesky
 * factor `L` (p × p, lower) of their Gram matrix with the ridge, and `X = L⁻¹ WᵀY` (p × q).
 */
function factorWindows(fit: Windows, bound: BoundLifting) {
  const { steps, nx, nu, count } = fit;
  const { nz } = bound;
  const p = nz + steps * nu;
  const q = steps * nx;
  const kernels = createKernels(rowBlockLength(BLOCK_ROWS + p + 3, p, q) + p * (p + q));
  const { stride, targets, data } = createRowBlock(BLOCK_ROWS, p, q, kernels.allocate);
  const sums = kernels.allocate(targets * stride);
  const z = new Float64Array(nz);
  for (let from = 0; from < count; from += BLOCK_ROWS) {
    const rows = Math.min(BLOCK_ROWS, count - from);
    for (let r = 0; r < rows; r++) {
      const w = from + r;
      bound.liftInto(z, fit.start.subarray(w * nx, (w + 1) * nx));
      data.set(z, r * stride);
      data.set(fit.inputs.subarray(w * steps * nu, (w + 1) * steps * nu), r * stride + nz);
      data.set(fit.states.subarray(w * q, (w + 1) * q), r * stride + targets);
    }
    kernels.gramAdd(sums, data, targets, stride, rows);
  }
  const unit = new Float64Array(p);
  for (let i = 0; i < p; i++) {
    const square = sums[i * stride + i] / count;
    unit[i] = square > 0 ? 1 / Math.sqrt(square) : 1;
  }
  const L = kernels.allocate(p * p);
  const X = kernels.allocate(p * q);
  for (let i = 0; i < p; i++) {
    for (let c = 0; c < q; c++) X[i * q + c] = (unit[i] * sums[i * stride + targets + c]) / count;
  }
  const factors = FLOOR_RIDGES.some((ridge) => {
    for (let i = 0; i < p; i++) {
      for (let j = 0; j <= i; j++) L[i * p + j] = (unit[i] * unit[j] * sums[j * stride + i]) / count;
      L[i * p + i] += ridge;
    }
    return kernels.factorCholesky(L, p) === p;
  });
  if (!factors)
    throw new UnusableDataError('the lifted fitting data are not finite, or too few to assess the floor');
  kernels.solveLowerMany(L, p, X, q);
  return { L, X, unit };
}

import type { BoundLifting } from '../lift/lifting.ts';
import { createKernels } from '../numerics/kernels/wasm.ts';
import type { Matrix } from '../numerics/matrix.ts';
import type { Predictor } from './predictor.ts';
import { scaleInto } from './regressors.ts';
import type { Windows } from './windows.ts';

/** The matrices by which a lifted state moves on: `z⁺ = A z + B u + Σᵢ uᵢ Nᵢ z`. */
export type PredictorMatrices = Pick<Predictor, 'A' | 'B' | 'N'>;

/**
 * `next = A z + B u + Σᵢ uᵢ Nᵢ z` in scaled coordinates, for the first `next.length` entries of the lifted state.
 * @param z nz, u nu; `next` must not alias `z`.
 */
export function advanceInto(
  next: Float64Array,
  model: PredictorMatrices,
  z: ArrayLike<number>,
  u: ArrayLike<number>,
): void {
  const { A, B, N } = model;
  const nz = A.cols;
  const nu = B.cols;
  for (let i = 0; i < next.length; i++) {
    let sum = 0;
    for (let j = 0; j < nz; j++) sum += A.data[i * nz + j] * z[j];
    for (let m = 0; m < nu; m++) sum += B.data[i * nu + m] * u[m];
    next[i] = sum;
  }
  for (let m = 0; m < N.length; m++) {
    const { data } = N[m];
    for (let i = 0; i < next.length; i++) {
      let sum = 0;
      for (let j = 0; j < nz; j++) sum += data[i * nz + j] * z[j];
      next[i] += u[m] * sum;
    }
  }
}

/**
 * The lifted trajectory with matrices held fixed: the state is lifted once, then the model iterates.
 *
 * @param x0 nx, scaled. @param U steps × nu, scaled, row-major.
 * @returns (steps + 1) × nz, scaled, the lifted start first.
 */
export function predict(
  predictor: PredictorMatrices,
  bound: BoundLifting,
  x0: ArrayLike<number>,
  U: Float64Array,
  steps: number,
): Float64Array {
  const { nz } = bound;
  const nu = predictor.B.cols;
  const Z = new Float64Array((steps + 1) * nz);
  bound.liftInto(Z.subarray(0, nz), x0);
  for (let k = 0; k < steps; k++) {
    const z = Z.subarray(k * nz, (k + 1) * nz);
    advanceInto(Z.subarray((k + 1) * nz, (k + 2) * nz), predictor, z, U.subarray(k * nu, (k + 1) * nu));
  }
  return Z;
}

/**
 * The same, but the predicted state is lifted anew at each step: `x⁺ = C_x (A psi(x) + B u + …)`.
 * Only the state's rows of the model are used.
 *
 * @returns (steps + 1) × nx, scaled, the start first.
 */
export function predictRelifted(
  predictor: PredictorMatrices,
  bound: BoundLifting,
  x0: ArrayLike<number>,
  U: Float64Array,
  steps: number,
): Float64Array {
  const { nx, nz } = bound;
  const nu = predictor.B.cols;
  const X = new Float64Array((steps + 1) * nx);
  const z = new Float64Array(nz);
  for (let i = 0; i < nx; i++) X[i] = x0[i];
  for (let k = 0; k < steps; k++) {
    bound.liftInto(z, X.subarray(k * nx, (k + 1) * nx));
    advanceInto(X.subarray((k + 1) * nx, (k + 2) * nx), predictor, z, U.subarray(k * nu, (k + 1) * nu));
  }
  return X;
}

/**
 * The predicted state trajectory in physical units.
 *
 * @param x0 nx, physical. @param U steps × nu, physical, row-major.
 * @param mode `fixed`: lifted once; `relifted`: lifted anew at each step.
 * @returns (steps + 1) × nx, physical, `x0` first.
 */
export function rollOut(
  predictor: Predictor,
  bound: BoundLifting,
  x0: ArrayLike<number>,
  U: ArrayLike<number>,
  mode: 'fixed' | 'relifted' = 'fixed',
): Float64Array {
  const { scaling, coordinates, inputs } = predictor;
  const nx = coordinates.length;
  const nu = inputs.length;
  const steps = nu > 0 ? U.length / nu : 0;
  const scaledStart = new Float64Array(nx);
  scaleInto(scaledStart, 0, x0, 0, scaling.x);
  const scaledU = new Float64Array(U.length);
  for (let k = 0; k < steps; k++) scaleInto(scaledU, k * nu, U, k * nu, scaling.u);
  const fixed = mode === 'fixed';
  const run = (fixed ? predict : predictRelifted)(predictor, bound, scaledStart, scaledU, steps);
  const width = fixed ? bound.nz : nx;
  const X = new Float64Array((steps + 1) * nx);
  for (let k = 0; k <= steps; k++) {
    for (let i = 0; i < nx; i++) {
      X[k * nx + i] = scaling.x.centre[i] + scaling.x.half[i] * run[k * width + i];
    }
  }
  return X;
}

/**
 * Predicted states of many windows with matrices held fixed, count × steps × nx, scaled.
 *
 * A linear model is not iterated start by start: with the rows `C_x Aʲ` (nx × nz) and `C_x Aʲ B` formed once,
 * `x_{k+j} = C_x Aʲ z_k + Σ_{i<j} C_x A^{j−1−i} B u_{k+i}`, which costs nz/nx times less.
 */
export function predictWindows(
  model: PredictorMatrices,
  bound: BoundLifting,
  windows: Windows,
): Float64Array {
  const { count, steps, nx, nu, start, inputs } = windows;
  if (model.N.length > 0) return predictWindowsBilinear(model, bound, windows);
  const out = new Float64Array(count * steps * nx);
  const { nz } = bound;
  const { free, forced } = responses(model.A, model.B, nx, steps);
  const z = new Float64Array(nz);
  for (let w = 0; w < count; w++) {
    bound.liftInto(z, start.subarray(w * nx, (w + 1) * nx));
    for (let j = 0; j < steps; j++) {
      for (let i = 0; i < nx; i++) {
        let sum = 0;
        const row = (j * nx + i) * nz;
        for (let c = 0; c < nz; c++) sum += free[row + c] * z[c];
        for (let k = 0; k <= j; k++) {
          const effect = ((j - k) * nx + i) * nu;
          const at = (w * steps + k) * nu;
          for (let m = 0; m < nu; m++) sum += forced[effect + m] * inputs[at + m];
        }
        out[(w * steps + j) * nx + i] = sum;
      }
    }
  }
  return out;
}

/** All windows advance together: one product `[Z, U, uᵢ Z] [A B N₁ …]ᵀ` a step. */
function predictWindowsBilinear(
  model: PredictorMatrices,
  bound: BoundLifting,
  windows: Windows,
): Float64Array {
  const { count, steps, nx, nu, start, inputs } = windows;
  const { nz } = bound;
  const p = nz + nu + nu * nz;
  const kernels = createKernels(count * (p + nz) + p * nz);
  const W = kernels.allocate(count * p);
  const Z = kernels.allocate(count * nz);
  const Theta = kernels.allocate(p * nz);
  for (let i = 0; i < nz; i++) {
    for (let j = 0; j < nz; j++) Theta[j * nz + i] = model.A.data[i * nz + j];
    for (let m = 0; m < nu; m++) {
      Theta[(nz + m) * nz + i] = model.B.data[i * nu + m];
      for (let j = 0; j < nz; j++) Theta[(nz + nu + m * nz + j) * nz + i] = model.N[m].data[i * nz + j];
    }
  }
  const z = new Float64Array(nz);
  for (let w = 0; w < count; w++) {
    bound.liftInto(z, start.subarray(w * nx, (w + 1) * nx));
    Z.set(z, w * nz);
  }
  const out = new Float64Array(count * steps * nx);
  for (let k = 0; k < steps; k++) {
    for (let w = 0; w < count; w++) {
      const row = w * p;
      for (let j = 0; j < nz; j++) W[row + j] = Z[w * nz + j];
      for (let m = 0; m < nu; m++) {
        const u = inputs[(w * steps + k) * nu + m];
        W[row + nz + m] = u;
        for (let j = 0; j < nz; j++) W[row + nz + nu + m * nz + j] = u * Z[w * nz + j];
      }
    }
    Z.fill(0);
    kernels.multiplyAdd(Z, W, Theta, count, p, nz);
    for (let w = 0; w < count; w++) {
      for (let i = 0; i < nx; i++) out[(w * steps + k) * nx + i] = Z[w * nz + i];
    }
  }
  return out;
}

/** Predicted states of many windows, lifted anew at each step; count × steps × nx, scaled. */
export function predictWindowsRelifted(
  model: PredictorMatrices,
  bound: BoundLifting,
  windows: Windows,
): Float64Array {
  const { count, steps, nx, nu, start, inputs } = windows;
  const out = new Float64Array(count * steps * nx);
  for (let w = 0; w < count; w++) {
    const x0 = start.subarray(w * nx, (w + 1) * nx);
    const U = inputs.subarray(w * steps * nu, (w + 1) * steps * nu);
    out.set(predictRelifted(model, bound, x0, U, steps).subarray(nx), w * steps * nx);
  }
  return out;
}

/** `free[j] = C_x A^{j+1}` (nx × nz) and `forced[j] = C_x Aʲ B` (nx × nu), j = 0 … steps − 1. */
function responses(A: Matrix, B: Matrix, nx: number, steps: number) {
  const nz = A.rows;
  const nu = B.cols;
  const free = new Float64Array(steps * nx * nz);
  const forced = new Float64Array(steps * nx * nu);
  let row = new Float64Array(nx * nz);
  for (let i = 0; i < nx; i++) row[i * nz + i] = 1;
  for (let j = 0; j < steps; j++) {
    const next = new Float64Array(nx * nz);
    for (let i = 0; i < nx; i++) {
      for (let k = 0; k < nz; k++) {
        const value = row[i * nz + k];
        if (value === 0) continue;
        for (let c = 0; c < nz; c++) next[i * nz + c] += value * A.data[k * nz + c];
        for (let m = 0; m < nu; m++) forced[(j * nx + i) * nu + m] += value * B.data[k * nu + m];
      }
    }
    free.set(next, j * nx * nz);
    row = next;
  }
  return { free, forced };
}

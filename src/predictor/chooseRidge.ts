import type { BoundLifting } from '../lift/lifting.ts';
import type { Matrix } from '../numerics/matrix.ts';
import type { RegressionFactor } from './factor.ts';
import { type PredictorMatrices, predictWindows } from './predict.ts';
import type { Windows } from './windows.ts';

/** Ridges tried, on columns of mean square one; 1e-2 and above ruins every prediction that we have seen. */
export const RIDGE_GRID = [0, 1e-10, 1e-9, 1e-8, 1e-7, 1e-6, 1e-5, 1e-4, 1e-3, 1e-2] as const;

export interface RidgeChoice {
  readonly ridge: number;
  readonly tried: readonly { readonly ridge: number; readonly error: number }[];
}

/**
 * The ridge with the smallest multi-step error on windows that were not fitted; the smaller one among equals. The error is
 * the geometric mean over the steps ahead of the RMS error at each: a share won at a near step counts as much as the same
 * share at a far one. The plain RMS over the horizon would be ruled by the far steps, where no constant matrices predict
 * well, and take a ridge that spoils the near ones, on which a controller acts (the demo's cost was three times as high).
 * Each ridge costs one solve of the compressed problem and the predictions, never a pass over the samples.
 * An error that is not a finite number (a predictor that explodes) loses against every finite one.
 */
export function chooseRidge(
  factor: RegressionFactor,
  windows: Windows,
  bound: BoundLifting,
  matrices: (theta: Matrix) => PredictorMatrices,
  onProgress?: (share: number) => void,
): RidgeChoice {
  const tried = RIDGE_GRID.map((ridge, i) => {
    const predicted = predictWindows(matrices(factor.solve(ridge)), bound, windows);
    onProgress?.((i + 1) / RIDGE_GRID.length);
    return { ridge, error: geometricMeanError(predicted, windows) };
  });
  let best = tried[0];
  for (const candidate of tried) {
    if (candidate.error < best.error || !Number.isFinite(best.error)) best = candidate;
  }
  return { ridge: best.ridge, tried };
}

/** `exp(mean over j of log RMS_j)`; Infinity when a prediction is not finite. */
function geometricMeanError(predicted: Float64Array, { states, count, steps, nx }: Windows): number {
  let sum = 0;
  for (let j = 0; j < steps; j++) {
    let square = 0;
    for (let w = 0; w < count; w++) {
      const from = (w * steps + j) * nx;
      for (let i = from; i < from + nx; i++) square += (predicted[i] - states[i]) ** 2;
    }
    // Errors at rounding are all alike, so that an exact predictor does not win by noise.
    sum += 0.5 * Math.log(square / (count * nx) + Number.EPSILON ** 2);
  }
  const error = Math.exp(sum / steps);
  return Number.isFinite(error) ? error : Number.POSITIVE_INFINITY;
}

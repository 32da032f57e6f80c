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
 * The ridge with the smallest multi-step error on windows that were not fitted; the smaller one among equals.
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
    return { ridge, error: rootMeanSquare(predicted, windows.states) };
  });
  let best = tried[0];
  for (const candidate of tried) {
    if (candidate.error < best.error || !Number.isFinite(best.error)) best = candidate;
  }
  return { ridge: best.ridge, tried };
}

function rootMeanSquare(predicted: Float64Array, actual: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < actual.length; i++) sum += (predicted[i] - actual[i]) ** 2;
  const error = Math.sqrt(sum / actual.length);
  return Number.isFinite(error) ? error : Number.POSITIVE_INFINITY;
}

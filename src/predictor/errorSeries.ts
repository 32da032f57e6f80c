import type { ChannelScaling } from '../data/dataset.ts';
import { quantiles } from '../numerics/quantile.ts';
import type { TrustModel, TrustSeries } from './trust.ts';
import type { Windows } from './windows.ts';

/**
 * Errors of predicted states against steps ahead.
 *
 * @param predicted count × steps × nx, scaled. @param scaling of the coordinates, to give errors in their units too.
 * Where a prediction left the numbers' range the error is Infinity.
 */
export function summariseErrors(
  model: TrustModel,
  predicted: Float64Array,
  windows: Windows,
  scaling: ChannelScaling,
): TrustSeries {
  const { count, steps, nx, states } = windows;
  const rms: number[] = [];
  const q50: number[] = [];
  const q90: number[] = [];
  const q95: number[] = [];
  const rmsInUnits: number[][] = Array.from({ length: nx }, () => []);
  const errors = new Float64Array(count);
  const squares = new Float64Array(nx);
  for (let j = 0; j < steps; j++) {
    squares.fill(0);
    for (let w = 0; w < count; w++) {
      let sum = 0;
      for (let i = 0; i < nx; i++) {
        const at = (w * steps + j) * nx + i;
        const square = finiteOrInfinite((predicted[at] - states[at]) ** 2);
        squares[i] += square;
        sum += square;
      }
      errors[w] = Math.sqrt(sum / nx);
    }
    rms.push(Math.sqrt(squares.reduce((sum, square) => sum + square, 0) / (count * nx)));
    const [median, high, higher] = quantiles(errors, [0.5, 0.9, 0.95]);
    q50.push(median);
    q90.push(high);
    q95.push(higher);
    for (let i = 0; i < nx; i++) rmsInUnits[i].push(scaling.half[i] * Math.sqrt(squares[i] / count));
  }
  return { model, rms, q50, q90, q95, rmsInUnits };
}

function finiteOrInfinite(value: number): number {
  return Number.isFinite(value) ? value : Number.POSITIVE_INFINITY;
}

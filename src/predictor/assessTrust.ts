import type { Dataset } from '../data/dataset.ts';
import type { BoundLifting } from '../lift/lifting.ts';
import { summariseErrors } from './errorSeries.ts';
import { predictByFloorInto } from './floor.ts';
import { predictWindows, predictWindowsRelifted } from './predict.ts';
import type { Predictor } from './predictor.ts';
import { bindPlainLifting } from './rivals.ts';
import type { TrustCurve, TrustSeries } from './trust.ts';
import { UnusableDataError } from './unusableData.ts';
import { cutWindows, typicalLength, type Windows } from './windows.ts';

export interface TrustRequest {
  readonly dataset: Dataset;
  readonly predictor: Predictor;
  readonly bound: BoundLifting;
  /** From `fitPlainLinear` and `linearisePredictor`, scaled as the predictor is; no linearisation (null) where the coordinates are not the states. */
  readonly rivals: { readonly plainLinear: Predictor; readonly linearised: Predictor | null };
  /** The controller's horizon in steps, over which the verdict is taken. */
  readonly horizon: number;
  /** Steps ahead K of the curve; twice the horizon and at least 20 when left out. */
  readonly steps?: number;
  /** Normalised RMS error that still counts as trusted. */
  readonly tolerance: number;
  /** Share of the work that is done, 0 … 1. */
  readonly onProgress?: (share: number) => void;
}

/** Held-out starts: enough that a 95 % quantile rests on 30 of them. */
const STARTS = 600;
/** Fitting windows of the floor: for each of its coefficients a row this many times; below `fewest` it would fit noise. */
const FLOOR_ROWS = { perCoefficient: 60, fewest: 10, least: 10_000, most: 20_000 } as const;
/**
 * The floor's steps are dealt with in groups that end at these shares of the curve, each with all windows that are long
 * enough for it: windows as long as the whole curve may be few.
 */
const FLOOR_GROUPS = [0.25, 0.5, 0.75, 1];
/** Share of the typical trajectory that a curve may take, so that starts remain in each of them. */
const LONGEST = 0.75;
/** Lifting helps when its mean error ratio to plain linear regression is below this. */
export const HELPS_BELOW = 0.95;
/** Normalised errors below this are those of rounding and nobody's advantage. */
const ROUNDING = 1e-9;

/**
 * Prediction error against steps ahead on held-out trajectories, beside the simplest rivals and the floor; every model
 * is judged on the same starts. The curve is as long as asked, or as leaves several starts in a typical trajectory.
 *
 * @throws UnusableDataError when there is no held-out trajectory of one step at least.
 */
export function assessTrust(request: TrustRequest): TrustCurve {
  const { dataset, predictor, bound, rivals, horizon, tolerance, onProgress } = request;
  const { scaling } = predictor;
  const wanted = request.steps ?? Math.max(2 * horizon, 20);
  const typical = Math.min(typicalLength(dataset, 'held-out'), typicalLength(dataset, 'fit'));
  const K = Math.min(wanted, Math.max(Math.ceil(LONGEST * typical), Math.min(horizon, typical)));
  if (!(K >= 1)) {
    throw new UnusableDataError(
      'no trajectory is held out to assess the predictor: leave a share of them over',
    );
  }
  const held = cutWindows(dataset, 'held-out', scaling, K, STARTS);
  const plain = bindPlainLifting(bound.nx);
  const series: TrustSeries[] = [];
  const add = (model: TrustSeries['model'], predicted: Float64Array) => {
    series.push(summariseErrors(model, predicted, held, scaling.x));
    onProgress?.(series.length / 6);
  };
  add('lifted', predictWindows(predictor, bound, held));
  add('re-lifted', predictWindowsRelifted(predictor, bound, held));
  add('plain-linear', predictWindows(rivals.plainLinear, plain, held));
  if (rivals.linearised) add('linearised', predictWindows(rivals.linearised, plain, held));
  add('persistence', persist(held));
  const floor = predictFloor(request, held);
  series.push(forgetBeyond(floor.known, summariseErrors('floor', floor.predicted, held, scaling.x)));
  onProgress?.(1);

  const rmsOf = (model: TrustSeries['model']) => series.find((s) => s.model === model)?.rms ?? [];
  const lifted = rmsOf('lifted');
  const plainRatios = ratios(lifted, rmsOf('plain-linear'));
  const ratio = mean(plainRatios.slice(0, horizon));
  return {
    steps: Array.from({ length: K }, (_, j) => j + 1),
    starts: held.count,
    series,
    tolerance,
    trustedSteps: leadingRun(lifted, (error) => error <= tolerance),
    lifting: { helps: ratio < HELPS_BELOW, ratio, upTo: lastOfFirstRun(plainRatios) },
    ratioToFloor: mean(ratios(lifted, rmsOf('floor')).slice(0, horizon).filter(Number.isFinite)),
  };
}

/** Predictions of the floor, up to the last step for which there are enough fitting windows to tell it. */
function predictFloor(
  { dataset, predictor, bound }: TrustRequest,
  held: Windows,
): { predicted: Float64Array; known: number } {
  const { nx, nu, steps: K } = held;
  const predicted = new Float64Array(held.count * K * nx);
  let known = 0;
  for (const share of FLOOR_GROUPS) {
    const steps = Math.ceil(share * K);
    if (steps <= known) continue;
    const coefficients = bound.nz + steps * nu;
    const rows = Math.max(FLOOR_ROWS.least, FLOOR_ROWS.perCoefficient * coefficients);
    const fit = cutWindows(dataset, 'fit', predictor.scaling, steps, Math.min(FLOOR_ROWS.most, rows));
    if (fit.count < FLOOR_ROWS.fewest * coefficients) break;
    predictByFloorInto(predicted, fit, held, bound, known);
    known = steps;
  }
  return { predicted, known };
}

/** The series with NaN for every step after `known`. */
function forgetBeyond(known: number, series: TrustSeries): TrustSeries {
  const { model, rms, q50, q90, q95, rmsInUnits } = series;
  const cut = (values: readonly number[]) => values.map((value, j) => (j < known ? value : Number.NaN));
  return {
    model,
    rms: cut(rms),
    q50: cut(q50),
    q90: cut(q90),
    q95: cut(q95),
    rmsInUnits: rmsInUnits.map(cut),
  };
}

function persist({ count, steps, nx, start }: Windows): Float64Array {
  const out = new Float64Array(count * steps * nx);
  for (let w = 0; w < count; w++) {
    const x0 = start.subarray(w * nx, (w + 1) * nx);
    for (let j = 0; j < steps; j++) out.set(x0, (w * steps + j) * nx);
  }
  return out;
}

function ratios(errors: readonly number[], rivals: readonly number[]): number[] {
  return errors.map((error, j) => (error + ROUNDING) / (rivals[j] + ROUNDING));
}

function mean(values: readonly number[]): number {
  return values.reduce((sum, value) => sum + value, 0) / values.length;
}

function leadingRun(values: readonly number[], holds: (value: number) => boolean): number {
  const end = values.findIndex((value) => !holds(value));
  return end < 0 ? values.length : end;
}

/** Last step of the unbroken run that starts at the first step with a ratio below the limit; 0 if there is none. */
function lastOfFirstRun(values: readonly number[]): number {
  const first = values.findIndex((value) => value < HELPS_BELOW);
  if (first < 0) return 0;
  return first + leadingRun(values.slice(first), (value) => value < HELPS_BELOW);
}

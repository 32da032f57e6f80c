import type { ControlProblem } from '../mpc/problem.ts';
import type { Plant } from '../plant/plant.ts';
import { column } from './limits.ts';
import type { LoopRecord, TrackingReport } from './record.ts';

/** A stretch of constant reference counts as such from this many samples on. */
const FEWEST_SAMPLES = 10;
/** Settled means: within this share of the step. Common practice, no source. */
const SETTLED_WITHIN = 0.02;

/** A stretch `[from, to)` of samples over which the reference is constant, and the step that led to it. */
interface Stretch {
  readonly from: number;
  readonly to: number;
  /** Reference minus what it was before; 0 at the beginning of the run. */
  readonly step: number;
}

/**
 * Tracking figures of each output that the problem tracks. A controller that sees the reference ahead leaves a value before
 * the next step is due: overshoot, settling and offset are read before the next step comes into its sight.
 */
export function reportTracking(record: LoopRecord, problem: ControlProblem, plant: Plant): TrackingReport[] {
  const { ny, steps, sampleTime } = record;
  const { Q, predictor } = problem;
  return predictor.outputs.flatMap(({ name, unit }, i) => {
    if (!(Q.data[i * Q.cols + i] > 0)) return [];
    const at = plant.outputs.findIndex((output) => output.name === name);
    const y = column(record.y, steps + 1, ny, at);
    const r = column(record.reference, steps + 1, ny, at);
    const errors = y.map((value, k) => value - r[k]);
    const stretches = findStretches(r, problem.preview ? problem.horizon + problem.delay : 0);
    const stepped = stretches.filter(({ step }) => step !== 0);
    const times = stepped.map((stretch) => settlingSamples(errors, stretch));
    const settledTimes = times.filter((time) => time !== null);
    return {
      output: name,
      unit,
      rms: Math.sqrt(errors.reduce((sum, e) => sum + e * e, 0) / errors.length),
      worst: errors.reduce((worst, e) => Math.max(worst, Math.abs(e)), 0),
      overshoot: stepped.length > 0 ? 100 * Math.max(...stepped.map((s) => overshootOf(errors, s))) : null,
      settling:
        stepped.length > 0 && settledTimes.length === stepped.length
          ? Math.max(...settledTimes) * sampleTime
          : null,
      referenceSteps: stepped.length,
      settled: settledTimes.length,
      offset: offsetOf(errors, stretches),
    };
  });
}

/** @param sight samples at the end of a stretch from which the next value can be seen. */
function findStretches(r: Float64Array, sight: number): Stretch[] {
  const stretches: Stretch[] = [];
  let from = 0;
  for (let k = 1; k <= r.length; k++) {
    if (k < r.length && r[k] === r[k - 1]) continue;
    const step = from > 0 ? r[from] - r[from - 1] : 0;
    const to = k < r.length ? k - sight : k;
    if (to - from >= FEWEST_SAMPLES) stretches.push({ from, to, step });
    from = k;
  }
  return stretches;
}

/** Largest excursion beyond the new value in the direction of the step, as a share of the step. */
function overshootOf(errors: Float64Array, { from, to, step }: Stretch): number {
  let most = 0;
  for (let k = from; k < to; k++) most = Math.max(most, errors[k] / step);
  return most;
}

/** Samples after which the error stays within 2 % of the step; null when it is outside at the end. */
function settlingSamples(errors: Float64Array, { from, to, step }: Stretch): number | null {
  let last = from - 1;
  for (let k = from; k < to; k++) if (!(Math.abs(errors[k]) <= SETTLED_WITHIN * Math.abs(step))) last = k;
  return last === to - 1 ? null : last + 1 - from;
}

/** Mean error over the last fifth of the last constant stretch; null without one. */
function offsetOf(errors: Float64Array, stretches: readonly Stretch[]): number | null {
  const last = stretches.at(-1);
  if (!last) return null;
  const start = last.to - Math.ceil((last.to - last.from) / 5);
  const tail = errors.subarray(start, last.to);
  return tail.reduce((sum, e) => sum + e, 0) / tail.length;
}

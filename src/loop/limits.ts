import type { ControlProblem } from '../mpc/problem.ts';
import type { Plant } from '../plant/plant.ts';
import type { LimitReport, LoopRecord } from './record.ts';

/** An excess below this share of the channel's range is rounding or the slack of a soft limit at work, not a broken limit. */
const NOTICED = 1e-4;

/** One limited signal on an even time grid. */
interface LimitedSignal {
  readonly kind: LimitReport['kind'];
  readonly channel: string;
  readonly unit: string;
  readonly min: number;
  readonly max: number;
  /** Full range of the channel, to which the excess is related. */
  readonly range: number;
  /** Seconds between values. */
  readonly interval: number;
  readonly values: Float64Array;
}

/**
 * How often and how badly each limit was broken: outputs between the samples too, inputs and rates as they were sent. An
 * excursion runs from the first value outside to the next one inside. NaN counts as outside.
 */
export function reportLimits(record: LoopRecord, problem: ControlProblem, plant: Plant): LimitReport[] {
  return limitedSignals(record, problem, plant).map(measureExcursions);
}

function limitedSignals(record: LoopRecord, problem: ControlProblem, plant: Plant): LimitedSignal[] {
  const { sampleTime, fine, steps, nu, ny } = record;
  const { predictor, outputLimits, inputLimits, rateLimits } = problem;
  const signals: LimitedSignal[] = outputLimits.map(({ output, min, max }) => {
    const { name, unit } = predictor.outputs[output];
    const at = plant.outputs.findIndex((channel) => channel.name === name);
    const channel = plant.outputs[at];
    return {
      kind: 'output',
      channel: name,
      unit,
      min,
      max,
      range: channel.max - channel.min,
      interval: sampleTime / fine,
      values: column(record.yFine, steps * fine + 1, ny, at),
    };
  });
  plant.inputs.forEach((input, j) => {
    const sent = column(record.u, steps, nu, j);
    const { name: channel, unit } = input;
    const range = input.max - input.min;
    const [min, max] = [inputLimits.min[j], inputLimits.max[j]];
    signals.push({ kind: 'input', channel, unit, min, max, range, interval: sampleTime, values: sent });
    const rate = rateLimits[j];
    if (rate === Number.POSITIVE_INFINITY) return;
    const before = (k: number) => (k > 0 ? sent[k - 1] : plant.operatingPoint.u[j]);
    signals.push({
      kind: 'rate',
      channel,
      unit: `${unit}/s`,
      min: -rate,
      max: rate,
      range: 2 * rate,
      interval: sampleTime,
      values: sent.map((value, k) => (value - before(k)) / sampleTime),
    });
  });
  return signals;
}

function measureExcursions(signal: LimitedSignal): LimitReport {
  const { kind, channel, unit, min, max, range, interval, values } = signal;
  let count = 0;
  let outside = 0;
  let worst = 0;
  let run = 0;
  let longest = 0;
  let first: number | null = null;
  for (let i = 0; i < values.length; i++) {
    const excess = Math.max(min - values[i], values[i] - max);
    // A value that is not a number is outside, and shows as the worst excess.
    if (excess <= NOTICED * range) {
      run = 0;
      continue;
    }
    if (run === 0) count++;
    first ??= i * interval;
    run++;
    outside++;
    longest = Math.max(longest, run * interval);
    worst = Math.max(worst, excess);
  }
  const share = values.length > 0 ? outside / values.length : 0;
  return { kind, channel, unit, min, max, count, share, worst, worstOfRange: worst / range, longest, first };
}

/** Column `j` of a row-major array. */
export function column(data: Float64Array, rows: number, cols: number, j: number): Float64Array {
  return Float64Array.from({ length: rows }, (_, k) => data[k * cols + j]);
}

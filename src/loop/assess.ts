import type { ControlProblem } from '../mpc/problem.ts';
import { quantiles } from '../numerics/quantile.ts';
import type { Plant } from '../plant/plant.ts';
import { column, reportLimits } from './limits.ts';
import type { EffortReport, LoopRecord, LoopReport } from './record.ts';
import { reportTracking } from './tracking.ts';

/** A move smaller than this share of the range is no reversal, only rounding or noise. */
const REVERSAL = 0.01;
/** Within this share of the range of a limit the input counts as at it. */
const AT_LIMIT = 1e-6;

/** The closed loop in figures: limits broken, tracking, effort, solves. */
export function assessLoop(record: LoopRecord, problem: ControlProblem, plant: Plant): LoopReport {
  const [median, q95, worst] = quantiles(record.iterations, [0.5, 0.95, 1]);
  return {
    limits: reportLimits(record, problem, plant),
    tracking: reportTracking(record, problem, plant),
    effort: reportEffort(record, problem, plant),
    notOptimal: record.status.filter((status) => status !== 'optimal').length,
    iterations: { median, q95, worst },
  };
}

function reportEffort(record: LoopRecord, problem: ControlProblem, plant: Plant): EffortReport[] {
  const { steps, nu, sampleTime } = record;
  return plant.inputs.map(({ name, unit, min, max }, j) => {
    const u = column(record.u, steps, nu, j);
    const range = max - min;
    const moves = u.map((value, k) => value - (k > 0 ? u[k - 1] : plant.operatingPoint.u[j]));
    const [low, high] = [problem.inputLimits.min[j], problem.inputLimits.max[j]];
    const near = AT_LIMIT * range;
    const large = moves.filter((move) => Math.abs(move) > REVERSAL * range);
    let reversals = 0;
    for (let i = 1; i < large.length; i++) if (large[i] * large[i - 1] < 0) reversals++;
    return {
      input: name,
      unit,
      rms: steps > 0 ? Math.sqrt(u.reduce((sum, value) => sum + value * value, 0) / steps) : 0,
      worstRate: moves.reduce((worst, move) => Math.max(worst, Math.abs(move)), 0) / sampleTime,
      atLimit:
        steps > 0 ? u.filter((value) => value <= low + near || value >= high - near).length / steps : 0,
      reversals: steps > 0 ? reversals / (steps * sampleTime) : 0,
    };
  });
}

import { join } from 'node:path';
import { quantiles } from '../numerics/quantile.ts';
import type { OpenStudy } from './openStudy.ts';
import { writeWhole } from './writeWhole.ts';

/**
 * Writes `timings.json`: seconds by stage and milliseconds of a decision by controller. It is the one file that differs
 * between two runs of the same study.
 */
export function writeTimings(
  { folder, progress }: OpenStudy,
  solveTimes: ReadonlyMap<string, readonly number[]>,
): void {
  const decisions = [...solveTimes].map(([name, times]) => {
    const [median, q95, worst] = quantiles(times, [0.5, 0.95, 1]);
    return [name, { median, q95, worst }] as const;
  });
  const timings = {
    secondsByStage: Object.fromEntries(progress.timings),
    decisionMilliseconds: Object.fromEntries(decisions),
  };
  writeWhole(join(folder, 'timings.json'), `${JSON.stringify(timings, null, 2)}\n`);
}

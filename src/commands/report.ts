import { join } from 'node:path';
import { exitCodeOf, writeReport } from './endings.ts';
import { openStudy, type VerbOptions } from './openStudy.ts';
import { readResult } from './result.ts';

/** `liftwright report`: the page and the charts from what the stages wrote. */
export async function report(name: string, options: VerbOptions): Promise<number> {
  const open = await openStudy(name, options);
  const result = readResult(open);
  const cautions = await open.progress.during('report', () => writeReport(open, result));
  const { writeSummary } = await import('../report/summary.ts');
  process.stdout.write(writeSummary(result, cautions, [join(open.folder, 'report.html')]));
  return exitCodeOf(result, cautions);
}

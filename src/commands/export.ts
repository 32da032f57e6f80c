import { join } from 'node:path';
import { writeExport } from './endings.ts';
import { openStudy, type VerbOptions } from './openStudy.ts';
import { readResult } from './result.ts';

/** `liftwright export`: the matrices from what the stages wrote. */
export async function exportStudy(name: string, options: VerbOptions): Promise<number> {
  const open = await openStudy(name, options);
  const result = readResult(open);
  const paths = await open.progress.during('export', () => writeExport(open, result));
  process.stdout.write(`${paths.map((path) => join(open.folder, path)).join('\n')}\n`);
  return 0;
}

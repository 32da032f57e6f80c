import { makeLoops } from './loops.ts';
import { openStudy, type VerbOptions } from './openStudy.ts';
import { readStage, writeStage } from './stageFiles.ts';
import { describeLoops, printStage } from './stageText.ts';
import { writeTimings } from './timings.ts';

/** `liftwright simulate`: the closed loop on the true plant, for the lifted controller and its rivals. */
export async function simulate(name: string, options: VerbOptions): Promise<number> {
  const open = await openStudy(name, options);
  const data = readStage(open, 'experiment');
  const fitted = readStage(open, 'fit');
  const designed = readStage(open, 'design');
  const { contents: made, solveTimes } = await open.progress.during('simulate', (onShare) =>
    makeLoops(open, data, fitted, designed, onShare),
  );
  writeStage(open, 'simulate', made);
  writeTimings(open, solveTimes);
  printStage(open, 'simulate', describeLoops(made));
  return made.acceptance.every(({ met }) => met) ? 0 : 1;
}

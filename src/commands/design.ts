import { openStudy, type VerbOptions } from './openStudy.ts';
import { makeDesign } from './pipeline.ts';
import { readStage, writeStage } from './stageFiles.ts';
import { describeDesign, printStage } from './stageText.ts';

/** `liftwright design`: horizon, weights and limits become a condensed quadratic program. */
export async function design(name: string, options: VerbOptions): Promise<number> {
  const open = await openStudy(name, options);
  const fitted = readStage(open, 'fit');
  const made = await open.progress.during('design', () => makeDesign(open, fitted));
  writeStage(open, 'design', made);
  printStage(open, 'design', describeDesign(made));
  return 0;
}

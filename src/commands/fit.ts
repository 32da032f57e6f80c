import { openStudy, type VerbOptions } from './openStudy.ts';
import { makeFit } from './pipeline.ts';
import { readStage, writeStage } from './stageFiles.ts';
import { describeFit, printStage } from './stageText.ts';

/** `liftwright fit`: lifts the data and regresses the predictor and its rivals. */
export async function fit(name: string, options: VerbOptions): Promise<number> {
  const open = await openStudy(name, options);
  const data = readStage(open, 'experiment');
  const made = await open.progress.during('fit', (onShare) => makeFit(open, data, onShare));
  writeStage(open, 'fit', made);
  printStage(open, 'fit', describeFit(made));
  return 0;
}

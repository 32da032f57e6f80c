import { openStudy, type VerbOptions } from './openStudy.ts';
import { makeExperiment } from './pipeline.ts';
import { writeStage } from './stageFiles.ts';
import { describeExperiment, printStage } from './stageText.ts';

/** `liftwright experiment`: excites the plant, gathers the data. */
export async function experiment(name: string, options: VerbOptions): Promise<number> {
  const open = await openStudy(name, options);
  const made = await open.progress.during('experiment', (onShare) => makeExperiment(open, onShare));
  writeStage(open, 'experiment', made);
  printStage(open, 'experiment', describeExperiment(made));
  return 0;
}

import { openStudy, type VerbOptions } from './openStudy.ts';
import { makeAssessment } from './pipeline.ts';
import { readStage, writeStage } from './stageFiles.ts';
import { describeAssessment, printStage } from './stageText.ts';

/** `liftwright assess`: the trust curve on held-out trajectories, beside the rivals; the spectrum. */
export async function assess(name: string, options: VerbOptions): Promise<number> {
  const open = await openStudy(name, options);
  const data = readStage(open, 'experiment');
  const fitted = readStage(open, 'fit');
  const made = await open.progress.during('assess', (onShare) => makeAssessment(open, data, fitted, onShare));
  writeStage(open, 'assess', made);
  printStage(open, 'assess', describeAssessment(made, open.study));
  return 0;
}

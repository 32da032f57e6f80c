import { exitCodeOf, writeExport, writeReport } from './endings.ts';
import { makeLoops } from './loops.ts';
import { openStudy, type VerbOptions } from './openStudy.ts';
import { makeAssessment, makeDesign, makeExperiment, makeFit } from './pipeline.ts';
import { makeResult } from './result.ts';
import { writeStage } from './stageFiles.ts';
import { writeTimings } from './timings.ts';

/** `liftwright run`: the whole job, each stage's file written as soon as it is made. */
export async function run(name: string, options: VerbOptions): Promise<number> {
  const open = await openStudy(name, options);
  const { progress } = open;
  const experiment = await progress.during('experiment', (onShare) => makeExperiment(open, onShare));
  writeStage(open, 'experiment', experiment);
  const fit = await progress.during('fit', (onShare) => makeFit(open, experiment, onShare));
  writeStage(open, 'fit', fit);
  const assess = await progress.during('assess', (onShare) => makeAssessment(open, experiment, fit, onShare));
  writeStage(open, 'assess', assess);
  const design = await progress.during('design', () => makeDesign(open, fit));
  writeStage(open, 'design', design);
  const { contents: simulate, solveTimes } = await progress.during('simulate', (onShare) =>
    makeLoops(open, experiment, fit, design, onShare),
  );
  writeStage(open, 'simulate', simulate);
  const result = makeResult(open, { experiment, fit, assess, design, simulate });
  const cautions = await progress.during('report', () => writeReport(open, result));
  await progress.during('export', () => writeExport(open, result));

  const { writeSummary } = await import('../report/summary.ts');
  writeTimings(open, solveTimes);
  const times = [...progress.timings].map(([stage, seconds]) => `${stage} ${seconds.toFixed(1)}`);
  const files = [`${open.folder}: report.html, charts/, export/`, `seconds: ${times.join(', ')}`];
  process.stdout.write(writeSummary(result, cautions, files));
  return exitCodeOf(result, cautions);
}

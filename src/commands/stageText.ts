import { join } from 'node:path';
import { countSamples } from '../data/dataset.ts';
import { formatFigure } from '../findings/figures.ts';
import type { Study } from '../study/study.ts';
import { STAGES, type Stage, type StageContents, type StageFolder } from './stageFiles.ts';

/** Prints a stage's few lines and where its file is. */
export function printStage(place: StageFolder, stage: Stage, lines: readonly string[]): void {
  process.stdout.write(`${[...lines, join(place.folder, STAGES[stage].file)].join('\n')}\n`);
}

export function describeExperiment({ dataset, substeps }: StageContents['experiment']): string[] {
  const { diverged, leftRange } = dataset.cuts;
  const roles = (['fit', 'choose', 'held-out'] as const).map(
    (role) => `${role} ${countSamples(dataset, role)}`,
  );
  return [
    `${dataset.trajectories.length} trajectories, samples: ${roles.join(', ')}`,
    `cut: ${diverged} diverged, ${leftRange} left the ranges`,
    `${substeps.count} integration steps a sample, error ${formatFigure(substeps.error)} of the ranges`,
  ];
}

export function describeFit({ predictor }: StageContents['fit']): string[] {
  const { fit, lifting } = predictor;
  const dropped = lifting.dropped.length > 0 ? `, ${lifting.dropped.length} duplicates dropped` : '';
  const dependent = fit.dependent.length > 0 ? `; expressed by others: ${fit.dependent.join(', ')}` : '';
  return [
    `${lifting.nz} functions of ${lifting.nx} coordinates${dropped}`,
    `route ${fit.route}, condition ${formatFigure(fit.condition)}, ridge ${formatFigure(fit.ridge)}`,
    `rank ${fit.rank} of ${fit.regressors}${dependent}`,
  ];
}

export function describeAssessment(
  { trust, spectrum }: StageContents['assess'],
  { sampleTime }: Study,
): string[] {
  const { helps, ratio } = trust.lifting;
  return [
    `lifting ${helps ? 'helps' : 'does NOT help'}: ${formatFigure(ratio)} of plain linear regression's error over the horizon`,
    `trusted for ${trust.trustedSteps} steps (${formatFigure(trust.trustedSteps * sampleTime)} s)`,
    `${formatFigure(trust.ratioToFloor)} times the floor of any predictor with constant matrices`,
    `spectral radius ${formatFigure(spectrum.radius)}`,
  ];
}

export function describeDesign({ design }: StageContents['design']): string[] {
  const { qp, problem } = design;
  return [
    `horizon ${problem.horizon}, ${qp.n} variables, ${qp.m} rows, condition of H ${formatFigure(qp.condition)}`,
  ];
}

export function describeLoops({ runs, acceptance }: StageContents['simulate']): string[] {
  const costs = runs.map(({ name, record, report }) => {
    const broken = report.limits.filter(({ count }) => count > 0).length;
    const ending = record.diverged ? ', DIVERGED' : '';
    return `${name}: cost ${formatFigure(record.cost.total)}, ${broken} limits broken, ${report.notOptimal} solves not optimal${ending}`;
  });
  const missed = acceptance.filter(({ met }) => !met).map(({ name }) => name);
  return missed.length > 0 ? [...costs, `missed: ${missed.join(', ')}`] : costs;
}

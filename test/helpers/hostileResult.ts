import type { Caution } from '../../src/findings/caution.ts';
import type { StudyResult } from '../../src/findings/studyResult.ts';
import { sampleResult } from './sampleResult.ts';

/** Names that would run a script, break out of an attribute, a title or a script, if they were not escaped. */
export const HOSTILE = [
  '</script><script>window.broken = 1</script>',
  '"><img src=x onerror="window.broken = 1">',
  "' onmouseover='window.broken = 1",
  '<!--<script>',
  '&amp;<b>bold</b>\u2028',
] as const;

/** The sample study with hostile text wherever a user's text may stand. */
export function hostileResult(): StudyResult {
  const result = sampleResult();
  const rename = (name: string) => `${name}${HOSTILE[name.length % HOSTILE.length]}`;
  const named = <T extends { readonly name: string }>(rows: readonly T[]) =>
    rows.map((row) => ({ ...row, name: rename(row.name), unit: `m${HOSTILE[0]}` }));
  const { plant, predictor, design, dataset, runs } = result;
  const hostilePredictor = {
    ...predictor,
    coordinates: named(predictor.coordinates),
    inputs: named(predictor.inputs),
    outputs: named(predictor.outputs),
    lifting: { ...predictor.lifting, names: predictor.lifting.names.map(rename) },
  };
  return {
    ...result,
    title: HOSTILE.join(' '),
    plant: {
      ...plant,
      name: HOSTILE[1],
      description: HOSTILE[0],
      states: named(plant.states),
      inputs: named(plant.inputs),
      outputs: named(plant.outputs),
      parameters: { [HOSTILE[0]]: { unit: HOSTILE[2], value: 1, tolerance: 0.1, meaning: HOSTILE[1] } },
      hazards: [...HOSTILE],
    },
    dataset: {
      ...dataset,
      coordinates: named(dataset.coordinates),
      inputs: named(dataset.inputs),
      trajectories: dataset.trajectories.map((trajectory) => ({ ...trajectory, signal: HOSTILE[0] })),
    },
    predictor: hostilePredictor,
    design: { ...design, problem: { ...design.problem, predictor: hostilePredictor } },
    runs: runs.map((run) => ({
      ...run,
      report: {
        ...run.report,
        limits: run.report.limits.map((limit) => ({
          ...limit,
          channel: rename(limit.channel),
          unit: HOSTILE[0],
        })),
        tracking: run.report.tracking.map((row) => ({
          ...row,
          output: rename(row.output),
          unit: HOSTILE[1],
        })),
        effort: run.report.effort.map((row) => ({ ...row, input: rename(row.input), unit: HOSTILE[2] })),
      },
    })),
    acceptance: result.acceptance.map((row) => ({ ...row, name: HOSTILE[0] })),
  };
}

export const hostileCaution: Caution = {
  code: HOSTILE[2],
  severity: 'warning',
  sentence: HOSTILE[0],
  value: 1,
  unit: HOSTILE[1],
  whatToDo: HOSTILE[3],
};

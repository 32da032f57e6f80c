import { type CautionRule, defineRule, one } from './rule.ts';
import type { LoopRun } from './studyResult.ts';
import { THRESHOLDS } from './thresholds.ts';

const NAMES: Record<LoopRun['name'], string> = {
  lifted: 'the lifted predictor',
  'plain-linear': 'plain linear regression',
  linearised: 'the linearisation at the operating point',
};

/** Is the lifted controller worth its size? */
export const RIVAL_RULES: readonly CautionRule[] = [
  defineRule({
    code: 'rival-as-good',
    meaning: "cost of each simpler controller in the same scenario over the lifted one's",
    measure: ({ result, lifted }) =>
      result.runs.slice(1).flatMap((run) => {
        // One that diverged has a cost of fewer steps: it is no rival.
        if (!lifted || run.record.diverged) return [];
        return [{ value: run.record.cost.total / lifted.record.cost.total, unit: '1', of: run }];
      }),
    inOrder: (ratio) => ratio > THRESHOLDS.rivalCost,
    severity: 'warning',
    sentence: (figure, { value, of }) =>
      value < 1 / THRESHOLDS.rivalCost
        ? `The same controller on ${NAMES[of.name]} does better: its cost in this scenario is ${figure} times the lifted one's.`
        : `The same controller on ${NAMES[of.name]} does as well: its cost in this scenario is ${figure} times the lifted one's.`,
    whatToDo: 'Use the simpler predictor, which is easier to review and to run, or try other functions.',
  }),
  defineRule({
    code: 'rivals-missing',
    meaning: 'number of simpler controllers run in the same scenario',
    measure: ({ result }) => one(Math.max(0, result.runs.length - 1), '1'),
    inOrder: (rivals) => rivals > 0,
    severity: 'note',
    sentence: (figure) =>
      `${figure} simpler controllers were run in this scenario: whether the lifted one is needed is not shown.`,
    whatToDo: 'Compare with a linear controller by other means before deciding for the lifted one.',
  }),
  defineRule({
    code: 'scenario-ideal',
    meaning: 'imperfections in the scenario: noise, disturbances, parameters off nominal',
    measure: ({ result }) => {
      const { noise, disturbances, parameterFactors } = result.scenario;
      const acting = disturbances.filter(({ value }) => value !== 0).length;
      const off = Object.values(parameterFactors).filter((factor) => factor !== 1).length;
      return [{ value: (noise > 0 ? 1 : 0) + acting + off, unit: '1', of: noise }];
    },
    inOrder: (count) => count > 0,
    severity: 'note',
    sentence: (figure) =>
      `The scenario has ${figure} imperfections: no noise, no disturbance, every parameter as modelled. Expect less of the real loop.`,
    whatToDo: 'Add scenario.noise, scenario.disturbances and parameter factors within the tolerances.',
  }),
];

import { STANDING_HAZARDS } from './hazards.ts';
import { type CautionRule, defineRule } from './rule.ts';

/** The notes that always stand. */
export const STANDING_RULES: readonly CautionRule[] = [
  defineRule({
    code: 'hazards',
    meaning: 'standing safety note',
    measure: () => [{ value: 0, unit: '1', of: null }],
    severity: 'note',
    sentence: () => STANDING_HAZARDS.join(' '),
    whatToDo: 'Take this note into the hazard analysis of the machine; have it signed with the review sheet.',
  }),
  defineRule({
    code: 'plant-hazard',
    meaning: 'hazards that the plant names itself',
    measure: ({ result }) => result.plant.hazards.map((of) => ({ value: 0, unit: '1', of })),
    severity: 'note',
    sentence: (_, { of }) => of,
    whatToDo: 'Provide for it in the machine, independently of this controller.',
  }),
  defineRule({
    code: 'simulation-only',
    meaning: 'standing note on what was tested',
    measure: () => [{ value: 0, unit: '1', of: null }],
    severity: 'note',
    sentence: (_, __, { result }) =>
      `All results come from a simulation of ${result.plant.name}: the model's parameters, friction, sensors, computing time and wiring were not tested.`,
    whatToDo: 'Identify the real plant, repeat the study with its data, and commission step by step.',
  }),
];

import type { LiftingFamily } from './lifting.ts';
import { bindTerms, findTerms } from './physicalTerms.ts';

/**
 * Outputs that are functions of the state, scaled by their declared ranges, so that a selection reads them out as well.
 * Joined by `buildLifting` right after the state and the constant; never asked for as a part.
 */
export const output: LiftingFamily = {
  name: 'output',
  meaning: 'Outputs that are functions of the state',
  settings: [],
  build: (_values, { outputs }) => {
    const functions = outputs.map(({ name }) => name);
    return {
      names: functions,
      constants: {
        functions,
        centre: outputs.map(({ min, max }) => min / 2 + max / 2),
        half: outputs.map(({ min, max }) => max / 2 - min / 2),
      },
    };
  },
  functions: ({ functions, centre, half }, context) => {
    const terms = findTerms(functions as readonly string[], context.outputs).map(({ of }, i) => ({
      of,
      centre: (centre as readonly number[])[i],
      half: (half as readonly number[])[i],
    }));
    return bindTerms(terms, context);
  },
};

import { CONTROLLER_RULES } from './controllerRules.ts';
import { DATA_RULES } from './dataRules.ts';
import { LOOP_RULES } from './loopRules.ts';
import { PREDICTOR_RULES } from './predictorRules.ts';
import { RIVAL_RULES } from './rivalRules.ts';
import type { CautionRule } from './rule.ts';
import { STANDING_RULES } from './standingRules.ts';

/** Every caution that there is: what happened in the loop first, then what it rests on, then the notes that always stand. */
export const CAUTION_RULES: readonly CautionRule[] = [
  ...LOOP_RULES,
  ...RIVAL_RULES,
  ...PREDICTOR_RULES,
  ...DATA_RULES,
  ...CONTROLLER_RULES,
  ...STANDING_RULES,
];

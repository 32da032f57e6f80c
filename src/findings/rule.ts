import { type Excitation, measureExcitation } from '../data/coverage.ts';
import type { Caution, Severity } from './caution.ts';
import { withUnit } from './figures.ts';
import type { LoopRun, StudyResult } from './studyResult.ts';

/** What the rules look at. */
export interface Facts {
  readonly result: StudyResult;
  /** The study's own controller in the loop; undefined when no loop was run. */
  readonly lifted: LoopRun | undefined;
  /** Of the fitting trajectories. */
  readonly excitation: Excitation;
}

export function gatherFacts(result: StudyResult): Facts {
  return { result, lifted: result.runs[0], excitation: measureExcitation(result.dataset) };
}

/** One number that a rule judges, and the limit, input, run … that it belongs to. */
export interface Measured<S> {
  readonly value: number;
  readonly unit: string;
  readonly of: S;
}

/** One row of the table of cautions, as it is written. */
export interface RuleOf<S> {
  readonly code: string;
  /** What is looked at, a noun phrase: shown where it was found in order. */
  readonly meaning: string;
  /** One number for each subject; empty when the rule does not apply to this study. */
  readonly measure: (facts: Facts) => readonly Measured<S>[];
  /** Is this number, which is not NaN, as it should be? Left out by the notes that always stand. */
  readonly inOrder?: (value: number, of: S) => boolean;
  readonly severity: Severity | ((value: number, of: S) => Severity);
  /** Plain English; holds `figure`, the number with its unit. */
  readonly sentence: (figure: string, measured: Measured<S>, facts: Facts) => string;
  readonly whatToDo: string;
}

/** One row of the table, its subject hidden. */
export interface CautionRule {
  readonly code: string;
  readonly meaning: string;
  /** The cautions of this rule; null when there was nothing to look at. */
  readonly check: (facts: Facts) => readonly Caution[] | null;
}

/**
 * Makes a row of the table. A NaN is never in order: it gives a caution of severity error that says so, whatever the rule
 * would have made of a number.
 */
export function defineRule<S>(rule: RuleOf<S>): CautionRule {
  const { code, meaning } = rule;
  return {
    code,
    meaning,
    check: (facts) => {
      const all = rule.measure(facts);
      return all.length === 0 ? null : all.flatMap((measured) => judge(rule, measured, facts));
    },
  };
}

function judge<S>(rule: RuleOf<S>, measured: Measured<S>, facts: Facts): Caution[] {
  const { code, meaning, severity, whatToDo } = rule;
  const { value, unit, of } = measured;
  if (Number.isNaN(value)) {
    const sentence = `Not a number: ${meaning} could not be judged.`;
    const first = 'Find out where the number was lost before anything else of this study is used. ';
    return [{ code, severity: 'error', sentence, value, unit, whatToDo: first + whatToDo }];
  }
  if (rule.inOrder?.(value, of)) return [];
  return [
    {
      code,
      severity: typeof severity === 'function' ? severity(value, of) : severity,
      sentence: rule.sentence(withUnit(value, unit), measured, facts),
      value: rule.inOrder ? value : null,
      unit,
      whatToDo,
    },
  ];
}

/** A single number of the whole study. */
export function one(value: number, unit: string): readonly Measured<null>[] {
  return [{ value, unit, of: null }];
}

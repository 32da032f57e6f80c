import type { Caution, Severity } from './caution.ts';
import { gatherFacts } from './rule.ts';
import type { StudyResult } from './studyResult.ts';
import { CAUTION_RULES } from './table.ts';

const ORDER: readonly Severity[] = ['error', 'warning', 'note'];

/** What was looked at in a study. */
export interface CheckedCautions {
  /** Errors first, then warnings, then notes; within each in the order of the table. */
  readonly cautions: readonly Caution[];
  /** Rules that applied and found everything in order. */
  readonly inOrder: readonly { readonly code: string; readonly meaning: string }[];
  /** Codes of rules for which this study has nothing to look at. */
  readonly notApplicable: readonly string[];
}

/** Judges a study by the whole table of cautions. */
export function checkCautions(result: StudyResult): CheckedCautions {
  const facts = gatherFacts(result);
  const cautions: Caution[] = [];
  const inOrder: { code: string; meaning: string }[] = [];
  const notApplicable: string[] = [];
  for (const { code, meaning, check } of CAUTION_RULES) {
    const found = check(facts);
    if (found === null) notApplicable.push(code);
    else if (found.length === 0) inOrder.push({ code, meaning });
    else cautions.push(...found);
  }
  // Sorting is stable: the order of the table holds within a severity.
  cautions.sort((a, b) => ORDER.indexOf(a.severity) - ORDER.indexOf(b.severity));
  return { cautions, inOrder, notApplicable };
}

/** The cautions of a study, errors first. */
export function findCautions(result: StudyResult): readonly Caution[] {
  return checkCautions(result).cautions;
}

import type { Plant } from '../plant/plant.ts';
import { assembleStudy } from './assembleStudy.ts';
import { convertQuantity, findChannel, namesOf, unitName } from './channels.ts';
import { checkRanges } from './checkRanges.ts';
import { suggestWord } from './nearest.ts';
import { type Problem, sortProblems } from './problem.ts';
import { type ChannelQuantity, quote } from './reader.ts';
import type { StudyDraft } from './readStudy.ts';
import type { Study, StudyOrigin } from './study.ts';
import type { StudyValues } from './table.ts';

/** A study, or what is wrong with it. */
export type BoundStudy =
  | { readonly study: Study; readonly problems: readonly [] }
  | { readonly study: null; readonly problems: readonly Problem[] };

/**
 * The second pass over a study: names of channels are looked up in the plant, quantities converted to the channels'
 * units, limits compared with the plant's own.
 *
 * @returns the study, or all problems of both passes sorted by line.
 */
export function bindStudy(draft: StudyDraft, plant: Plant, origin: StudyOrigin): BoundStudy {
  const problems = [
    ...draft.problems,
    ...checkNames(draft, plant),
    ...checkUnits(draft, plant),
    ...checkRanges(draft, plant),
  ];
  if (problems.length > 0) return { study: null, problems: sortProblems(problems) };
  const inUnits = (quantity: ChannelQuantity) => convertQuantity(quantity, plant) as number;
  return { study: assembleStudy(draft.values as StudyValues, plant, inUnits, origin), problems: [] };
}

function checkNames({ file, names }: StudyDraft, plant: Plant): Problem[] {
  return names.flatMap(({ role, name, spot }) => {
    const known = namesOf(plant, role);
    if (known.includes(name)) return [];
    const must = `the name of ${/^[aeiou]/.test(role) ? 'an' : 'a'} ${role} of ${plant.name}`;
    const wayOut = suggestWord(name, known, `its ${role}s are`);
    return [{ file, line: spot.line, key: spot.key, must, got: quote(name), wayOut }];
  });
}

function checkUnits({ file, quantities }: StudyDraft, plant: Plant): Problem[] {
  return quantities.flatMap((quantity) => {
    const { value, unit, perSecond, spot } = quantity;
    const channel = findChannel(plant, spot.channel);
    if (!channel || convertQuantity(quantity, plant) !== null) return [];
    const name = unitName(channel, perSecond);
    const must = `a quantity in ${name} or a unit of the same dimension`;
    const wayOut = `write a bare number for ${name}, or correct the unit`;
    return [{ file, line: spot.line, key: spot.key, must, got: quote(`${value} ${unit}`), wayOut }];
  });
}

import type { Mark } from '../spec.ts';
import { COLOURS } from '../style.ts';
import { withUnit } from '../words.ts';

/** Logical pixels that the names of limits take to the right of the plot. */
export const LIMIT_LABELS = 118;

/**
 * Hatching beyond the two limits of one axis, a line on each of them and its figure to the right of the plot, where it hides
 * nothing; infinite limits leave no trace.
 * @param end right end of the x axis.
 */
export function limitMarks(
  axis: string,
  end: number,
  { min, max, unit }: { readonly min: number; readonly max: number; readonly unit: string },
): Mark[] {
  const marks: Mark[] = [];
  for (const [at, from, to] of [
    [min, null, min],
    [max, max, null],
  ] as const) {
    if (!Number.isFinite(at)) continue;
    marks.push({ kind: 'band', axis, from, to, colour: COLOURS.hatch.light, hatched: true });
    marks.push({
      kind: 'line',
      axis,
      at,
      colour: COLOURS.quiet.light,
      dash: [],
      width: 1.25,
      label: '',
    });
    marks.push({
      kind: 'label',
      x: 'x',
      y: axis,
      at: { x: end, y: at },
      text: `${at === min ? 'min' : 'max'} ${withUnit(at, unit)}`,
      colour: COLOURS.quiet.light,
      place: 'end',
    });
  }
  return marks;
}

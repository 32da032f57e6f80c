import { formatFigure } from '../findings/figures.ts';
import type { LoopRun } from '../findings/studyResult.ts';

export { formatFigure };

/** What each controller of the comparison is called in running text. */
export const CONTROLLER_WORDS: Record<LoopRun['name'], string> = {
  lifted: 'the lifted controller',
  'plain-linear': 'the controller from plain linear regression',
  linearised: 'the controller linearised at the operating point',
};

/** Between a figure and its unit no line may be broken. */
const NO_BREAK = '\u00a0';

/** A figure with its unit; a pure number stands alone. */
export function withUnit(value: number, unit: string): string {
  return unit === '1' ? formatFigure(value) : `${formatFigure(value)}${NO_BREAK}${unit}`;
}

/** A share (1 = all) in percent. */
export function percent(share: number): string {
  return `${formatFigure(100 * share)}${NO_BREAK}%`;
}

export function plural(count: number, noun: string): string {
  return `${count} ${noun}${count === 1 ? '' : 's'}`;
}

/** `a`, `a and b`, `a, b and c`. */
export function list(words: readonly string[]): string {
  if (words.length < 2) return words.join('');
  return `${words.slice(0, -1).join(', ')} and ${words.at(-1)}`;
}

/** Steps ahead and how long they take. */
export function stepsAhead(steps: number, sampleTime: number): string {
  return `${plural(steps, 'step')} (${withUnit(steps * sampleTime, 's')})`;
}

/** Title of an axis: the name and its unit. */
export function axisTitle({ name, unit }: { readonly name: string; readonly unit: string }): string {
  return unit === '1' ? name : `${name}, ${unit}`;
}

/** First letter in upper case. */
export function sentenceCase(text: string): string {
  return text.charAt(0).toUpperCase() + text.slice(1);
}

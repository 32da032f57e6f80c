import Qty from 'js-quantities';

/** What a unit's text is worth against another: a factor, or why there is none. */
export type Conversion = { readonly factor: number } | 'unknown' | 'other-dimension';

const QUANTITY = /^([+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?)\s*(1\/\S.*|[^\s\d.+-].*)$/u;
/** Spellings that a data sheet has and the unit table has not. */
const SPELLINGS: readonly (readonly [RegExp, string])[] = [
  [/·|⋅/g, '*'],
  [/²/g, '^2'],
  [/³/g, '^3'],
  [/[µμ]/g, 'u'],
  [/Ω/g, 'Ohm'],
  [/°/g, 'deg'],
  [/\bNm\b/g, 'N*m'],
];
/** Scales with an offset: `20 degC` is no multiple of a kelvin. */
const WITH_OFFSET = /deg[CF]|temp[CFKR]|celsius|fahrenheit/i;

/** A quantity as it is written: a number and the text of its unit; null if it is not of this form. */
export function splitQuantity(text: string): { readonly value: number; readonly unit: string } | null {
  const match = QUANTITY.exec(text.trim());
  return match && { value: Number(match[1]), unit: match[2].trim() };
}

function parseUnit(unit: string): Qty | null {
  const spelled = SPELLINGS.reduce((text, [from, to]) => text.replace(from, to), unit);
  if (WITH_OFFSET.test(spelled) || !/^[a-zA-Z%]|^1(\/|$)/.test(spelled)) return null;
  try {
    return Qty(spelled === '1' ? 1 : spelled);
  } catch {
    return null;
  }
}

/**
 * The factor from one unit to another, `per` seconds if asked: `value [to] = factor · value [from]`.
 * A channel may carry a unit that the table does not know; its own spelling then has the factor 1.
 */
export function convertUnit(from: string, to: string, perSecond = false): Conversion {
  if (from === (perSecond ? `${to}/s` : to)) return { factor: 1 };
  const source = parseUnit(from);
  if (source === null) return 'unknown';
  const target = parseUnit(to);
  if (target === null) return 'other-dimension';
  const goal = perSecond ? target.div(Qty(1, 's')) : target;
  if (!source.isCompatible(goal)) return 'other-dimension';
  return { factor: source.toBase().scalar / goal.toBase().scalar };
}

/**
 * `factor · value`, rounded once where the factor is the inverse of a whole number, so that `7 ms` and `0.007` are
 * the same number.
 */
export function applyFactor(value: number, factor: number): number {
  const inverse = 1 / factor;
  const whole = Math.round(inverse);
  // 1e-12: far above the rounding of one division, far below the distance of two whole numbers of 1e9.
  return whole > 1 && whole < 1e9 && Math.abs(inverse / whole - 1) < 1e-12 ? value / whole : value * factor;
}

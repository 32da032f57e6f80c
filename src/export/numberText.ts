/**
 * The shortest decimal that reads back as the same double, `-0` for a negative zero; `Infinity`, `-Infinity` or `NaN` where
 * there is none.
 */
export function shortest(value: number): string {
  return Object.is(value, -0) ? '-0' : String(value);
}

/**
 * A C99 floating constant that every correct compiler reads as the same double. An infinite value becomes the macro
 * `infinity` (with a minus where it is negative), not a number `NAN` of math.h.
 */
export function cLiteral(value: number, infinity: string): string {
  if (Number.isNaN(value)) return 'NAN';
  if (!Number.isFinite(value)) return value > 0 ? infinity : `-${infinity}`;
  const text = shortest(value);
  return /[.e]/.test(text) ? text : `${text}.0`;
}

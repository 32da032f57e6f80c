/** Three significant digits, trailing zeros dropped; `1.2e-5` where plain digits would be long. */
export function formatFigure(value: number): string {
  if (Number.isNaN(value)) return 'not a number';
  if (!Number.isFinite(value)) return value > 0 ? 'infinite' : '-infinite';
  const size = Math.abs(value);
  if (size === 0) return '0';
  if (size >= 1e-3 && size < 1e5) return String(Number(value.toPrecision(3)));
  return value
    .toExponential(1)
    .replace(/\.0(?=e)/, '')
    .replace('e+', 'e');
}

/** A figure with its unit; a pure number (`1`) stands alone. */
export function withUnit(value: number, unit: string): string {
  return unit === '1' ? formatFigure(value) : `${formatFigure(value)} ${unit}`;
}

/** `1 step`, `3 steps`. */
export function plural(count: number, noun: string): string {
  return `${formatFigure(count)} ${noun}${count === 1 ? '' : 's'}`;
}

/** Names in a row, at most `most` of them, the last entry counting the others. */
export function listNames(names: readonly string[], most = 6): string {
  if (names.length <= most) return names.join(', ');
  return `${names.slice(0, most - 1).join(', ')} and ${names.length - most + 1} more`;
}

import { shortest } from './numberText.ts';

/** Width up to which a list or a record of plain values stays on one line. */
const WIDTH = 110;

/**
 * A value as JSON text (RFC 8259), indented by two, lists of numbers on one line. Numbers keep every bit: shortest round-trip
 * decimals, `-0` with its sign. What JSON has no number for is a text: `"Infinity"`, `"-Infinity"`, `"NaN"`. Fields that are
 * undefined are left out, a `Float64Array` is a list.
 */
export function writeJson(value: unknown): string {
  return `${write(value, '')}\n`;
}

function write(value: unknown, indent: string): string {
  if (typeof value === 'number') {
    return Number.isFinite(value) ? shortest(value) : JSON.stringify(shortest(value));
  }
  if (typeof value !== 'object' || value === null) return JSON.stringify(value);
  const deeper = `${indent}  `;
  const isList = Array.isArray(value) || value instanceof Float64Array;
  const entries = isList
    ? Array.from(value as ArrayLike<unknown>, (entry) => write(entry, deeper))
    : Object.entries(value).flatMap(([key, entry]) =>
        entry === undefined ? [] : [`${JSON.stringify(key)}: ${write(entry, deeper)}`],
      );
  const [open, close] = isList ? ['[', ']'] : ['{', '}'];
  const isFlat = entries.every((entry) => !entry.includes('\n'));
  const isNumbers =
    isList && Array.from(value as ArrayLike<unknown>).every((entry) => typeof entry === 'number');
  const line = entries.join(', ');
  if (entries.length === 0 || isNumbers || (isFlat && indent.length + line.length <= WIDTH)) {
    return isList ? `[${line}]` : line === '' ? '{}' : `{ ${line} }`;
  }
  return `${open}\n${entries.map((entry) => deeper + entry).join(',\n')}\n${indent}${close}`;
}

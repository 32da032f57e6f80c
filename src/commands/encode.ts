/**
 * JSON for the stages' records. Numbers keep every bit (shortest round-trip form). What JSON lacks is tagged by an
 * object with one key: `{"number": "NaN" | "Infinity" | "-Infinity" | "-0"}`, and `{"float64" | "int8": […]}` for a
 * typed array.
 */
type Tag = 'number' | 'float64' | 'int8';

function encodeNumber(value: number): unknown {
  if (Object.is(value, -0)) return { number: '-0' };
  return Number.isFinite(value) ? value : { number: String(value) };
}

function encode(value: unknown): unknown {
  if (typeof value === 'number') return encodeNumber(value);
  if (value instanceof Float64Array) return { float64: Array.from(value, encodeNumber) };
  if (value instanceof Int8Array) return { int8: Array.from(value) };
  if (Array.isArray(value)) return value.map(encode);
  if (typeof value === 'object' && value !== null) {
    return Object.fromEntries(Object.entries(value).map(([key, inner]) => [key, encode(inner)]));
  }
  return value;
}

function decode(value: unknown): unknown {
  if (Array.isArray(value)) return value.map(decode);
  if (typeof value !== 'object' || value === null) return value;
  const entries = Object.entries(value);
  if (entries.length === 1) {
    const [tag, inner] = entries[0] as [Tag | string, unknown];
    if (tag === 'number' && typeof inner === 'string') return Number(inner);
    if (tag === 'float64' && Array.isArray(inner)) return Float64Array.from(inner.map(decode) as number[]);
    if (tag === 'int8' && Array.isArray(inner)) return Int8Array.from(inner as number[]);
  }
  return Object.fromEntries(entries.map(([key, inner]) => [key, decode(inner)]));
}

/** A record as JSON text; fields that are `undefined` or functions are left out, as JSON has it. */
export function encodeRecord(record: unknown): string {
  return JSON.stringify(encode(record));
}

/** The record of a JSON text. @throws SyntaxError if the text is not JSON. */
export function decodeRecord(text: string): unknown {
  return decode(JSON.parse(text));
}

import { isScalar, type Node } from 'yaml';
import { suggestWord } from './nearest.ts';
import { type ChannelQuantity, describeNode, type Reader, type Spot } from './reader.ts';
import { applyFactor, convertUnit, splitQuantity } from './units.ts';

/** A kind of value: what it must be, how it is read from a node, how it is written. */
export interface Kind<T> {
  /** Noun phrase: `an integer ≥ 1`. */
  readonly must: string;
  /** What to write instead, an imperative. */
  readonly wayOut: string;
  /** The value, or `undefined` with the problem noted. */
  read(reader: Reader, node: Node | null, spot: Spot): T | undefined;
  /** The value as it would stand in a study file. */
  write(value: T): string;
  /** What stands below it, where it is not a scalar. */
  readonly below?: Below;
}

/** The fields below a key, for help text and defaults. */
export type Below =
  | { readonly type: 'group'; readonly fields: Fields }
  | { readonly type: 'map'; readonly role: string; readonly of: Kind<unknown> }
  | { readonly type: 'list'; readonly of: Kind<unknown> }
  | { readonly type: 'variants'; readonly tag: string; readonly variants: readonly VariantRow[] };

export interface VariantRow {
  readonly name: string;
  readonly meaning: string;
  readonly fields: Fields;
}

/** What derived defaults are computed from. */
export interface Basis {
  readonly sampleTime: number;
  readonly horizon: number;
}

/** One row of the table. */
export interface Field<T> {
  readonly kind: Kind<T>;
  /** One sentence without its full stop. */
  readonly meaning: string;
  readonly presence:
    | { readonly type: 'required' }
    | { readonly type: 'default'; readonly value: T; readonly text?: string }
    | { readonly type: 'derived'; readonly text: string; readonly from: (basis: Basis) => T };
}

export type Fields = Readonly<Record<string, Field<unknown>>>;
export type Values<F> = { readonly [K in keyof F]: F[K] extends Field<infer T> ? T : never };

export interface Range {
  readonly min?: number;
  readonly max?: number;
  /** Excluded end points. */
  readonly above?: number;
  readonly below?: number;
}

/** ` > 0`, ` from 0 to 1`, ` ≥ 1 and < 5`; empty without a range. */
export function describeRange({ min, max, above, below }: Range): string {
  if (min !== undefined && max !== undefined) return ` from ${min} to ${max}`;
  const low = min !== undefined ? `≥ ${min}` : above !== undefined ? `> ${above}` : '';
  const high = max !== undefined ? `≤ ${max}` : below !== undefined ? `< ${below}` : '';
  const both = [low, high].filter(Boolean).join(' and ');
  return both && ` ${both}`;
}

/** NaN and infinities are in no range. */
export function inRange(value: number, { min, max, above, below }: Range): boolean {
  return (
    value >= (min ?? -Number.MAX_VALUE) &&
    value <= (max ?? Number.MAX_VALUE) &&
    (above === undefined || value > above) &&
    (below === undefined || value < below)
  );
}

/** A scalar kind from a reading of the plain value; `undefined` refuses it. */
function scalarKind<T>(
  must: string,
  wayOut: string,
  accept: (value: unknown) => T | undefined,
  write: (value: T) => string = String,
): Kind<T> {
  return {
    must,
    wayOut,
    write,
    read: (reader, node, spot) => {
      const value = isScalar(node) ? accept(node.value) : undefined;
      return value === undefined ? reader.refuse(spot, must, describeNode(node), wayOut) : value;
    },
  };
}

export function text(must: string, wayOut: string): Kind<string> {
  return scalarKind(
    must,
    wayOut,
    (value) => (typeof value === 'string' && value.trim() !== '' ? value : undefined),
    (value) => JSON.stringify(value),
  );
}

export function toggle(): Kind<boolean> {
  return scalarKind('true or false', 'write true or false, without quotation marks', (value) =>
    typeof value === 'boolean' ? value : undefined,
  );
}

export function integer(range: Range): Kind<number> {
  const must = `an integer${describeRange(range)}`;
  return scalarKind(must, 'write a whole number in that range, without a unit', (value) =>
    typeof value === 'number' && Number.isInteger(value) && inRange(value, range) ? value : undefined,
  );
}

export function choice<const C extends string>(choices: readonly C[]): Kind<C> {
  const must = choices.length === 2 ? choices.join(' or ') : `one of ${choices.join(', ')}`;
  return {
    must,
    wayOut: 'choose one of these words',
    write: String,
    read: (reader, node, spot) => {
      const value = isScalar(node) ? node.value : undefined;
      if (choices.includes(value as C)) return value as C;
      const wayOut =
        typeof value === 'string'
          ? suggestWord(value, choices, 'choose one of')
          : 'choose one of these words';
      return reader.refuse(spot, must, describeNode(node), wayOut);
    },
  };
}

/** What a dimension is called, and how to write it. */
const DIMENSIONS = {
  s: { noun: 'a time', wayOut: 'write seconds or a quantity with a unit of time, such as 5 ms' },
  Hz: { noun: 'a frequency', wayOut: 'write hertz or a quantity with a unit of frequency, such as 20 Hz' },
  '1': { noun: 'a number', wayOut: 'write a number without a unit, or a percentage such as 5 %' },
} as const;

/** A quantity of a fixed dimension; a bare number is in the SI unit. */
export function quantity(unit: keyof typeof DIMENSIONS, range: Range): Kind<number> {
  const { noun, wayOut } = DIMENSIONS[unit];
  const inUnit = unit === '1' || describeRange(range) === '' ? '' : ` ${unit}`;
  const zero = (range.above === 0 || range.min === 0) && range.max === undefined;
  const must = `${noun}${describeRange(range)}${zero ? '' : inUnit}`;
  return scalarKind(
    must,
    wayOut,
    (raw) => {
      const value = typeof raw === 'string' ? fromText(raw, unit) : raw;
      return typeof value === 'number' && inRange(value, range) ? value : undefined;
    },
    (value) => (unit === '1' ? String(value) : `${value} ${unit}`),
  );
}

function fromText(raw: string, unit: string): number | undefined {
  const parts = splitQuantity(raw);
  const conversion = parts && convertUnit(parts.unit, unit);
  return conversion !== null && typeof conversion === 'object'
    ? applyFactor(parts!.value, conversion.factor)
    : undefined;
}

/** A pure number, percent allowed. */
export function number(range: Range): Kind<number> {
  return quantity('1', range);
}

/** A quantity in the unit of the channel under whose name it stands, or that unit per second. */
export function channelQuantity(perSecond = false): Kind<ChannelQuantity> {
  const must = perSecond ? "a rate in the channel's unit per second" : "a quantity in the channel's unit";
  const wayOut = perSecond
    ? "write a number or a quantity such as 50 N/s; a bare number is in the channel's SI unit per second"
    : "write a number or a quantity such as 0.5 A; a bare number is in the channel's SI unit";
  return {
    must,
    wayOut,
    write: ({ value, unit }) => (unit === null ? String(value) : `${value} ${unit}`),
    read: (reader, node, spot) => {
      const raw = isScalar(node) ? node.value : undefined;
      const parts = typeof raw === 'string' ? splitQuantity(raw) : null;
      const value = parts?.value ?? raw;
      if (typeof value !== 'number' || !Number.isFinite(value) || spot.channel === undefined) {
        return reader.refuse(spot, must, describeNode(node), wayOut);
      }
      const found = {
        value,
        unit: parts?.unit ?? null,
        perSecond,
        spot: { ...spot, channel: spot.channel },
      };
      reader.quantities.push(found);
      return found;
    },
  };
}

/** A word that stands for "leave it to the program" (null), or a value. */
export function wordOr<T>(word: string, kind: Kind<T>): Kind<T | null> {
  const must = `${word} or ${kind.must}`;
  return {
    must,
    wayOut: `write ${word}, or ${kind.wayOut.replace(/^write /, '')}`,
    write: (value) => (value === null ? word : kind.write(value)),
    below: kind.below,
    read(reader, node, spot) {
      if (isScalar(node) && node.value === word) return null;
      const before = reader.problems.length;
      const value = kind.read(reader, node, spot);
      if (value === undefined && reader.problems.length === before + 1) {
        reader.problems.pop();
        return reader.refuse(spot, must, describeNode(node), this.wayOut);
      }
      return value;
    },
  };
}

import type { Matrix } from '../numerics/matrix.ts';

/** A controller file that cannot be used; reads `key: must be X, got Y`. */
export class UnusableControllerError extends Error {
  readonly key: string;

  constructor(key: string, must: string, got: unknown) {
    const text = got === undefined ? 'nothing' : (JSON.stringify(got) ?? String(got));
    super(`${key}: must be ${must}, got ${text.length > 60 ? `${text.slice(0, 57)}...` : text}`);
    this.name = 'UnusableControllerError';
    this.key = key;
  }
}

/** One value of a parsed JSON text with the way to it, so that every complaint names its place. */
export interface Field {
  readonly at: (key: string | number) => Field;
  readonly list: () => readonly Field[];
  readonly entries: () => readonly (readonly [string, Field])[];
  /** Is the field there at all? */
  readonly present: boolean;
  readonly text: () => string;
  readonly flag: () => boolean;
  readonly oneOf: <T extends string>(choices: readonly T[]) => T;
  /** A number, or the text of one that JSON lacks. */
  readonly real: () => number;
  readonly finite: () => number;
  /** An integer ≥ `least`, 0 when left out. */
  readonly whole: (least?: number) => number;
  readonly reals: (length?: number) => number[];
  readonly matrix: (rows: number, cols: number) => Matrix;
  readonly raw: unknown;
  /** @throws UnusableControllerError always. */
  readonly refuse: (must: string) => never;
}

const SPECIAL: Readonly<Record<string, number>> = {
  Infinity: Number.POSITIVE_INFINITY,
  '-Infinity': Number.NEGATIVE_INFINITY,
  NaN: Number.NaN,
};

/** Wraps a parsed JSON value. Every method throws UnusableControllerError when the value is not what it asks for. */
export function readFields(raw: unknown, key = 'controller'): Field {
  const refuse = (must: string): never => {
    throw new UnusableControllerError(key, must, raw);
  };
  const isRecord = typeof raw === 'object' && raw !== null && !Array.isArray(raw);
  const check = <T>(holds: boolean, must: string) => (holds ? (raw as T) : refuse(must));
  const field: Field = {
    raw,
    refuse,
    present: raw !== undefined,
    at: (name) => {
      if (typeof name === 'number') return readFields((raw as unknown[])[name], `${key}[${name}]`);
      if (!isRecord) return refuse('an object');
      return readFields(
        Object.hasOwn(raw, name) ? (raw as Record<string, unknown>)[name] : undefined,
        `${key}.${name}`,
      );
    },
    list: () => (Array.isArray(raw) ? raw.map((_, i) => field.at(i)) : refuse('a list')),
    entries: () =>
      isRecord ? Object.keys(raw).map((name) => [name, field.at(name)] as const) : refuse('an object'),
    text: () => check(typeof raw === 'string', 'a text'),
    flag: () => check(typeof raw === 'boolean', 'true or false'),
    oneOf: (choices) => check((choices as readonly unknown[]).includes(raw), `one of ${choices.join(', ')}`),
    real: () => {
      if (typeof raw === 'string' && Object.hasOwn(SPECIAL, raw)) return SPECIAL[raw];
      return check(typeof raw === 'number', 'a number');
    },
    // JSON reads 1e999 as Infinity.
    finite: () => check(Number.isFinite(raw), 'a finite number'),
    whole: (least = 0) =>
      check(Number.isInteger(raw) && (raw as number) >= least, `an integer of ${least} or more`),
    reals: (length) => {
      const values = field.list().map((entry) => entry.real());
      return length === undefined || values.length === length
        ? values
        : refuse(`a list of ${length} numbers`);
    },
    matrix: (rows, cols) => {
      const isRight = field.at('rows').whole() === rows && field.at('cols').whole() === cols;
      if (!isRight) {
        const got = `${field.at('rows').whole()} x ${field.at('cols').whole()}`;
        throw new UnusableControllerError(key, `${rows} x ${cols}`, got);
      }
      const lines = field.at('data').list();
      if (lines.length !== rows) field.at('data').refuse(`a list of ${rows} rows`);
      return { rows, cols, data: Float64Array.from(lines.flatMap((line) => line.reals(cols))) };
    },
  };
  return field;
}

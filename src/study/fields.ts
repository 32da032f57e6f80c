import type { Basis, Field, Kind } from './kinds.ts';

/** A key that every study must have. */
export function required<T>(kind: Kind<T>, meaning: string): Field<T> {
  return { kind, meaning, presence: { type: 'required' } };
}

/** A key with a default; `text` says it where the value alone would not. */
export function optional<T>(kind: Kind<T>, value: T, meaning: string, text?: string): Field<T> {
  return { kind, meaning, presence: { type: 'default', value, text } };
}

/** A key that may be left out without anything standing in for it. */
export function absent<T>(kind: Kind<T>, meaning: string, text = 'none'): Field<T | null> {
  return { kind: kind as Kind<T | null>, meaning, presence: { type: 'default', value: null, text } };
}

/** A key whose default follows from the sample time and the horizon. */
export function derived<T>(
  kind: Kind<T>,
  text: string,
  from: (basis: Basis) => T,
  meaning: string,
): Field<T> {
  return { kind, meaning, presence: { type: 'derived', text, from } };
}

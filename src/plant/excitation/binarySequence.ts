import type { Random } from '../../numerics/random.ts';

/**
 * Feedback taps (exponents of a primitive polynomial over GF(2)) by register length.
 * Source: S. Golomb, Shift Register Sequences, 1967 [from memory; every period verified by running it through].
 */
export const TAPS: ReadonlyMap<number, readonly number[]> = new Map([
  [3, [3, 2]],
  [4, [4, 3]],
  [5, [5, 3]],
  [6, [6, 5]],
  [7, [7, 6]],
  [8, [8, 6, 5, 4]],
  [9, [9, 5]],
  [10, [10, 7]],
  [11, [11, 9]],
  [12, [12, 6, 4, 1]],
  [15, [15, 14]],
]);

/**
 * One period of the maximal-length sequence of a shift register: `2^bits − 1` values 0 or 1.
 * The new bit is the sum modulo 2 of the tapped bits; the register starts all ones.
 *
 * @throws RangeError for a register length without an entry in `TAPS`.
 */
export function maximalLengthSequence(bits: number): Uint8Array {
  const taps = TAPS.get(bits);
  if (!taps) throw new RangeError(`no feedback taps for a register of ${bits} bits`);
  const sequence = new Uint8Array(2 ** bits - 1);
  let register = 2 ** bits - 1;
  for (let k = 0; k < sequence.length; k++) {
    sequence[k] = (register >> (bits - 1)) & 1;
    let bit = 0;
    for (const tap of taps) bit ^= (register >> (tap - 1)) & 1;
    register = ((register << 1) | bit) & (2 ** bits - 1);
  }
  return sequence;
}

/** The shortest register whose period is not repeated within `bits` bits; the longest of the table if none. */
function registerFor(length: number): number {
  const lengths = [...TAPS.keys()].filter((bits) => bits >= 5);
  return lengths.find((bits) => 2 ** bits - 1 >= length) ?? lengths[lengths.length - 1];
}

/**
 * A maximal-length binary sequence of −1 and 1, each bit held `hold` samples, begun at a random place of the period.
 * A period that fits the signal once is chosen.
 *
 * @returns `count` values, each −1 or 1.
 */
export function binarySequence(count: number, hold: number, random: Random): Float64Array {
  const sequence = maximalLengthSequence(registerFor(Math.ceil(count / hold)));
  const start = Math.floor(random() * sequence.length);
  return Float64Array.from(
    { length: count },
    (_, k) => 2 * sequence[(start + Math.floor(k / hold)) % sequence.length] - 1,
  );
}

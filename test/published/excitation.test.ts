import { describe, expect, it } from 'vitest';
import { maximalLengthSequence, TAPS } from '../../src/plant/excitation/binarySequence.ts';
import { schroederPhases, sumOfHarmonics } from '../../src/plant/excitation/multisine.ts';

// S. Golomb, Shift Register Sequences, 1967: feedback exponents of primitive polynomials [from memory; the periods
// verified by brute force].
const PUBLISHED_TAPS: readonly (readonly [number, readonly number[]])[] = [
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
];

/** Smallest shift that maps the periodic sequence onto itself. */
function smallestPeriod(sequence: Uint8Array): number {
  const n = sequence.length;
  for (let shift = 1; shift < n; shift++) {
    if (n % shift === 0 && sequence.every((bit, k) => bit === sequence[(k + shift) % n])) return shift;
  }
  return n;
}

describe('maximal-length sequences against their published properties', () => {
  it('the feedback taps are the published ones', () => {
    expect([...TAPS]).toEqual(PUBLISHED_TAPS);
  });

  it.each(PUBLISHED_TAPS.map(([bits]) => bits))(
    'with %i bits: period 2^n − 1, 2^(n−1) ones, every window of n bits once',
    (bits) => {
      const sequence = maximalLengthSequence(bits);
      const n = 2 ** bits - 1;
      expect(sequence.length).toBe(n);
      expect(smallestPeriod(sequence)).toBe(n);
      expect(sequence.reduce((sum, bit) => sum + bit, 0)).toBe(2 ** (bits - 1));
      const windows = new Set<number>();
      for (let k = 0; k < n; k++) {
        let window = 0;
        for (let i = 0; i < bits; i++) window = 2 * window + sequence[(k + i) % n];
        windows.add(window);
      }
      expect(windows.size).toBe(n);
      expect(windows.has(0)).toBe(false);
    },
  );

  it.each([3, 5, 8, 10])('with %i bits as ±1: autocorrelation −1/N off the peak, closed form', (bits) => {
    const signs = Array.from(maximalLengthSequence(bits), (bit) => 2 * bit - 1);
    const n = signs.length;
    for (let shift = 1; shift < n; shift++) {
      expect(signs.reduce((sum, sign, k) => sum + sign * signs[(k + shift) % n], 0)).toBe(-1);
    }
  });

  it('a register without published taps is refused', () => {
    expect(() => maximalLengthSequence(13)).toThrow(RangeError);
  });
});

describe('multisines against Schroeder’s phases', () => {
  // M. Schroeder, IEEE Trans. Inf. Theory 16:85–89, 1970: φ_k = −π k (k − 1) / F. Crest factors on 2^16 points recomputed.
  it.each([
    [5, 1.789978],
    [10, 1.91629],
    [20, 1.765329],
    [50, 1.721489],
    [100, 1.676399],
  ])('%i harmonics have the recomputed crest factor %f', (F, crest) => {
    const values = sumOfHarmonics(
      2 ** 16,
      Array.from({ length: F }, (_, i) => i + 1),
    );
    const peak = values.reduce((most, value) => Math.max(most, Math.abs(value)), 0);
    const rms = Math.sqrt(values.reduce((sum, value) => sum + value ** 2, 0) / values.length);
    expect(Math.abs(peak / rms - crest)).toBeLessThan(1e-6);
  });

  it('the phases follow the formula, closed form', () => {
    expect(Array.from(schroederPhases(4), (phi) => phi / Math.PI)).toEqual([-0, -0.5, -1.5, -3]);
  });
});

import { describe, expect, it } from 'vitest';
import { FAMILIES } from '../../src/lift/families.ts';
import { contextOf } from './liftingFixture.ts';

/*
 * A. Rahimi, B. Recht, "Random features for large-scale kernel machines", NIPS 20, 2007, algorithm 1: from memory. The mean of
 * D terms 2 cos(ω·x + b) cos(ω·y + b), each within [−2, 2], misses the kernel exp(−‖x − y‖²/(2ℓ²)) by more than ε with
 * probability ≤ 2 exp(−D ε²/8) (W. Hoeffding, J. Am. Stat. Assoc. 58:13–30, 1963).
 */
const FEATURES = 2000;
const LIFTS = 20;
const MISS = 1e-6;
const BOUND = Math.sqrt((8 * Math.log(2 / MISS)) / (FEATURES * LIFTS));

describe('random Fourier features', () => {
  for (const lengthScale of [0.5, 1, 2]) {
    it(`tend to the Gaussian kernel of length ${lengthScale} within the Monte-Carlo bound`, () => {
      const pairs = [0, 0.25, 0.5, 1, 2].map((r) => [
        [0.3, -0.1, 0.2],
        [0.3 + (r * 2) / 3, -0.1 - r / 3, 0.2 + (r * 2) / 3],
      ]);
      const sums = new Float64Array(pairs.length);
      for (let seed = 1; seed <= LIFTS; seed++) {
        const context = contextOf(3, { seed });
        const { constants } = FAMILIES['random-fourier'].build({ features: FEATURES, lengthScale }, context);
        const { evaluateInto } = FAMILIES['random-fourier'].functions(constants, context);
        const [a, b] = [new Float64Array(FEATURES), new Float64Array(FEATURES)];
        pairs.forEach(([x, y], k) => {
          evaluateInto(a, 0, x);
          evaluateInto(b, 0, y);
          for (let i = 0; i < FEATURES; i++) sums[k] += (2 * a[i] * b[i]) / (FEATURES * LIFTS);
        });
      }
      [0, 0.25, 0.5, 1, 2].forEach((r, k) => {
        const kernel = Math.exp(-(r * r) / (2 * lengthScale ** 2));
        expect(Math.abs(sums[k] - kernel)).toBeLessThan(BOUND);
      });
    });
  }
});

import { describe, expect, it } from 'vitest';
import { createRandom, deriveSeed, drawNormal } from '../../src/numerics/random.ts';

const draw = (count: number, seed: number) => {
  const random = createRandom(seed);
  return Array.from({ length: count }, random);
};

const M32 = (1n << 32n) - 1n;

/** MurmurHash3's 32-bit finaliser in big integers. */
function finalise(h: bigint): bigint {
  h = ((h ^ (h >> 16n)) * 0x85ebca6bn) & M32;
  h = ((h ^ (h >> 13n)) * 0xc2b2ae35n) & M32;
  return h ^ (h >> 16n);
}

/** xoshiro128** in big integers, written after the authors' C code, seeded as the docstring says. */
function* twin(seed: bigint): Generator<number> {
  const rotate = (v: bigint, by: bigint) => ((v << by) | (v >> (32n - by))) & M32;
  let state = finalise(seed);
  const s: bigint[] = [];
  for (let i = 0; i < 4; i++) {
    state = (state + 0x9e3779b9n) & M32;
    s.push(finalise(state));
  }
  s[3] |= 1n;
  const next = () => {
    const result = (rotate((s[1] * 5n) & M32, 7n) * 9n) & M32;
    const t = (s[1] << 9n) & M32;
    s[2] ^= s[0];
    s[3] ^= s[1];
    s[1] ^= s[2];
    s[0] ^= s[3];
    s[2] ^= t;
    s[3] = rotate(s[3], 11n);
    return result;
  };
  while (true) yield Number(((next() >> 5n) << 26n) | (next() >> 6n)) / 2 ** 53;
}

describe('the random numbers', () => {
  // D. Blackman, S. Vigna, ACM TOMS 47, 2021, xoshiro128** [from memory]; A. Appleby's finaliser maps 1 to 514e28b7
  // [from memory, recomputed].
  it('are those of a twin in big integers, written after the published generator', () => {
    expect(finalise(1n)).toBe(0x514e28b7n);
    for (const seed of [0, 1, 12345, 0xffffffff]) {
      const reference = twin(BigInt(seed));
      for (const value of draw(200, seed)) expect(value).toBe(reference.next().value);
    }
  });

  it('repeat with the seed and differ with another', () => {
    expect(draw(50, 7)).toEqual(draw(50, 7));
    expect(new Set([...draw(50, 7), ...draw(50, 8)]).size).toBe(100);
  });

  // Chi-squared with 99 degrees of freedom exceeds 148.2 with probability 0.001 (tables; from memory, recomputed).
  it('fill 100 equal cells evenly by the chi-squared test, alone and in pairs', () => {
    const values = draw(200_000, 3);
    const cells = new Array<number>(100).fill(0);
    const pairs = new Array<number>(100).fill(0);
    for (const value of values) cells[Math.floor(value * 100)]++;
    for (let i = 0; i < values.length; i += 2) {
      pairs[10 * Math.floor(values[i] * 10) + Math.floor(values[i + 1] * 10)]++;
    }
    for (const counts of [cells, pairs]) {
      const expected = counts.reduce((a, b) => a + b) / 100;
      expect(counts.reduce((sum, count) => sum + (count - expected) ** 2 / expected, 0)).toBeLessThan(148.2);
    }
  });

  // Standard normal distribution: Φ(−1.959964) = 0.025, Φ(0) = 0.5, Φ(1.644854) = 0.95 (tables; from memory).
  it('drawn as normal numbers meet the tables of the normal distribution within four standard errors', () => {
    const random = createRandom(11);
    const values = Array.from({ length: 100_000 }, () => drawNormal(random));
    for (const [z, share] of [
      [-1.959964, 0.025],
      [0, 0.5],
      [1.644854, 0.95],
    ]) {
      const below = values.filter((value) => value < z).length / values.length;
      expect(Math.abs(below - share)).toBeLessThan(4 * Math.sqrt((share * (1 - share)) / values.length));
    }
  });
});

describe('derived seeds', () => {
  it('are the same for the same labels and all different for 20,000 labels, but for birthdays', () => {
    expect(deriveSeed(1, 'experiment', 3)).toBe(deriveSeed(1, 'experiment', 3));
    const seeds = new Set<number>();
    for (let i = 0; i < 10_000; i++)
      seeds.add(deriveSeed(1, 'experiment', i)).add(deriveSeed(2, 'experiment', i));
    // Closed form: among 20,000 random 32-bit numbers 0.05 pairs are equal on average.
    expect(seeds.size).toBeGreaterThanOrEqual(19_999);
  });

  it('tell where one label ends and the next begins', () => {
    expect(deriveSeed(1, 'a', 'bc')).not.toBe(deriveSeed(1, 'ab', 'c'));
    expect(deriveSeed(1, 1, 2)).not.toBe(deriveSeed(1, 12));
  });
});

/** A source of uniform numbers on [0, 1) with 53 random bits, as `Math.random` has it, but seeded. */
export type Random = () => number;

const GOLDEN = 0x9e3779b9;

/** One round of a 32-bit mixing function (MurmurHash3 finaliser, A. Appleby, public domain). */
function mix(h: number): number {
  h = Math.imul(h ^ (h >>> 16), 0x85ebca6b);
  h = Math.imul(h ^ (h >>> 13), 0xc2b2ae35);
  return (h ^ (h >>> 16)) >>> 0;
}

/**
 * A seed for one job of many: the same `seed` and labels always give the same number, and different labels
 * give unrelated ones, so that results do not depend on the order in which jobs run.
 */
export function deriveSeed(seed: number, ...labels: readonly (string | number)[]): number {
  let h = mix((seed >>> 0) ^ GOLDEN);
  for (const label of labels) {
    for (const char of `${label}\u0000`) h = mix(h ^ (char.codePointAt(0) ?? 0) ^ GOLDEN);
  }
  return h;
}

/**
 * Uniform random numbers on [0, 1) by the 128-bit xoshiro generator.
 * Source: D. Blackman, S. Vigna, "Scrambled linear pseudorandom number generators", ACM TOMS 47 (2021),
 * xoshiro128**; seeded by the mixing function above; two 32-bit outputs make one 53-bit number.
 */
export function createRandom(seed: number): Random {
  let s = mix(seed >>> 0);
  const next = () => {
    s = (s + GOLDEN) >>> 0;
    return mix(s);
  };
  let [a, b, c, d] = [next(), next(), next(), next() | 1];
  const word = () => {
    const r = Math.imul(b, 5);
    const out = Math.imul((r << 7) | (r >>> 25), 9) >>> 0;
    const t = b << 9;
    c ^= a;
    d ^= b;
    b ^= c;
    a ^= d;
    c ^= t;
    d = (d << 11) | (d >>> 21);
    return out;
  };
  return () => ((word() >>> 5) * 67108864 + (word() >>> 6)) / 9007199254740992;
}

/** One standard normal number (G. Box, M. Muller, Ann. Math. Stat. 29:610–611, 1958). */
export function drawNormal(random: Random): number {
  const u = 1 - random();
  return Math.sqrt(-2 * Math.log(u)) * Math.cos(2 * Math.PI * random());
}

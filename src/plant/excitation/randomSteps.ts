import type { Random } from '../../numerics/random.ts';

/**
 * Steps of random height: uniform on [−1, 1], each held `hold` samples.
 *
 * @param count samples, integer ≥ 0. @param hold integer ≥ 1.
 * @returns `count` values in [−1, 1].
 */
export function randomSteps(count: number, hold: number, random: Random): Float64Array {
  const values = new Float64Array(count);
  for (let k = 0; k < count; k += hold) values.fill(2 * random() - 1, k, k + hold);
  return values;
}

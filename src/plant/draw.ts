import type { Random } from '../numerics/random.ts';
import type { Channel } from './plant.ts';

/** One number a channel, uniform over its range stretched about its middle by `factor`. */
export function drawWithin(channels: readonly Channel[], factor: number, random: Random): Float64Array {
  return Float64Array.from(channels, ({ min, max }) => {
    const half = ((max - min) / 2) * factor;
    return (min + max) / 2 + half * (2 * random() - 1);
  });
}

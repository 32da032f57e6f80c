import type { LiftingContext, OutputTerm, PhysicsTerm } from '../../src/lift/lifting.ts';
import { createRandom } from '../../src/numerics/random.ts';

/** A context on nx coordinates `x1 …` with the given numbers of samples, even on [−1, 1]. */
export function contextOf(
  nx: number,
  options: {
    readonly rows?: number;
    readonly seed?: number;
    readonly physics?: readonly PhysicsTerm[];
    readonly outputs?: readonly OutputTerm[];
    readonly centre?: readonly number[];
    readonly half?: readonly number[];
    readonly samples?: Float64Array;
  } = {},
): LiftingContext {
  const { rows = 400, seed = 1, physics = [], outputs = [] } = options;
  const random = createRandom(seed);
  const centre = options.centre ?? new Array(nx).fill(0);
  const half = options.half ?? new Array(nx).fill(1);
  return {
    coordinates: centre.map((c, i) => ({
      name: `x${i + 1}`,
      unit: '1',
      min: c - half[i],
      max: c + half[i],
    })),
    samples: options.samples ?? Float64Array.from({ length: rows * nx }, () => 2 * random() - 1),
    nx,
    centre,
    half,
    physics,
    outputs,
    random,
  };
}

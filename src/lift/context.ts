import type { CoordinateSettings } from '../data/coordinates.ts';
import type { ChannelScaling, Dataset, Role } from '../data/dataset.ts';
import { scaleInto } from '../data/scaling.ts';
import type { Random } from '../numerics/random.ts';
import { nominalParameters, type Plant } from '../plant/plant.ts';
import type { EvaluationContext, LiftingContext } from './lifting.ts';

/** Samples on which a lifting is built, at most; evenly spread over the data. */
const MOST_SAMPLES = 20_000;

/**
 * What evaluating a lifting of this plant needs. With delay coordinates there is no state, hence neither physics functions
 * nor outputs to be computed from it: the outputs are coordinates.
 */
export function createEvaluationContext(
  plant: Plant,
  read: CoordinateSettings['read'],
  { centre, half }: ChannelScaling,
): EvaluationContext {
  const base = { nx: half.length, centre, half };
  if (read === 'delays') return { ...base, physics: [], outputs: [] };
  const p = nominalParameters(plant);
  return {
    ...base,
    physics: (plant.physics ?? []).map(({ name, of }) => ({ name, of: (x) => of(x, p) })),
    outputs: plant.outputs.flatMap(({ name, min, max, of }) =>
      typeof of === 'function' ? [{ name, min, max, of: (x: ArrayLike<number>) => of(x, p) }] : [],
    ),
  };
}

/**
 * What building a lifting needs: the above, and at most 20,000 scaled samples of the data of one role.
 * @param dataset its `x` are the coordinates that are lifted (see `toCoordinates`). @param scaling of these coordinates.
 */
export function createLiftingContext(options: {
  readonly dataset: Dataset;
  readonly plant: Plant;
  readonly read: CoordinateSettings['read'];
  readonly scaling: ChannelScaling;
  readonly random: Random;
  readonly role?: Role;
}): LiftingContext {
  const { dataset, plant, read, scaling, random, role = 'fit' } = options;
  return {
    ...createEvaluationContext(plant, read, scaling),
    coordinates: dataset.coordinates,
    samples: gatherSamples(dataset, scaling, role),
    random,
  };
}

function gatherSamples(dataset: Dataset, scaling: ChannelScaling, role: Role): Float64Array {
  const nx = dataset.coordinates.length;
  const trajectories = dataset.trajectories.filter((trajectory) => trajectory.role === role);
  const rows = trajectories.reduce((sum, { x }) => sum + x.length / nx, 0);
  const count = Math.min(rows, MOST_SAMPLES);
  const samples = new Float64Array(count * nx);
  let before = 0;
  let taken = 0;
  for (const { x } of trajectories) {
    const end = before + x.length / nx;
    for (; taken < count; taken++) {
      const row = Math.floor((taken * rows) / count);
      if (row >= end) break;
      scaleInto(samples, taken * nx, x, (row - before) * nx, scaling);
    }
    before = end;
  }
  return samples;
}

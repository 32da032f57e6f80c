import type { Channel, Plant } from '../plant/plant.ts';
import type { CoordinateSettings } from './coordinates.ts';
import type { ChannelScaling, Dataset, Role, Scaling } from './dataset.ts';

/** Maps each channel's declared range to [−1, 1]: `centre = (min + max)/2`, `half = (max − min)/2`. */
export function scalingFromRanges(channels: readonly Pick<Channel, 'min' | 'max'>[]): ChannelScaling {
  return {
    // Halved before they are added, so that no range overflows.
    centre: channels.map(({ min, max }) => min / 2 + max / 2),
    half: channels.map(({ min, max }) => max / 2 - min / 2),
  };
}

/** Maps what each coordinate visited in the data of one role to [−1, 1]; one that did not move keeps its declared range. */
export function scalingFromData(dataset: Dataset, role: Role = 'fit'): ChannelScaling {
  const nx = dataset.coordinates.length;
  const visited = dataset.coordinates.map((channel, i) => {
    let min = Number.POSITIVE_INFINITY;
    let max = Number.NEGATIVE_INFINITY;
    for (const { x, role: its } of dataset.trajectories) {
      if (its !== role) continue;
      for (let k = i; k < x.length; k += nx) {
        min = Math.min(min, x[k]);
        max = Math.max(max, x[k]);
      }
    }
    // Narrower than this the digits of the deviation are rounding.
    const moved = max / 2 - min / 2 > 1e-9 * Math.max(Math.abs(min), Math.abs(max));
    return moved ? { min, max } : channel;
  });
  return scalingFromRanges(visited);
}

/**
 * The scaling that a predictor carries: coordinates by their declared ranges or by the data, inputs by their limits. An
 * output that is a coordinate has that coordinate's scaling, so that a selection reads it out; one that is a function of the
 * state is scaled by its own declared range.
 *
 * @param dataset in the coordinates that are lifted (see `toCoordinates`).
 */
export function makeScaling(
  dataset: Dataset,
  plant: Pick<Plant, 'states' | 'outputs'>,
  read: CoordinateSettings['read'],
  from: 'ranges' | 'data' = 'ranges',
): Scaling {
  const x = from === 'data' ? scalingFromData(dataset) : scalingFromRanges(dataset.coordinates);
  const own = scalingFromRanges(plant.outputs);
  const at = plant.outputs.map(({ of }, i) => {
    // Delay coordinates begin with the present outputs.
    if (read === 'delays') return i;
    return typeof of === 'function' ? -1 : plant.states.findIndex((state) => state.name === of);
  });
  return {
    x,
    u: scalingFromRanges(dataset.inputs),
    y: {
      centre: at.map((index, i) => (index < 0 ? own.centre[i] : x.centre[index])),
      half: at.map((index, i) => (index < 0 ? own.half[i] : x.half[index])),
    },
  };
}

/** `out[at + i] = (values[from + i] − centre[i]) / half[i]`; `out` may be `values` when the places are the same. */
export function scaleInto(
  out: Float64Array,
  at: number,
  values: ArrayLike<number>,
  from: number,
  { centre, half }: ChannelScaling,
): void {
  for (let i = 0; i < half.length; i++) out[at + i] = (values[from + i] - centre[i]) / half[i];
}

/** `out[at + i] = centre[i] + half[i] · values[from + i]`; `out` may be `values` when the places are the same. */
export function unscaleInto(
  out: Float64Array,
  at: number,
  values: ArrayLike<number>,
  from: number,
  { centre, half }: ChannelScaling,
): void {
  for (let i = 0; i < half.length; i++) out[at + i] = centre[i] + half[i] * values[from + i];
}

/** Scaled from physical, a new vector. */
export function scale(values: ArrayLike<number>, scaling: ChannelScaling): Float64Array {
  const out = new Float64Array(scaling.half.length);
  scaleInto(out, 0, values, 0, scaling);
  return out;
}

/** Physical from scaled, a new vector. */
export function unscale(values: ArrayLike<number>, scaling: ChannelScaling): Float64Array {
  const out = new Float64Array(scaling.half.length);
  unscaleInto(out, 0, values, 0, scaling);
  return out;
}

import type { CoordinateSettings } from '../data/coordinates.ts';
import type { Plant } from '../plant/plant.ts';
import type { Lifting } from './lifting.ts';
import { output as outputFamily } from './output.ts';

/**
 * For each output of the plant the index in `z` that reads it, so that `C` is a selection: with delays the output's own
 * coordinate, with the state the state that it is, or the lifting function that was joined for it.
 */
export function readoutIndices(
  lifting: Lifting,
  plant: Pick<Plant, 'states' | 'outputs'>,
  read: CoordinateSettings['read'],
): number[] {
  // Delay coordinates begin with the present outputs.
  if (read === 'delays') return plant.outputs.map((_, i) => i);
  const joined = lifting.parts.find(({ family }) => family === outputFamily.name)?.constants;
  const functions = (joined?.functions ?? []) as readonly string[];
  const reads = (joined?.reads ?? []) as readonly number[];
  return plant.outputs.map(({ name, of }) => {
    const index =
      typeof of === 'function'
        ? (reads[functions.indexOf(name)] ?? -1)
        : plant.states.findIndex((state) => state.name === of);
    if (index < 0) throw new RangeError(`the lifting was not built with the output ${name}`);
    return index;
  });
}

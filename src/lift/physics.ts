import type { LiftingContext, LiftingFamily, PhysicsTerm } from './lifting.ts';
import { bindTerms, findTerms } from './physicalTerms.ts';
import { refuseLifting } from './unusableLifting.ts';

/** The functions that a plant offers from its physics, their values mapped affinely to [−1, 1] on the samples. */
export const physics: LiftingFamily = {
  name: 'physics',
  meaning: "The functions that the plant's file offers from its physics",
  settings: [],
  build: (_values, context) => {
    if (context.physics.length === 0) {
      refuseLifting(
        'family',
        'one that the plant and the coordinates can serve',
        'physics, of which there are no functions here',
        "list physics in the plant's file and read the state, or take another family",
      );
    }
    const maps = context.physics.map((term) => mapOfValues(rangeOnSamples(term, context)));
    const functions = context.physics.map(({ name }) => name);
    return {
      names: functions,
      constants: {
        functions,
        centre: maps.map(({ centre }) => centre),
        half: maps.map(({ half }) => half),
      },
    };
  },
  functions: ({ functions, centre, half }, context) => {
    const terms = findTerms(functions as readonly string[], context.physics).map(({ of }, i) => ({
      of,
      centre: (centre as readonly number[])[i],
      half: (half as readonly number[])[i],
    }));
    return bindTerms(terms, context);
  },
};

/** Variation relative to the size of a function that is only the rounding of its last digits. */
const ROUNDING = 1e-12;

/** The map of [min, max] to [−1, 1]; a function that does not vary is only brought to size 1, not to noise. */
function mapOfValues({ min, max }: { readonly min: number; readonly max: number }) {
  const size = Math.max(Math.abs(min), Math.abs(max));
  if (!(max / 2 - min / 2 > ROUNDING * size)) return { centre: 0, half: size > 0 ? size : 1 };
  return { centre: min / 2 + max / 2, half: max / 2 - min / 2 };
}

function rangeOnSamples(
  { name, of }: PhysicsTerm,
  { nx, samples, centre, half, coordinates }: LiftingContext,
) {
  const x = new Float64Array(nx);
  let min = Number.POSITIVE_INFINITY;
  let max = Number.NEGATIVE_INFINITY;
  for (let row = 0; row < samples.length; row += nx) {
    for (let j = 0; j < nx; j++) x[j] = centre[j] + half[j] * samples[row + j];
    const value = of(x);
    if (!Number.isFinite(value)) {
      const at = coordinates.map(
        (channel, j) => `${channel.name} ${Number(x[j].toPrecision(4))} ${channel.unit}`,
      );
      const wayOut = "mend the function in the plant's file, or keep the data inside its domain";
      refuseLifting(name, 'finite on all data', `${value} at ${at.join(', ')}`, wayOut);
    }
    min = Math.min(min, value);
    max = Math.max(max, value);
  }
  return { min, max };
}

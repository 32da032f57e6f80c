import type { Random } from '../numerics/random.ts';
import { drawWithin } from './draw.ts';
import { integrateSample } from './integrate.ts';
import { nominalParameters, type Plant } from './plant.ts';

/** Error of one sample, relative to the state ranges, that is small beside any sensor and any predictor. */
export const SUBSTEP_TOLERANCE = 1e-6;
/** No sample takes more sub-steps than this; a plant that wants more gets the error reached reported. */
export const SUBSTEP_CAP = 128;
/** States and inputs at which the count is checked. */
const DRAWS = 100;

/** RK4 sub-steps in one sample. */
export interface SubstepChoice {
  readonly count: number;
  /** Largest change of any state that halving the sub-steps makes, relative to its range; Infinity if one diverged. */
  readonly error: number;
}

/**
 * The number of RK4 sub-steps in one sample, checked by halving: the smallest power of two `n` for which `n` and `2n`
 * sub-steps agree, from 100 states and inputs drawn over their ranges, to `SUBSTEP_TOLERANCE` of the state ranges.
 *
 * A stiff or non-smooth plant may not come so far: the count then stops at `SUBSTEP_CAP` and `error` says what was
 * reached. Starts from which even twice the cap diverges are a property of the plant and are left out; if all are of that
 * kind, `error` is Infinity.
 */
export function chooseSubsteps(plant: Plant, sampleTime: number, random: Random): SubstepChoice {
  const p = nominalParameters(plant);
  const nx = plant.states.length;
  const endOf = ({ x, u }: Start, substeps: number) => {
    const end = new Float64Array(nx);
    return integrateSample(plant, p, x, u, sampleTime, substeps, end) === 'finished' ? end : null;
  };
  const starts = Array.from({ length: DRAWS }, () => ({
    x: drawWithin(plant.states, 1, random),
    u: drawWithin(plant.inputs, 1, random),
  })).filter((start) => endOf(start, 2 * SUBSTEP_CAP));
  if (starts.length === 0) return { count: SUBSTEP_CAP, error: Number.POSITIVE_INFINITY };

  let coarse = starts.map((start) => endOf(start, 1));
  for (let count = 1; ; count *= 2) {
    const fine = starts.map((start) => endOf(start, 2 * count));
    const error = largestDifference(plant, coarse, fine);
    if (error <= SUBSTEP_TOLERANCE || count >= SUBSTEP_CAP) return { count, error };
    coarse = fine;
  }
}

interface Start {
  readonly x: Float64Array;
  readonly u: Float64Array;
}

type Ends = readonly (Float64Array | null)[];

/** The largest difference of any state relative to its range; Infinity when one of the ends diverged. */
function largestDifference(plant: Plant, coarse: Ends, fine: Ends): number {
  let worst = 0;
  for (const [k, a] of coarse.entries()) {
    const b = fine[k];
    if (!a || !b) return Number.POSITIVE_INFINITY;
    for (const [i, state] of plant.states.entries()) {
      worst = Math.max(worst, Math.abs(a[i] - b[i]) / (state.max - state.min));
    }
  }
  return worst;
}

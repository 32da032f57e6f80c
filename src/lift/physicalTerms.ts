import type { EvaluationContext, FamilyFunctions, PhysicsTerm } from './lifting.ts';
import { refuseLifting } from './unusableLifting.ts';

/** A function of the physical state with the map of its value: `psi = (of(centre_x + half_x · x) − centre) / half`. */
export interface ScaledTerm {
  readonly of: PhysicsTerm['of'];
  readonly centre: number;
  readonly half: number;
}

/** Step of the central difference in scaled coordinates: ε^{1/3} balances its error h² against rounding ε/h. */
const STEP = Math.cbrt(Number.EPSILON);

/** Functions of the physical state as functions of the scaled one; their gradients are central differences. */
export function bindTerms(
  terms: readonly ScaledTerm[],
  { nx, centre, half }: Pick<EvaluationContext, 'nx' | 'centre' | 'half'>,
): FamilyFunctions {
  const physical = new Float64Array(nx);
  const toPhysical = (x: ArrayLike<number>) => {
    for (let j = 0; j < nx; j++) physical[j] = centre[j] + half[j] * x[j];
  };
  return {
    count: terms.length,
    evaluateInto: (out, offset, x) => {
      toPhysical(x);
      for (let i = 0; i < terms.length; i++) {
        out[offset + i] = (terms[i].of(physical) - terms[i].centre) / terms[i].half;
      }
    },
    gradientInto: (out, offset, x) => {
      toPhysical(x);
      for (let j = 0; j < nx; j++) {
        const at = physical[j];
        const above = at + half[j] * STEP;
        const below = at - half[j] * STEP;
        for (let i = 0; i < terms.length; i++) {
          const { of, half: size } = terms[i];
          physical[j] = above;
          const high = of(physical);
          physical[j] = below;
          // Divided by the step that rounding has left, in units of the half range.
          out[(offset + i) * nx + j] = (high - of(physical)) / size / ((above - below) / half[j]);
        }
        physical[j] = at;
      }
    },
  };
}

/**
 * The functions of these names.
 * @throws UnusableLiftingError when one is not among those offered.
 */
export function findTerms<T extends PhysicsTerm>(
  names: readonly string[],
  offered: readonly T[],
): readonly T[] {
  return names.map((name) => {
    const term = offered.find((other) => other.name === name);
    if (term) return term;
    const list = offered.map((other) => other.name).join(', ') || 'none';
    return refuseLifting(
      name,
      'a function that the plant still offers',
      list,
      "fit again with the plant's present file",
    );
  });
}

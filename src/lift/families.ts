import { chebyshev } from './chebyshev.ts';
import { constant } from './constant.ts';
import { gaussian } from './gaussian.ts';
import { hermite } from './hermite.ts';
import { legendre } from './legendre.ts';
import type { LiftingFamily } from './lifting.ts';
import { monomials } from './monomials.ts';
import { output } from './output.ts';
import { physics } from './physics.ts';
import { randomFourier } from './randomFourier.ts';
import { state } from './state.ts';
import { thinPlate } from './thinPlate.ts';

/** The families that a study may name. */
export const FAMILIES: Readonly<Record<string, LiftingFamily>> = byName([
  state,
  monomials,
  hermite,
  legendre,
  chebyshev,
  thinPlate,
  gaussian,
  randomFourier,
  physics,
]);

/** All families that occur in a lifting: also those that only the join adds. */
const ALL_FAMILIES = { ...FAMILIES, ...byName([constant, output]) };

/** The family of a part of a lifting; undefined when there is none of that name. */
export function familyOf(name: string): LiftingFamily | undefined {
  return Object.hasOwn(ALL_FAMILIES, name) ? ALL_FAMILIES[name] : undefined;
}

function byName(families: readonly LiftingFamily[]): Readonly<Record<string, LiftingFamily>> {
  return Object.fromEntries(families.map((family) => [family.name, family]));
}

import { CENTRE_SETTINGS, placeCentres } from './centres.ts';
import type { FamilyFunctions, FamilySetting, LiftingFamily, LiftingPart } from './lifting.ts';

/** A function of the squared distance `s = r²` to a centre, and its derivative `dphi/ds`; `s · dphi/ds → 0` as `s → 0`. */
export interface RadialProfile {
  readonly value: (s: number) => number;
  readonly slope: (s: number) => number;
}

/** A family `psi_i(x) = phi(‖x − c_i‖²)`. */
export interface RadialFamily {
  readonly name: string;
  readonly meaning: string;
  readonly source?: string;
  /** Settings besides the centres'; their values are kept as constants of the part. */
  readonly settings: readonly FamilySetting[];
  readonly profile: (constants: LiftingPart['constants']) => RadialProfile;
}

/** The lifting family of a radial function about centres in scaled coordinates. */
export function createRadialFamily(family: RadialFamily): LiftingFamily {
  return {
    name: family.name,
    meaning: family.meaning,
    source: family.source,
    settings: [...CENTRE_SETTINGS, ...family.settings],
    build: (values, context) => {
      const centres = placeCentres(values, context);
      const own = Object.fromEntries(family.settings.map(({ key }) => [key, values[key]]));
      return {
        names: centres.map((_, i) => `${family.name}-${i + 1}`),
        constants: { centres, ...own },
      };
    },
    functions: (constants, { nx }) =>
      bindRadial(constants.centres as readonly (readonly number[])[], nx, family.profile(constants)),
  };
}

function bindRadial(
  centres: readonly (readonly number[])[],
  nx: number,
  { value, slope }: RadialProfile,
): FamilyFunctions {
  const flat = Float64Array.from(centres.flat());
  const squaredDistance = (i: number, x: ArrayLike<number>) => {
    let s = 0;
    for (let j = 0; j < nx; j++) {
      const difference = x[j] - flat[i * nx + j];
      s += difference * difference;
    }
    return s;
  };
  return {
    count: centres.length,
    evaluateInto: (out, offset, x) => {
      for (let i = 0; i < centres.length; i++) out[offset + i] = value(squaredDistance(i, x));
    },
    // ∂psi/∂x_j = 2 (x_j − c_j) dphi/ds, whose limit at the centre is 0.
    gradientInto: (out, offset, x) => {
      for (let i = 0; i < centres.length; i++) {
        const s = squaredDistance(i, x);
        const factor = s === 0 ? 0 : 2 * slope(s);
        for (let j = 0; j < nx; j++) out[(offset + i) * nx + j] = factor * (x[j] - flat[i * nx + j]);
      }
    },
  };
}

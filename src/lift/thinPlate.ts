import { createRadialFamily } from './radial.ts';

/** Thin-plate functions `r² log r`, 0 at the centre: `phi(s) = ½ s log s`, `dphi/ds = ½ (log s + 1)`. */
export const thinPlate = createRadialFamily({
  name: 'thin-plate',
  meaning: 'Thin-plate functions r^2 log r about centres; no width to choose',
  source:
    'J. Duchon, Splines minimizing rotation-invariant semi-norms in Sobolev spaces, LNM 571:85–100, 1977',
  settings: [],
  profile: () => ({
    value: (s) => (s === 0 ? 0 : 0.5 * s * Math.log(s)),
    slope: (s) => 0.5 * (Math.log(s) + 1),
  }),
});

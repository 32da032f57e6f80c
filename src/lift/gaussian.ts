import { createRadialFamily } from './radial.ts';

/** Gaussian functions `exp(−r² / (2 w²))` of width `w`: `dphi/ds = −phi / (2 w²)`. */
export const gaussian = createRadialFamily({
  name: 'gaussian',
  meaning: 'Gaussian functions exp(-r^2 / (2 width^2)) about centres; ill conditioned when wide',
  settings: [
    {
      key: 'width',
      kind: 'number',
      min: 0.01,
      max: 100,
      default: 0.5,
      meaning: 'Width as a share of the half range of the coordinates',
    },
  ],
  profile: ({ width }) => {
    const rate = 1 / (2 * (width as number) ** 2);
    return { value: (s) => Math.exp(-rate * s), slope: (s) => -rate * Math.exp(-rate * s) };
  },
});

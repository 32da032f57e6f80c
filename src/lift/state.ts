import type { LiftingFamily } from './lifting.ts';

/** `psi(x) = x`: always the first part of a lifting, whether it is asked for or not. */
export const state: LiftingFamily = {
  name: 'state',
  meaning: 'The coordinates alone; they are in every lifting, so that alone this means no lifting at all',
  settings: [],
  build: (_values, { coordinates }) => ({ names: coordinates.map(({ name }) => name), constants: {} }),
  functions: (_constants, { nx }) => ({
    count: nx,
    evaluateInto: (out, offset, x) => {
      for (let i = 0; i < nx; i++) out[offset + i] = x[i];
    },
    gradientInto: (out, offset) => {
      const start = offset * nx;
      out.fill(0, start, start + nx * nx);
      for (let i = 0; i < nx; i++) out[start + i * nx + i] = 1;
    },
  }),
};

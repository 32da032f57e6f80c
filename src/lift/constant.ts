import type { LiftingFamily } from './lifting.ts';

/** `psi(x) = 1`: asked for by `LiftingSettings.constant`, never as a part. */
export const constant: LiftingFamily = {
  name: 'constant',
  meaning: 'The constant function 1',
  settings: [],
  build: () => ({ names: ['1'], constants: {} }),
  functions: (_constants, { nx }) => ({
    count: 1,
    evaluateInto: (out, offset) => {
      out[offset] = 1;
    },
    gradientInto: (out, offset) => {
      out.fill(0, offset * nx, (offset + 1) * nx);
    },
  }),
};

import { drawNormal } from '../numerics/random.ts';
import type { LiftingFamily } from './lifting.ts';
import { MOST_FUNCTIONS } from './limits.ts';

/**
 * Random Fourier features `cos(ω_i·x + b_i)`, `ω_i ~ N(0, I/ℓ²)`, `b_i ~ U[0, 2π)`: `(2/D) Σ_i psi_i(x) psi_i(y)` tends to the
 * Gaussian kernel `exp(−‖x − y‖² / (2 ℓ²))` as their number D grows. The factor √(2/D) of the source is left out: regressed
 * columns are better of size 1.
 */
export const randomFourier: LiftingFamily = {
  name: 'random-fourier',
  meaning: 'Random Fourier features cos(w.x + b) of the Gaussian kernel',
  source: 'A. Rahimi, B. Recht, Random features for large-scale kernel machines, NIPS 20, 2007',
  settings: [
    {
      key: 'features',
      kind: 'integer',
      min: 1,
      max: MOST_FUNCTIONS,
      default: 60,
      meaning: 'Number of features',
    },
    {
      key: 'lengthScale',
      kind: 'number',
      min: 0.01,
      max: 100,
      default: 1,
      meaning: 'Length over which the functions vary, as a share of the half range of the coordinates',
    },
  ],
  build: ({ features, lengthScale }, { nx, random }) => {
    const indices = Array.from({ length: features as number }, (_, i) => i);
    const frequencies = indices.map(() =>
      Array.from({ length: nx }, () => drawNormal(random) / (lengthScale as number)),
    );
    const phases = indices.map(() => 2 * Math.PI * random());
    return { names: indices.map((i) => `random-fourier-${i + 1}`), constants: { frequencies, phases } };
  },
  functions: ({ frequencies, phases }, { nx }) => {
    const omega = Float64Array.from((frequencies as readonly (readonly number[])[]).flat());
    const b = Float64Array.from(phases as readonly number[]);
    const angle = (i: number, x: ArrayLike<number>) => {
      let sum = b[i];
      for (let j = 0; j < nx; j++) sum += omega[i * nx + j] * x[j];
      return sum;
    };
    return {
      count: b.length,
      evaluateInto: (out, offset, x) => {
        for (let i = 0; i < b.length; i++) out[offset + i] = Math.cos(angle(i, x));
      },
      gradientInto: (out, offset, x) => {
        for (let i = 0; i < b.length; i++) {
          const slope = -Math.sin(angle(i, x));
          for (let j = 0; j < nx; j++) out[(offset + i) * nx + j] = slope * omega[i * nx + j];
        }
      },
    };
  },
};

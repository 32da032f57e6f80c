import { describe, expect, it } from 'vitest';
import type { Dataset, Trajectory } from '../../src/data/dataset.ts';
import { bindLifting } from '../../src/lift/bind.ts';
import { createEvaluationContext, createLiftingContext } from '../../src/lift/context.ts';
import { buildLifting } from '../../src/lift/join.ts';
import type { FamilyValues } from '../../src/lift/lifting.ts';
import { createRandom, drawNormal } from '../../src/numerics/random.ts';
import { definePlant } from '../../src/plant/plant.ts';
import { fitPredictor } from '../../src/predictor/fit.ts';
import { computeSpectrum } from '../../src/predictor/spectrum.ts';

/*
 * M. O. Williams, I. G. Kevrekidis, C. W. Rowley, "A data-driven approximation of the Koopman operator: extending dynamic mode
 * decomposition", J. Nonlinear Sci. 25:1307–1346 (2015): from memory, recomputed. x⁺ = J x, J = [0.9 −0.04; 0 0.8],
 * x ~ N(0, I): polynomials of total degree ≤ 4 span an invariant space, in which the eigenvalues are 0.9^i 0.8^j, i + j ≤ 4.
 * With order ≤ 4 along each axis they do not.
 */
const EIGENVALUES = [0, 1, 2, 3, 4]
  .flatMap((i) => [0, 1, 2, 3, 4].flatMap((j) => (i + j <= 4 ? [0.9 ** i * 0.8 ** j] : [])))
  .sort((a, b) => b - a);

const plant = definePlant({
  name: 'linear map',
  description: 'The map of the source.',
  states: ['x', 'y'].map((name) => ({ name, unit: '1', min: -1, max: 1 })),
  inputs: [],
  outputs: [],
  parameters: {},
  derivative: () => [0, 0],
  operatingPoint: { x: [0, 0], u: [] },
  hazards: ['none: it is a map'],
});
const random = createRandom(7);
const pairs = Array.from({ length: 2000 }, (): Trajectory => {
  const [x, y] = [drawNormal(random), drawNormal(random)];
  return {
    role: 'fit',
    steps: 1,
    x: Float64Array.of(x, y, 0.9 * x - 0.04 * y, 0.8 * y),
    u: new Float64Array(0),
  };
});
const dataset: Dataset = {
  sampleTime: 1,
  coordinates: plant.states,
  inputs: [],
  trajectories: pairs,
  cuts: { diverged: 0, leftRange: 0 },
};
const none = { centre: [], half: [] };
const scaling = { x: { centre: [0, 0], half: [1, 1] }, u: none, y: none };

function spectrumOf(family: string, values: FamilyValues) {
  const context = createLiftingContext({ dataset, plant, read: 'state', scaling: scaling.x, random });
  const lifting = buildLifting({ constant: true, parts: [{ family, values }] }, context);
  const predictor = fitPredictor({
    dataset,
    lifting,
    bound: bindLifting(lifting, createEvaluationContext(plant, 'state', scaling.x)),
    scaling,
    outputs: [],
    readout: [],
    settings: { form: 'linear', route: 'orthogonal', ridge: 0 },
    horizon: 1,
  });
  const { real, imaginary } = computeSpectrum(predictor);
  return {
    real: Array.from(real).sort((a, b) => b - a),
    imaginary,
    worst: Math.max(...predictor.fit.residuals),
  };
}

describe('polynomials of a linear map', () => {
  for (const family of ['monomials', 'hermite', 'legendre', 'chebyshev']) {
    it(`${family} of total degree ≤ 4 have the published 15 eigenvalues to 1e-10`, () => {
      const { real, imaginary } = spectrumOf(family, { degree: 4 });
      expect(real).toHaveLength(15);
      real.forEach((value, i) => {
        expect(Math.abs(value - EIGENVALUES[i])).toBeLessThan(1e-10);
      });
      expect(Math.max(...imaginary.map(Math.abs))).toBeLessThan(1e-10);
    });
  }

  for (const family of ['hermite', 'legendre', 'chebyshev']) {
    it(`${family} of order ≤ 4 along each axis are 25 and not invariant: a residual shows it`, () => {
      const { real, worst } = spectrumOf(family, { degree: 4, degreeCounts: 'per-axis' });
      expect(real).toHaveLength(25);
      expect(worst).toBeGreaterThan(1e-3);
    });
  }
});

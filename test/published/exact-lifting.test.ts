import { describe, expect, it } from 'vitest';
import { createRandom } from '../../src/numerics/random.ts';
import { fitPredictor } from '../../src/predictor/fit.ts';
import { linearisePredictor } from '../../src/predictor/rivals.ts';
import {
  channels,
  datasetOf,
  largestDifference,
  liftBy,
  trajectoryOf,
  unitScaling,
} from '../predictor/synthetic.ts';

/*
 * S. L. Brunton, B. W. Brunton, J. L. Proctor, J. N. Kutz, "Koopman invariant subspaces and finite linear
 * representations of nonlinear dynamical systems for control", PLoS ONE 11:e0150171 (2016): read.
 * x1' = mu x1, x2' = lambda (x2 − x1²) + u; lift (x1, x2, x1²). The discrete matrices at Ts = 0.1: closed form,
 * recomputed: e^{mu Ts}; e^{lambda Ts}, lambda (e^{2 mu Ts} − e^{lambda Ts}) / (lambda − 2 mu); e^{2 mu Ts};
 * (e^{lambda Ts} − 1) / lambda.
 */
const [mu, lambda, Ts] = [-0.1, 1, 0.1];
const A = [
  [0.990049833749168, 0, 0],
  [0, 1.1051709180756477, -0.10414353730741038],
  [0, 0, 0.9801986733067553],
];
const B = [[0], [0.10517091807564771], [0]];

/** The exact flow over Ts with the input held: closed form. */
function flow([x1, x2]: readonly number[], u: number): number[] {
  const [e1, e2] = [Math.exp(2 * mu * Ts), Math.exp(lambda * Ts)];
  const forced = (x1 ** 2 * lambda * (e1 - e2)) / (lambda - 2 * mu);
  return [x1 * Math.exp(mu * Ts), x2 * e2 + forced + ((e2 - 1) / lambda) * u];
}

function pairs(count: number, seed: number) {
  const random = createRandom(seed);
  const draw = () => 4 * random() - 2;
  return datasetOf(
    Array.from({ length: count }, () => {
      const x = [draw(), draw()];
      const u = draw();
      return trajectoryOf([x, flow(x, u)], [[u]]);
    }),
    2,
    1,
    Ts,
  );
}

const request = {
  scaling: unitScaling(2, 1),
  outputs: channels('y', 1),
  readout: [1],
  horizon: 1,
};

describe('an exact finite lifting', () => {
  for (const route of ['gram', 'orthogonal', 'auto'] as const) {
    it(`gives the published A and B to 1e-12 from any 60 random pairs, by the ${route} route`, () => {
      for (const seed of [1, 2, 3]) {
        const lifted = liftBy(2, { 'x1²': (x) => x[0] ** 2 });
        const settings = { form: 'linear', route, ridge: 0 } as const;
        const predictor = fitPredictor({ ...request, ...lifted, dataset: pairs(60, seed), settings });
        expect(largestDifference(predictor.A.data, A.flat())).toBeLessThan(1e-12);
        expect(largestDifference(predictor.B.data, B.flat())).toBeLessThan(1e-12);
        expect(predictor.fit.rank).toBe(4);
        expect(predictor.fit.dependent).toEqual([]);
        // The Gram route resolves a relative residual to 1e-7, the orthogonal one to rounding.
        const resolved = predictor.fit.route === 'gram' ? 1e-7 : 1e-14;
        expect(Math.max(...predictor.fit.residuals)).toBeLessThan(resolved);
      }
    });
  }

  it('shows a residual of order 0.1 when the square is left out', () => {
    const lifted = liftBy(2, { constant: () => 1 });
    const settings = { form: 'linear', route: 'auto', ridge: 0 } as const;
    const { fit, lifting } = fitPredictor({ ...request, ...lifted, dataset: pairs(60, 1), settings });
    const [x1, x2] = fit.residuals;
    expect(lifting.names.slice(0, 2)).toEqual(['x1', 'x2']);
    expect(x1).toBeLessThan(1e-7);
    expect(x2).toBeGreaterThan(0.03);
    expect(x2).toBeLessThan(0.3);
  });

  it('linearises at the origin to diag(e^{mu Ts}, e^{lambda Ts}) (closed form)', () => {
    const predictor = linearisePredictor({
      plant: {
        name: 'saddle',
        description: '',
        states: channels('x', 2),
        inputs: channels('u', 1),
        outputs: [],
        parameters: {},
        derivative: (x, u) => [mu * x[0], lambda * (x[1] - x[0] ** 2) + u[0]],
        operatingPoint: { x: [0, 0], u: [0] },
        hazards: [],
      },
      operatingPoint: { x: [0, 0], u: [0] },
      sampleTime: Ts,
      scaling: unitScaling(2, 1),
      outputs: channels('y', 1),
      readout: [1],
    });
    // Central differences: ε^{2/3} of the second derivative.
    const expected = [A[0][0], 0, 0, 0, A[1][1], 0, 0, 0, 1];
    expect(largestDifference(predictor.A.data, expected)).toBeLessThan(1e-10);
    expect(largestDifference(predictor.B.data, [0, B[1][0], 0])).toBeLessThan(1e-10);
  });
});

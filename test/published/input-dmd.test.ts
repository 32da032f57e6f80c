import { describe, expect, it } from 'vitest';
import { singularValues } from '../../src/numerics/eigen.ts';
import { fromRows } from '../../src/numerics/matrix.ts';
import { fitPredictor } from '../../src/predictor/fit.ts';
import {
  channels,
  datasetOf,
  largestDifference,
  liftBy,
  trajectoryOf,
  unitScaling,
} from '../predictor/synthetic.ts';

/*
 * J. L. Proctor, S. L. Brunton, J. N. Kutz, "Dynamic mode decomposition with control", SIAM J. Appl. Dyn. Syst.
 * 15:142–161 (2016): quoted, recomputed. A = [1.5 0; 0 0.1], B = [1; 0], u = −x1.
 */
const X = [
  [4, 7],
  [2, 0.7],
  [1, 0.07],
  [0.5, 0.007],
  [0.25, 0.0007],
];
const U = X.slice(0, -1).map(([x1]) => [-x1]);

const regress = (
  dataset: Parameters<typeof fitPredictor>[0]['dataset'],
  route: 'gram' | 'orthogonal' | 'auto',
) =>
  fitPredictor({
    ...liftBy(2, {}),
    dataset,
    scaling: unitScaling(2, dataset.inputs.length),
    outputs: channels('y', 1),
    readout: [0],
    settings: { form: 'linear', route, ridge: 0 },
    horizon: 1,
  });

describe('data under exact feedback', () => {
  it('has the singular values 9.371541, 2.041856, 0 (recomputed)', () => {
    const regressor = fromRows(U.map(([u], k) => [...X[k], u]));
    const [first, second, third] = singularValues(regressor);
    expect(Math.abs(first - 9.371541)).toBeLessThan(5e-7);
    expect(Math.abs(second - 2.041856)).toBeLessThan(5e-7);
    expect(third).toBeLessThan(1e-15 * first);
  });

  for (const route of ['gram', 'orthogonal', 'auto'] as const) {
    it(`has a regressor of rank 2 of 3, and the input is named, by the ${route} route`, () => {
      const { fit: summary, A, B } = regress(datasetOf([trajectoryOf(X, U)], 2, 1), route);
      expect(summary.rank).toBe(2);
      expect(summary.regressors).toBe(3);
      expect(summary.dependent).toEqual(['u1']);
      expect(summary.condition).toBeGreaterThan(1e7);
      // What is solved is the least-norm solution, which still satisfies the data: a11 − b1 = 0.5.
      expect(Math.abs(A.data[0] - B.data[0] - 0.5)).toBeLessThan(1e-7);
    });
  }

  it('takes the orthogonal route where the route is left open', () => {
    expect(regress(datasetOf([trajectoryOf(X, U)], 2, 1), 'auto').fit.route).toBe('orthogonal');
  });

  it('gives A to 1e-12 when B is known and its effect is taken off', () => {
    const pairs = U.map(([u], k) => trajectoryOf([X[k], [X[k + 1][0] - u, X[k + 1][1]]], [[]]));
    const { A, B, fit: summary } = regress(datasetOf(pairs, 2, 0), 'orthogonal');
    expect(largestDifference(A.data, [1.5, 0, 0, 0.1])).toBeLessThan(1e-12);
    expect(B.data.length).toBe(0);
    expect(summary.dependent).toEqual([]);
  });

  it('gives the wrong plant [0.5 0; 0 0.1] when the input is left out, as printed', () => {
    const { A } = regress(
      datasetOf(
        [
          trajectoryOf(
            X,
            U.map(() => []),
          ),
        ],
        2,
        0,
      ),
      'orthogonal',
    );
    expect(largestDifference(A.data, [0.5, 0, 0, 0.1])).toBeLessThan(1e-12);
  });
});

import { describe, expect, it } from 'vitest';
import type { BoundLifting } from '../../src/lift/lifting.ts';
import { createDelayRoll } from '../../src/mpc/delay.ts';
import { fromRows, identity } from '../../src/numerics/matrix.ts';
import { linearPredictor } from './linearProblem.ts';

/*
 * S. L. Brunton, B. W. Brunton, J. L. Proctor, J. N. Kutz, "Koopman invariant subspaces and finite linear representations of
 * nonlinear dynamical systems for control", PLoS ONE 11:e0150171 (2016): x1' = mu x1, x2' = lambda (x2 − x1²) + u, lifted by (x1, x2, x1²): read.
 * The discrete matrices and the exact flow over Ts: closed form.
 */
const [mu, lambda, Ts] = [-0.1, 1, 0.1];
const [slow, square, fast] = [Math.exp(mu * Ts), Math.exp(2 * mu * Ts), Math.exp(lambda * Ts)];
const coupling = (lambda * (square - fast)) / (lambda - 2 * mu);
const B = fromRows([[0], [(fast - 1) / lambda], [0]]);
const predictorWith = (lastRow: number[]) =>
  linearPredictor(fromRows([[slow, 0, 0], [0, fast, coupling], lastRow]), B, identity(3), Ts);
const flow = ([x1, x2]: readonly number[], u: number) => [
  x1 * slow,
  x2 * fast + coupling * x1 ** 2 + ((fast - 1) / lambda) * u,
];

const bound: BoundLifting = {
  nx: 2,
  nz: 3,
  liftInto: (z, x) => z.set([x[0], x[1], x[0] ** 2]),
  jacobianInto: () => {},
};
const inputs = [0.3, -0.7, 1].map((u) => Float64Array.of(u));

describe('the roll through inputs under way', () => {
  it('is the lift of the exact flow, where the lifting is exact, closed form', () => {
    const z = Float64Array.of(1.5, -0.5, 2.25);
    createDelayRoll(predictorWith([0, 0, square]), bound)(z, inputs, new Float64Array(3));
    const [x1, x2] = inputs.reduce<number[]>((x, u) => flow(x, u[0]), [1.5, -0.5]);
    [x1, x2, x1 ** 2].forEach((value, i) => {
      expect(z[i]).toBeCloseTo(value, 12);
    });
  });

  it('ends on the image of the lifting although the predictor leaves it: the square of the state, whatever its own row says', () => {
    const z = Float64Array.of(1.5, -0.5, 2.25);
    createDelayRoll(predictorWith([0.3, 0.2, 0.5]), bound)(z, inputs, Float64Array.of(0.01, 0, 0.4));
    expect(z[2]).toBe(z[0] ** 2);
    // x1 has no input: three steps of x1 ← slow x1 + 0.01.
    expect(z[0]).toBeCloseTo(1.5 * slow ** 3 + 0.01 * (1 + slow + slow ** 2), 14);
  });

  it('changes nothing at rest, where d is the whole one-step residual of the lifted state', () => {
    const predictor = predictorWith([0.3, 0.2, 0.5]);
    const rest = [0.8, 0.4, 0.64];
    const u = Float64Array.of(0.2);
    const d = Float64Array.from(rest, (value, i) => {
      const row = Array.from(predictor.A.data.subarray(3 * i, 3 * i + 3));
      return value - row.reduce((sum, a, j) => sum + a * rest[j], 0) - B.data[i] * u[0];
    });
    const z = Float64Array.from(rest);
    createDelayRoll(predictor, bound)(z, [u, u, u], d);
    rest.forEach((value, i) => {
      expect(z[i]).toBeCloseTo(value, 14);
    });
  });

  it('keeps the linear prediction where the lift is not finite, and z as it is without delay', () => {
    const lost: BoundLifting = { ...bound, liftInto: (z, x) => z.set([x[0], x[1], Number.NaN]) };
    const roll = createDelayRoll(predictorWith([0, 0, square]), lost);
    const z = Float64Array.of(1, 0, 1);
    roll(z, [Float64Array.of(0)], new Float64Array(3));
    expect(Array.from(z)).toEqual([slow, coupling, square]);
    roll(z, [], Float64Array.of(9, 9, 9));
    expect(Array.from(z)).toEqual([slow, coupling, square]);
  });
});

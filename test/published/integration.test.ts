import { describe, expect, it } from 'vitest';
import { createRk4Work, type RightSide, rk4Step } from '../../src/numerics/rk4.ts';

function integrate(f: RightSide, start: readonly number[], time: number, steps: number): Float64Array {
  const x = Float64Array.from(start);
  const work = createRk4Work(x.length);
  for (let k = 0; k < steps; k++) rk4Step(f, x, time / steps, work);
  return x;
}

const distance = (a: ArrayLike<number>, b: ArrayLike<number>) =>
  Math.hypot(...Array.from(a, (value, i) => value - b[i]));

const vanDerPol: RightSide = ([y1, y2]) => [y2, (1 - y1 * y1) * y2 - y1];
const pendulum: RightSide = ([angle, speed]) => [speed, -Math.sin(angle)];

/** The restricted three-body problem in the rotating frame, as printed there. */
const arenstorf: RightSide = ([y1, y2, v1, v2]) => {
  const mu = 0.012277471;
  const rest = 1 - mu;
  const d1 = ((y1 + mu) ** 2 + y2 ** 2) ** 1.5;
  const d2 = ((y1 - rest) ** 2 + y2 ** 2) ** 1.5;
  return [
    v1,
    v2,
    y1 + 2 * v2 - (rest * (y1 + mu)) / d1 - (mu * (y1 - rest)) / d2,
    y2 - 2 * v1 - (rest * y2) / d1 - (mu * y2) / d2,
  ];
};

describe('Runge–Kutta steps against published and recomputed orbits', () => {
  // E. Hairer, S. Nørsett, G. Wanner, Solving Ordinary Differential Equations I, section II.0 [read; recomputed to 25
  // digits]: mu, the initial values and the period.
  it('close the Arenstorf orbit after its published period', () => {
    const start = [0.994, 0, 0, -2.001585106379082];
    const end = integrate(arenstorf, start, 17.065216560157964, 400_000);
    expect(distance(end, start)).toBeLessThan(1e-5);
  });

  // Recomputed to 24 digits: from (2, 0), y(10); period and amplitude of the limit cycle.
  it('meet van der Pol’s oscillator at t = 10, recomputed in high precision', () => {
    const end = integrate(vanDerPol, [2, 0], 10, 20_000);
    expect(distance(end, [-2.008340782579712, 0.03290706586332406])).toBeLessThan(1e-11);
  });

  it('return to the amplitude of van der Pol’s limit cycle after its period, recomputed in high precision', () => {
    const start = [2.008619860874843, 0];
    const end = integrate(vanDerPol, start, 6.66328685932313, 20_000);
    expect(distance(end, start)).toBeLessThan(1e-11);
  });

  // Recomputed to 25 digits: θ'' = −sin θ from 1 rad at rest.
  const PENDULUM = [-0.9989498146238507, -0.04203337753421229];
  it('meet the pendulum at t = 10, recomputed in high precision', () => {
    expect(distance(integrate(pendulum, [1, 0], 10, 20_000), PENDULUM)).toBeLessThan(1e-11);
  });

  // Closed form: the method is of fourth order.
  it.each([
    ['the pendulum', pendulum, [1, 0], PENDULUM],
    ['van der Pol’s oscillator', vanDerPol, [2, 0], [-2.008340782579712, 0.03290706586332406]],
  ] as const)('halving the step divides the error by 16 ± 2 on %s', (_, f, start, exact) => {
    for (const steps of [800, 1600]) {
      const ratio =
        distance(integrate(f, start, 10, steps), exact) / distance(integrate(f, start, 10, 2 * steps), exact);
      expect(Math.abs(ratio - 16)).toBeLessThanOrEqual(2);
    }
  });

  // Closed form: for ẋ = λx one step multiplies by 1 + z + z²/2 + z³/6 + z⁴/24, z = λh.
  it('one step on a linear equation is the Taylor polynomial of degree four, closed form', () => {
    for (const z of [-2.5, -0.3, 0.1, 1]) {
      const end = integrate(([x]) => [z * x], [1], 1, 1);
      expect(Math.abs(end[0] - (1 + z + z ** 2 / 2 + z ** 3 / 6 + z ** 4 / 24))).toBeLessThan(1e-15);
    }
  });

  it('a right side that returns the same array at every call gives the same numbers as one that does not', () => {
    const shared = [0, 0];
    const reusing: RightSide = (x) => {
      shared[0] = x[1];
      shared[1] = -Math.sin(x[0]);
      return shared;
    };
    expect(integrate(reusing, [1, 0], 3, 50)).toEqual(integrate(pendulum, [1, 0], 3, 50));
  });
});

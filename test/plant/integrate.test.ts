import { describe, expect, it } from 'vitest';
import { createRandom } from '../../src/numerics/random.ts';
import { integrateFine, integrateSample } from '../../src/plant/integrate.ts';
import { definePlant, type Plant } from '../../src/plant/plant.ts';
import { chooseSubsteps, SUBSTEP_CAP, SUBSTEP_TOLERANCE } from '../../src/plant/substeps.ts';

/** A plant of one state on [−1, 1] and one input on [−1, 1]. */
const scalarPlant = (rate: (x: number, u: number) => number): Plant =>
  definePlant({
    name: 'scalar',
    description: 'One state.',
    states: [{ name: 'x', unit: '1', min: -1, max: 1 }],
    inputs: [{ name: 'u', unit: '1', min: -1, max: 1 }],
    outputs: [{ name: 'x', unit: '1', min: -1, max: 1, of: 'x' }],
    parameters: {},
    derivative: (x, u) => [rate(x[0], u[0])],
    operatingPoint: { x: [0], u: [0] },
    hazards: ['None but the usual.'],
  });
const lag = scalarPlant((x, u) => -3 * x + u);
const blowUp = scalarPlant((x) => x * x);

describe('integration over a sample', () => {
  it('meets the closed form of a first-order lag under a held input', () => {
    const end = new Float64Array(1);
    expect(integrateSample(lag, {}, [0.4], [0.7], 0.2, 64, end)).toBe('finished');
    const exact = 0.7 / 3 + (0.4 - 0.7 / 3) * Math.exp(-0.6);
    expect(Math.abs(end[0] - exact)).toBeLessThan(1e-11);
  });

  it('may write over its start, and leaves it alone otherwise', () => {
    const start = Float64Array.of(0.4);
    const end = new Float64Array(1);
    integrateSample(lag, {}, start, [0.7], 0.2, 5, end);
    expect(start[0]).toBe(0.4);
    integrateSample(lag, {}, start, [0.7], 0.2, 5, start);
    expect(start[0]).toBe(end[0]);
  });

  it('reports a state without bound as an outcome: ẋ = x² blows up at t = 1 / x₀, closed form', () => {
    const end = new Float64Array(1);
    expect(integrateSample(blowUp, {}, [1], [0], 0.9, 1000, end)).toBe('finished');
    expect(Math.abs(end[0] - 10)).toBeLessThan(1e-6);
    expect(integrateSample(blowUp, {}, [1], [0], 1.5, 1000, end)).toBe('diverged');
    expect(integrateFine(blowUp, {}, [1], [0], 1.5, 1000, 3, new Float64Array(3))).toBe('diverged');
  });

  it('keeps the points between samples, the last one the same as without them', () => {
    const fine = new Float64Array(4);
    expect(integrateFine(lag, {}, [0.4], [0.7], 0.2, 8, 4, fine)).toBe('finished');
    for (const [j, value] of fine.entries()) {
      const exact = 0.7 / 3 + (0.4 - 0.7 / 3) * Math.exp(-0.15 * (j + 1));
      expect(Math.abs(value - exact)).toBeLessThan(1e-6);
    }
    const end = new Float64Array(1);
    integrateSample(lag, {}, [0.4], [0.7], 0.2, 8, end);
    expect(fine[3]).toBe(end[0]);
  });

  it('takes no fewer sub-steps than asked when the points do not divide them', () => {
    const error = (values: Float64Array) =>
      Math.abs(values.at(-1)! - (0.7 / 3 + (0.4 - 0.7 / 3) * Math.exp(-0.6)));
    const fine = new Float64Array(3);
    integrateFine(lag, {}, [0.4], [0.7], 0.2, 4, 3, fine);
    const end = new Float64Array(1);
    integrateSample(lag, {}, [0.4], [0.7], 0.2, 4, end);
    expect(error(fine)).toBeLessThanOrEqual(error(end));
  });
});

describe('the choice of sub-steps', () => {
  it('takes one where one is enough, and its error is that of one step, closed form', () => {
    const slow = scalarPlant((x) => -x);
    const { count, error } = chooseSubsteps(slow, 0.05, createRandom(1));
    expect(count).toBe(1);
    // Error of one RK4 step on ẋ = −x: h⁵/120; half of it relative to the range of 2; 15/16 of it goes with halving.
    expect(error).toBeLessThanOrEqual((0.05 ** 5 / 120 / 2) * 1.01);
    expect(error).toBeGreaterThan((0.05 ** 5 / 120 / 2) * 0.8);
  });

  it('takes more for a faster plant, and the error of the count is real: a much finer integration differs by it', () => {
    const fast = scalarPlant((x, u) => -60 * x + 60 * u);
    const { count, error } = chooseSubsteps(fast, 0.05, createRandom(1));
    expect(count).toBeGreaterThan(4);
    expect(error).toBeLessThanOrEqual(SUBSTEP_TOLERANCE);
    const [coarse, exact] = [count, 4096].map((substeps) => {
      const end = new Float64Array(1);
      integrateSample(fast, {}, [1], [-1], 0.05, substeps, end);
      return end[0];
    });
    expect(Math.abs(coarse - exact) / 2).toBeLessThan(2 * error + 1e-12);
  });

  it('stops at its cap for a plant with a jump, and says what error was reached', () => {
    const relay = scalarPlant((x) => -40 * Math.sign(x - 0.123));
    const { count, error } = chooseSubsteps(relay, 0.05, createRandom(1));
    expect(count).toBe(SUBSTEP_CAP);
    expect(error).toBeGreaterThan(SUBSTEP_TOLERANCE);
    expect(error).toBeLessThan(0.1);
  });

  it('leaves out starts from which the plant itself has no bound, and says so when there are no others', () => {
    const some = chooseSubsteps(
      scalarPlant((x) => 30 * x * x),
      0.05,
      createRandom(1),
    );
    expect(some.error).toBeLessThan(Number.POSITIVE_INFINITY);
    const all = chooseSubsteps(
      scalarPlant(() => Number.NaN),
      0.05,
      createRandom(1),
    );
    expect(all.error).toBe(Number.POSITIVE_INFINITY);
  });

  it('takes more where the coarse integration diverges and the finer one does not', () => {
    // Above 0.9 a pull of 60 /s that ends at 0.9; below 0 the model does not hold. Two steps of 25 ms overshoot into that.
    const cliff = scalarPlant((x) => (x < 0 ? Number.NaN : x > 0.9 ? -60 * x : 0));
    expect(chooseSubsteps(cliff, 0.05, createRandom(1)).count).toBeGreaterThan(2);
  });

  it('is the same for the same seed', () => {
    expect(chooseSubsteps(lag, 0.3, createRandom(9))).toEqual(chooseSubsteps(lag, 0.3, createRandom(9)));
  });
});

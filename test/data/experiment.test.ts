import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import electromagnet from '../../plants/electromagnet/plant.ts';
import snapThrough from '../../plants/snap-through/plant.ts';
import vanDerPol from '../../plants/van-der-pol/plant.ts';
import { countSamples, type Role } from '../../src/data/dataset.ts';
import { datasetProblem } from '../../src/data/datasetProblem.ts';
import { type ExperimentSettings, FEWEST_STEPS, runExperiment } from '../../src/data/experiment.ts';
import { dealRoles } from '../../src/data/split.ts';
import { createRandom } from '../../src/numerics/random.ts';
import { SIGNAL_SHAPES } from '../../src/plant/excitation/excite.ts';
import { integrateSample } from '../../src/plant/integrate.ts';
import { nominalParameters, type Plant } from '../../src/plant/plant.ts';

const SETTINGS: ExperimentSettings = {
  signals: SIGNAL_SHAPES,
  trajectories: 12,
  duration: 0.3,
  amplitude: 0.8,
  hold: 0.03,
  highest: 20,
  startRegion: 0.8,
  cutAt: 1.6,
  fitShare: 0.6,
  chooseShare: 0.2,
};
const OPTIONS = { sampleTime: 0.005, substeps: 4, seed: 1 };

const insideBy = (plant: Plant, x: ArrayLike<number>, factor: number) =>
  plant.states.every(({ min, max }, i) => Math.abs(x[i] - (min + max) / 2) <= (factor * (max - min)) / 2);

describe('an experiment', () => {
  it('keeps input range, rate limit, start region and cut for any settings, and every row is finite', () => {
    const settings = fc.record({
      signals: fc.subarray([...SIGNAL_SHAPES], { minLength: 1 }),
      trajectories: fc.integer({ min: 0, max: 8 }),
      duration: fc.double({ min: 0.01, max: 0.4, noNaN: true }),
      amplitude: fc.double({ min: 0.01, max: 1, noNaN: true }),
      hold: fc.double({ min: 0.001, max: 0.2, noNaN: true }),
      highest: fc.double({ min: 0.1, max: 200, noNaN: true }),
      startRegion: fc.double({ min: 0, max: 1, noNaN: true }),
      cutAt: fc.double({ min: 1, max: 3, noNaN: true }),
      fitShare: fc.double({ min: 0, max: 1, noNaN: true }),
      chooseShare: fc.double({ min: 0, max: 1, noNaN: true }),
    });
    fc.assert(
      fc.property(settings, fc.nat(), fc.constantFrom(snapThrough, electromagnet), (drawn, seed, plant) => {
        const dataset = runExperiment(plant, drawn, { sampleTime: 0.005, substeps: 2, seed });
        const nx = plant.states.length;
        const [{ min, max, rate = Number.POSITIVE_INFINITY }] = plant.inputs;
        for (const { x, u, steps } of dataset.trajectories) {
          expect(steps).toBeGreaterThanOrEqual(FEWEST_STEPS);
          expect([x.length, u.length]).toEqual([(steps + 1) * nx, steps]);
          expect(x.every(Number.isFinite)).toBe(true);
          expect(insideBy(plant, x, drawn.startRegion + 1e-12)).toBe(true);
          for (let k = 0; k <= steps; k++)
            expect(insideBy(plant, x.subarray(k * nx), drawn.cutAt + 1e-12)).toBe(true);
          for (let k = 0; k < steps; k++) {
            expect(u[k] >= min && u[k] <= max).toBe(true);
            if (k > 0) expect(Math.abs(u[k] - u[k - 1])).toBeLessThanOrEqual(rate * 0.005 * (1 + 1e-9));
          }
        }
      }),
      { seed: 3, numRuns: 60 },
    );
  });

  it('joins each sample to the next by the plant’s own equation', () => {
    const { trajectories } = runExperiment(snapThrough, SETTINGS, OPTIONS);
    const p = nominalParameters(snapThrough);
    const next = new Float64Array(2);
    for (const { x, u, steps } of trajectories) {
      for (let k = 0; k < steps; k++) {
        integrateSample(snapThrough, p, x.subarray(2 * k), [u[k]], 0.005, 4, next);
        expect(Array.from(next)).toEqual(Array.from(x.subarray(2 * k + 2, 2 * k + 4)));
      }
    }
  });

  it('gives the same numbers for the same seed, others for another, and trajectories that do not depend on how many there are', () => {
    const dataset = runExperiment(snapThrough, SETTINGS, OPTIONS);
    expect(runExperiment(snapThrough, SETTINGS, OPTIONS)).toEqual(dataset);
    const other = runExperiment(snapThrough, SETTINGS, { ...OPTIONS, seed: 2 });
    expect(other.trajectories[0].x).not.toEqual(dataset.trajectories[0].x);
    expect(new Set(dataset.trajectories.map(({ x }) => x[0])).size).toBe(dataset.trajectories.length);
    const fewer = runExperiment(snapThrough, { ...SETTINGS, trajectories: 5 }, OPTIONS);
    for (const [i, { x, u }] of fewer.trajectories.entries()) {
      expect(x).toEqual(dataset.trajectories[i].x);
      expect(u).toEqual(dataset.trajectories[i].u);
    }
  });

  it('takes the signals in turn', () => {
    const settings: ExperimentSettings = {
      ...SETTINGS,
      signals: ['binary-sequence', 'multisine'],
      amplitude: 1,
    };
    const { trajectories } = runExperiment(vanDerPol, settings, OPTIONS);
    for (const [i, { u }] of trajectories.entries()) {
      expect(u.every((value) => Math.abs(value) === 1)).toBe(i % 2 === 0);
    }
  });

  it('cuts and counts trajectories that leave the ranges, and keeps what went before', () => {
    const { trajectories, cuts } = runExperiment(electromagnet, { ...SETTINGS, duration: 0.5 }, OPTIONS);
    expect(cuts.leftRange).toBeGreaterThan(6);
    const marked = trajectories.filter(({ cut }) => cut === 'left-range');
    expect(marked.length).toBeGreaterThan(0);
    expect(marked.length).toBeLessThanOrEqual(cuts.leftRange);
    expect(marked.every(({ steps }) => steps < 100)).toBe(true);
    expect(trajectories.filter(({ cut }) => !cut).every(({ steps }) => steps === 100)).toBe(true);
  });

  it('cuts and counts trajectories that diverge: ẋ = 40 x² from x₀ > 0 has no bound, closed form', () => {
    const blowUp: Plant = {
      ...vanDerPol,
      derivative: (x) => [40 * x[0] ** 2, 0],
    };
    // Coarse samples: the state passes from inside the wide cut to infinity within one of them.
    const settings = { ...SETTINGS, cutAt: 1e6, duration: 4, trajectories: 20 };
    const { trajectories, cuts } = runExperiment(blowUp, settings, {
      sampleTime: 0.2,
      substeps: 40,
      seed: 1,
    });
    const upward = cuts.diverged;
    expect(upward).toBeGreaterThan(4);
    expect(upward).toBeLessThan(16);
    expect(trajectories.every(({ x }) => x.every(Number.isFinite))).toBe(true);
  });

  it('reports its progress', () => {
    const seen: number[][] = [];
    const onProgress = (done: number, planned: number) => seen.push([done, planned]);
    runExperiment(snapThrough, { ...SETTINGS, trajectories: 3 }, { ...OPTIONS, onProgress });
    expect(seen).toEqual([
      [1, 3],
      [2, 3],
      [3, 3],
    ]);
  });
});

describe('the split', () => {
  const count = (roles: readonly Role[], role: Role) => roles.filter((dealt) => dealt === role).length;

  it('gives every role a trajectory when there are three, and keeps to the shares within one', () => {
    const share = fc.double({ min: 0, max: 1, noNaN: true });
    fc.assert(
      fc.property(fc.integer({ min: 0, max: 200 }), share, share, fc.nat(), (n, fit, choose, seed) => {
        const roles = dealRoles(n, fit, choose, createRandom(seed));
        expect(roles.length).toBe(n);
        const counts = (['fit', 'choose', 'held-out'] as const).map((role) => count(roles, role));
        expect(counts[0] + counts[1] + counts[2]).toBe(n);
        if (n >= 3) expect(Math.min(...counts)).toBeGreaterThanOrEqual(1);
        if (n >= 20 && fit >= 0.1 && choose >= 0.1 && fit + choose <= 0.9) {
          expect(Math.abs(counts[0] - fit * n)).toBeLessThanOrEqual(1);
          expect(Math.abs(counts[1] - choose * n)).toBeLessThanOrEqual(1);
        }
      }),
      { seed: 4 },
    );
  });

  it('deals at random: in 600 deals each place is held out as often as its share, within five standard errors', () => {
    const held = new Array<number>(10).fill(0);
    for (let seed = 0; seed < 600; seed++) {
      for (const [i, role] of dealRoles(10, 0.5, 0.3, createRandom(seed)).entries())
        if (role === 'held-out') held[i]++;
    }
    for (const times of held) expect(Math.abs(times - 120)).toBeLessThan(5 * Math.sqrt(600 * 0.2 * 0.8));
  });

  it('is by whole trajectories: the samples of the roles add up to all of them', () => {
    const dataset = runExperiment(snapThrough, SETTINGS, OPTIONS);
    const total = dataset.trajectories.reduce((sum, { steps }) => sum + steps, 0);
    const roles: readonly Role[] = ['fit', 'choose', 'held-out'];
    expect(roles.reduce((sum, role) => sum + countSamples(dataset, role), 0)).toBe(total);
    expect(datasetProblem(dataset)).toBeNull();
  });

  it('with too few trajectories names the role that is left empty and the way out', () => {
    const dataset = runExperiment(snapThrough, { ...SETTINGS, trajectories: 2 }, OPTIONS);
    const problem = datasetProblem(dataset);
    expect(problem?.key).toBe('experiment.trajectories');
    expect(problem?.got).toMatch(/^2 usable .* none to (fit|choose|held-out)$/);
    expect(problem?.wayOut).toBe('plan at least 3');
    const allCut = runExperiment(snapThrough, { ...SETTINGS, startRegion: 1, cutAt: 1e-6 }, OPTIONS);
    expect(datasetProblem(allCut)?.wayOut).toMatch(/cutAt/);
  });
});

import { describe, expect, it } from 'vitest';
import { EXCITATION_LAGS, measureExcitation } from '../../src/data/coverage.ts';
import type { Dataset } from '../../src/data/dataset.ts';
import { describeRegion, outsideRegion, shareOutside } from '../../src/data/region.ts';
import { createRandom, type Random } from '../../src/numerics/random.ts';
import { maximalLengthSequence } from '../../src/plant/excitation/binarySequence.ts';

/** A dataset of one input and two coordinates on [−1, 1], all to fit, from lists of states and inputs. */
function datasetOf(trajectories: readonly { x: ArrayLike<number>; u: ArrayLike<number> }[]): Dataset {
  const channel = (name: string) => ({ name, unit: 'm', min: -1, max: 1 });
  return {
    sampleTime: 0.01,
    coordinates: [channel('a'), channel('b')],
    inputs: [channel('u')],
    trajectories: trajectories.map(({ x, u }) => ({
      role: 'fit',
      steps: u.length,
      x: Float64Array.from(x),
      u: Float64Array.from(u),
    })),
    cuts: { diverged: 0, leftRange: 0 },
  };
}
const resting = (u: ArrayLike<number>) => ({ x: new Float64Array(2 * (u.length + 1)), u });

describe('the measure of excitation', () => {
  it('counts samples, levels and what was visited', () => {
    const dataset = datasetOf([{ x: [-0.5, 0, 0, 0, 0.5, 0, 0.25, 0], u: [1, -1, 1] }]);
    const { samples, trajectories, coordinates, inputs } = measureExcitation(dataset);
    expect([samples, trajectories]).toEqual([3, 1]);
    expect(coordinates[0]).toMatchObject({ name: 'a', min: -0.5, max: 0.5, share: 0.5, cells: 0.4 });
    expect(coordinates[1]).toMatchObject({ share: 0, cells: 0.1 });
    expect(inputs[0]).toMatchObject({ share: 1, levels: 2, cells: 0.2 });
  });

  // Closed form: the lagged ±1 sequence has the circulant Gram matrix (N + 1) I − 1 1ᵀ; cut at its ends, over many periods,
  // and with its mean taken out, its eigenvalues all tend to N + 1.
  it('finds a maximal-length sequence perfectly rich, closed form', () => {
    const period = Array.from(maximalLengthSequence(10), (bit) => 2 * bit - 1);
    const { lagCondition } = measureExcitation(datasetOf([resting([...period, ...period, ...period])]));
    expect(lagCondition).toBeGreaterThanOrEqual(1);
    expect(lagCondition).toBeLessThan(1.02);
  });

  // Closed form: L lags of a sum of r sines have rank 2r, so fewer than L / 2 of them are not rich of order L.
  it('finds a constant input and a few sines not rich, and enough sines rich, closed form', () => {
    const sines = (count: number) =>
      Float64Array.from({ length: 1000 }, (_, k) => {
        let sum = 0;
        for (let i = 1; i <= count; i++) sum += Math.sin((2 * Math.PI * k * 25 * i) / 1000 + i);
        return sum / count;
      });
    const condition = (u: ArrayLike<number>) => measureExcitation(datasetOf([resting(u)])).lagCondition;
    expect(condition(new Float64Array(100).fill(0.3))).toBe(Number.POSITIVE_INFINITY);
    expect(condition(sines(1))).toBeGreaterThan(1e6);
    expect(condition(sines(EXCITATION_LAGS / 2 - 1))).toBeGreaterThan(1e6);
    expect(condition(sines(EXCITATION_LAGS / 2))).toBeLessThan(1e6);
  });

  it('does not depend on the level about which the input moves, relation', () => {
    const random = createRandom(2);
    const u = Array.from({ length: 500 }, () => 0.1 * random());
    const [low, high] = [0, 0.8].map(
      (level) => measureExcitation(datasetOf([resting(u.map((value) => value + level))])).lagCondition,
    );
    expect(low).toBeLessThan(2);
    expect(Math.abs(high / low - 1)).toBeLessThan(1e-9);
  });

  it('finds a held input less rich than one that changes at each sample', () => {
    const random = createRandom(1);
    const fast = Array.from({ length: 2000 }, () => 2 * random() - 1);
    const held = fast.map((_, k) => fast[k - (k % 10)]);
    const condition = (u: number[]) => measureExcitation(datasetOf([resting(u)])).lagCondition;
    expect(condition(held)).toBeGreaterThan(3 * condition(fast));
  });

  it('with no data, or trajectories too short, calls the input not rich instead of failing', () => {
    for (const dataset of [datasetOf([]), datasetOf([resting([1, 0, 1])])]) {
      const excitation = measureExcitation(dataset);
      expect(excitation.lagCondition).toBe(Number.POSITIVE_INFINITY);
      expect(excitation.coordinates.every(({ share }) => share === 0)).toBe(true);
    }
  });
});

describe('the region of the data', () => {
  /** Points of a ring between the radii 0.5 and 0.8. */
  const drawRing = (random: Random) => {
    const radius = Math.sqrt(0.25 + 0.39 * random());
    const angle = 2 * Math.PI * random();
    return [radius * Math.cos(angle), radius * Math.sin(angle)];
  };
  const ring = (seed: number) => {
    const random = createRandom(seed);
    return {
      x: Array.from({ length: 101 }, () => drawRing(random)).flat(),
      u: new Array<number>(100).fill(0),
    };
  };
  const region = describeRegion(datasetOf(Array.from({ length: 40 }, (_, seed) => ring(seed))));

  it('holds fresh states like its data, all but about the 1 % it is set to miss', () => {
    const random = createRandom(999);
    const path = Float64Array.from(Array.from({ length: 4000 }, () => drawRing(random)).flat());
    // Five standard errors of a share of 1 % among 4000, and of one among the 1600 probes.
    expect(shareOutside(region, path)).toBeLessThan(0.01 + 5 * Math.sqrt((0.01 * 0.99) / 1600));
  });

  it('leaves out the hole that a box would hold, the corners, and what is beyond', () => {
    expect(outsideRegion(region, [0, 0])).toBe(true);
    expect(outsideRegion(region, [0.2, -0.1])).toBe(true);
    expect(outsideRegion(region, [0.75, 0.75])).toBe(true);
    expect(outsideRegion(region, [5, 0])).toBe(true);
    expect(outsideRegion(region, [0.65, 0])).toBe(false);
  });

  it('does not hold a state that is not a number', () => {
    expect(outsideRegion(region, [Number.NaN, 0.6])).toBe(true);
    expect(outsideRegion(region, [0.6, Number.POSITIVE_INFINITY])).toBe(true);
  });

  it('falls back to the box when there are too few samples for a quantile', () => {
    const few = describeRegion(datasetOf([{ x: [-0.5, -0.5, 0.5, 0.5], u: [0] }]));
    expect(few.reach).toBe(Number.POSITIVE_INFINITY);
    expect(outsideRegion(few, [0.2, -0.4])).toBe(false);
    expect(outsideRegion(few, [0.6, 0])).toBe(true);
  });

  it('without data holds nothing', () => {
    expect(outsideRegion(describeRegion(datasetOf([])), [0, 0])).toBe(true);
    expect(shareOutside(region, new Float64Array(0))).toBe(0);
  });
});

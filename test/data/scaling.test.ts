import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import type { Dataset } from '../../src/data/dataset.ts';
import {
  makeScaling,
  scale,
  scaleInto,
  scalingFromData,
  scalingFromRanges,
  unscale,
  unscaleInto,
} from '../../src/data/scaling.ts';
import { definePlant } from '../../src/plant/plant.ts';

const valve = definePlant({
  name: 'valve',
  description: 'A plant with an output of each kind.',
  states: [
    { name: 'position', unit: 'm', min: 0, max: 4e-3 },
    { name: 'pressure', unit: 'Pa', min: 1e5, max: 9e5 },
  ],
  inputs: [{ name: 'current', unit: 'A', min: -1, max: 3 }],
  outputs: [
    { name: 'force', unit: 'N', min: -100, max: 300, of: (x) => 1e-3 * x[1] },
    { name: 'stroke', unit: 'm', min: 1e-3, max: 2e-3, of: 'position' },
  ],
  parameters: {},
  derivative: () => [0, 0],
  operatingPoint: { x: [0, 1e5], u: [0] },
  hazards: ['none: it does not exist'],
});

const dataset: Dataset = {
  sampleTime: 0.01,
  coordinates: valve.states,
  inputs: valve.inputs,
  trajectories: [
    { role: 'fit', steps: 1, x: Float64Array.of(1e-3, 2e5, 3e-3, 2e5), u: Float64Array.of(0) },
    { role: 'held-out', steps: 1, x: Float64Array.of(-9, -9, 9, 9), u: Float64Array.of(0) },
  ],
  cuts: { diverged: 0, leftRange: 0 },
};

/** A range of any size and place, its width at least a millionth of its distance from 0. */
const range = fc
  .record({
    exponent: fc.integer({ min: -9, max: 9 }),
    width: fc.double({ min: 1, max: 10, noNaN: true }),
    place: fc.double({ min: -1e6, max: 1e6, noNaN: true }),
  })
  .map(({ exponent, width, place }) => {
    const unit = 10 ** exponent;
    return { min: (place - width) * unit, max: (place + width) * unit };
  });

describe('scaling by ranges', () => {
  it('maps the ends to −1 and 1 and the middle to 0, at any size from 1e-9 to 1e9', () => {
    fc.assert(
      fc.property(range, ({ min, max }) => {
        const scaling = scalingFromRanges([{ min, max }]);
        // Rounding of the ends, in units of the half range.
        const slack =
          (8 * Number.EPSILON * Math.max(Math.abs(min), Math.abs(max))) / scaling.half[0] +
          8 * Number.EPSILON;
        expect(Math.abs(scale([min], scaling)[0] + 1)).toBeLessThanOrEqual(slack);
        expect(Math.abs(scale([max], scaling)[0] - 1)).toBeLessThanOrEqual(slack);
        expect(Math.abs(scale([min / 2 + max / 2], scaling)[0])).toBeLessThanOrEqual(slack);
      }),
      { seed: 1 },
    );
  });

  it('there and back changes a value by rounding only', () => {
    fc.assert(
      fc.property(range, fc.double({ min: -5, max: 5, noNaN: true }), ({ min, max }, share) => {
        const scaling = scalingFromRanges([{ min, max }]);
        const value = scaling.centre[0] + share * scaling.half[0];
        const back = unscale(scale([value], scaling), scaling)[0];
        const size = Math.max(Math.abs(min), Math.abs(max), Math.abs(value));
        expect(Math.abs(back - value)).toBeLessThanOrEqual(8 * Number.EPSILON * size);
      }),
      { seed: 1 },
    );
  });

  it('does not overflow on the widest range there is', () => {
    const [min, max] = [-Number.MAX_VALUE, Number.MAX_VALUE];
    expect(scalingFromRanges([{ min, max }])).toEqual({ centre: [0], half: [Number.MAX_VALUE] });
  });

  it('written into a row in place gives the bits of the pure form, and touches nothing else', () => {
    const scaling = scalingFromRanges(valve.states);
    const row = Float64Array.of(7, 1e-3, 3e5, 8);
    const pure = scale([1e-3, 3e5], scaling);
    const elsewhere = new Float64Array(3);
    scaleInto(elsewhere, 1, row, 1, scaling);
    expect(Array.from(elsewhere)).toEqual([0, ...pure]);
    scaleInto(row, 1, row, 1, scaling);
    expect(Array.from(row)).toEqual([7, ...pure, 8]);
    unscaleInto(row, 1, row, 1, scaling);
    expect(Array.from(row)).toEqual([7, ...unscale(pure, scaling), 8]);
  });
});

describe('the scaling of a predictor', () => {
  it('gives an output that is a state the state’s scaling, one that is a function its own range’s', () => {
    const { x, u, y } = makeScaling(dataset, valve, 'state');
    expect(x).toEqual({ centre: [2e-3, 5e5], half: [2e-3, 4e5] });
    expect(u).toEqual({ centre: [1], half: [2] });
    expect(y).toEqual({ centre: [100, 2e-3], half: [200, 2e-3] });
  });

  it('from the data follows the fitting trajectories alone; a coordinate that did not move keeps its range', () => {
    expect(scalingFromData(dataset)).toEqual({ centre: [2e-3, 5e5], half: [1e-3, 4e5] });
    const { x, y } = makeScaling(dataset, valve, 'state', 'data');
    expect(x.half).toEqual([1e-3, 4e5]);
    expect(y).toEqual({ centre: [100, 2e-3], half: [200, 1e-3] });
  });

  it('with delays gives each output the scaling of its own coordinate', () => {
    const coordinates = valve.outputs.map(({ name, unit, min, max }) => ({ name, unit, min, max }));
    const { x, y } = makeScaling({ ...dataset, coordinates }, valve, 'delays');
    expect(y).toEqual(x);
    expect(y).toEqual({ centre: [100, 1.5e-3], half: [200, 5e-4] });
  });
});

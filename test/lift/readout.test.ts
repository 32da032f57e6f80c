import { describe, expect, it } from 'vitest';
import { listCoordinates, toCoordinates } from '../../src/data/coordinates.ts';
import type { Dataset } from '../../src/data/dataset.ts';
import { makeScaling, scale, unscale } from '../../src/data/scaling.ts';
import { bindLifting } from '../../src/lift/bind.ts';
import { createEvaluationContext, createLiftingContext } from '../../src/lift/context.ts';
import { buildLifting } from '../../src/lift/join.ts';
import type { LiftingPartSettings } from '../../src/lift/lifting.ts';
import { readoutIndices } from '../../src/lift/readout.ts';
import { createRandom } from '../../src/numerics/random.ts';
import { definePlant, nominalParameters, type OutputChannel, readOutputs } from '../../src/plant/plant.ts';

const states = [
  { name: 'angle', unit: 'rad', min: -1, max: 3 },
  { name: 'speed', unit: 'rad/s', min: -200, max: 100 },
];
const outputs: readonly OutputChannel[] = [
  { name: 'energy', unit: 'J', min: 0, max: 40, of: (x, { inertia }) => 0.5 * inertia * x[1] ** 2 },
  { name: 'shaft', unit: 'rad', min: 0, max: 1, of: 'angle' },
  // The very state, by a function: the same scaled values.
  { name: 'rate', unit: 'rad/s', min: -200, max: 100, of: (x) => x[1] },
  // The state in another unit and over another range: a function of its own, read out by selection all the same.
  { name: 'degrees', unit: 'deg', min: 0, max: 90, of: (x) => (x[0] * 180) / Math.PI },
  // Proportional to the scaled state, 0.75 times, yet not equal to it.
  { name: 'part-rate', unit: 'rad/s', min: -250, max: 150, of: (x) => x[1] },
  // It does not vary within the ranges.
  { name: 'end-stop', unit: '1', min: 0, max: 1, of: (x) => (x[0] > 5 ? 1 : 0) },
  // A name that a state has too.
  { name: 'speed', unit: 'rad/s', min: 0, max: 200, of: (x) => Math.abs(x[1]) },
];
const plant = definePlant({
  name: 'lever',
  description: 'A lever with outputs of every kind.',
  states,
  inputs: [{ name: 'torque', unit: 'N m', min: -1, max: 1 }],
  outputs,
  parameters: { inertia: { unit: 'kg m^2', value: 2e-3 } },
  derivative: () => [0, 0],
  physics: [
    { name: 'kinetic', of: (x, { inertia }) => inertia * x[1] ** 2 },
    { name: 'weight', of: (x) => Math.sin(x[0]) },
  ],
  operatingPoint: { x: [0, 0], u: [0] },
  hazards: ['none: it does not exist'],
});

const random = createRandom(4);
const draw = () => states.map(({ min, max }) => min + (max - min) * random());
const dataset: Dataset = {
  sampleTime: 0.01,
  coordinates: states,
  inputs: plant.inputs,
  trajectories: Array.from({ length: 30 }, (_, t) => ({
    role: t < 20 ? 'fit' : 'held-out',
    steps: 9,
    x: Float64Array.from(Array.from({ length: 10 }, draw).flat()),
    u: Float64Array.from({ length: 9 }, () => 2 * random() - 1),
  })),
  cuts: { diverged: 0, leftRange: 0 },
};
const parts: readonly LiftingPartSettings[] = [
  { family: 'physics', values: {} },
  { family: 'legendre', values: { degree: 3 } },
];

describe('a selection of the lifted state', () => {
  for (const from of ['ranges', 'data'] as const) {
    it(`reads out every output, be it a state or a function of it, exactly: y = h(x), scaled by ${from}`, () => {
      const scaling = makeScaling(dataset, plant, 'state', from);
      const context = createLiftingContext({ dataset, plant, read: 'state', scaling: scaling.x, random });
      const lifting = buildLifting({ constant: true, parts }, context);
      const readout = readoutIndices(JSON.parse(JSON.stringify(lifting)), plant, 'state');
      const bound = bindLifting(lifting, createEvaluationContext(plant, 'state', scaling.x));
      const z = new Float64Array(lifting.nz);
      for (let k = 0; k < 50; k++) {
        const x = draw();
        bound.liftInto(z, scale(x, scaling.x));
        const read = unscale(
          readout.map((index) => z[index]),
          scaling.y,
        );
        readOutputs(plant, x, nominalParameters(plant)).forEach((value, i) => {
          const size = Math.abs(scaling.y.centre[i]) + scaling.y.half[i] + Math.abs(value);
          expect(Math.abs(read[i] - value)).toBeLessThan(1e-14 * size);
        });
      }
      expect(readout[1]).toBe(0);
      // Scaled by ranges, the second state and its copy agree; scaled by the data they do not.
      if (from === 'ranges') expect(readout[2]).toBe(1);
      else expect(readout[2]).toBeGreaterThan(2);
      expect(new Set(readout).size).toBe(readout.length);
    });
  }

  it('is told apart from a physics function of the same shape: that one is dropped in favour of the output', () => {
    const { x } = makeScaling(dataset, plant, 'state');
    const context = createLiftingContext({ dataset, plant, read: 'state', scaling: x, random });
    const lifting = buildLifting({ constant: true, parts }, context);
    expect(lifting.names.slice(0, 9)).toEqual([
      'angle',
      'speed',
      '1',
      'energy',
      'degrees',
      'part-rate',
      'end-stop',
      'speed (output)',
      'weight',
    ]);
    expect(lifting.dropped).toContainEqual({ name: 'kinetic', sameAs: 'energy' });
    expect(lifting.dropped).toContainEqual({ name: 'rate', sameAs: 'speed' });
  });

  it('of delay coordinates is the present outputs', () => {
    const settings = { read: 'delays', outputLags: 1, inputLags: 1 } as const;
    const delayed = toCoordinates(dataset, plant, settings);
    const scaling = makeScaling(delayed, plant, 'delays');
    const context = createLiftingContext({
      dataset: delayed,
      plant,
      read: 'delays',
      scaling: scaling.x,
      random,
    });
    expect(context.physics).toEqual([]);
    const lifting = buildLifting({ constant: true, parts: [{ family: 'thin-plate', values: {} }] }, context);
    const readout = readoutIndices(lifting, plant, 'delays');
    expect(readout.map((index) => lifting.names[index])).toEqual(plant.outputs.map(({ name }) => name));
    expect(lifting.names.slice(0, lifting.nx)).toEqual(
      listCoordinates(plant, settings).map(({ name }) => name),
    );
    expect(scaling.y.half).toEqual(scaling.x.half.slice(0, plant.outputs.length));
  });

  it('is refused as a fault where the lifting was built without the output', () => {
    const { x } = makeScaling(dataset, plant, 'state');
    const context = createLiftingContext({ dataset, plant, read: 'state', scaling: x, random });
    const lifting = buildLifting({ constant: true, parts: [] }, { ...context, outputs: [] });
    expect(() => readoutIndices(lifting, plant, 'state')).toThrow(RangeError);
  });
});

describe('the samples on which a lifting is built', () => {
  it('are all samples of the fitting trajectories, scaled, in order', () => {
    const { x: scaling } = makeScaling(dataset, plant, 'state');
    const { samples } = createLiftingContext({ dataset, plant, read: 'state', scaling, random });
    const all = dataset.trajectories.filter(({ role }) => role === 'fit').flatMap(({ x }) => Array.from(x));
    expect(samples).toHaveLength(all.length);
    samples.forEach((value, i) => {
      expect(value).toBe((all[i] - scaling.centre[i % 2]) / scaling.half[i % 2]);
    });
  });

  it('are at most 20,000, evenly spread over all trajectories', () => {
    const x = Float64Array.from({ length: 50_001 }, (_, k) => k);
    const long: Dataset = {
      ...dataset,
      coordinates: [states[0]],
      trajectories: [0, 1].map((t) => ({
        role: 'fit',
        steps: 25_000 - t,
        x: x.subarray(t * 25_001, 25_001 + t * 25_000),
        u: new Float64Array(25_000 - t),
      })),
    };
    const scaling = { centre: [0], half: [1] };
    const { samples } = createLiftingContext({ dataset: long, plant, read: 'state', scaling, random });
    expect(samples).toHaveLength(20_000);
    samples.forEach((value, i) => {
      expect(value).toBe(Math.floor((i * 50_001) / 20_000));
    });
  });
});

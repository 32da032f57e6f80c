import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import motor from '../../plants/motor/plant.ts';
import {
  type CoordinateSettings,
  createCoordinateTracker,
  listCoordinates,
  toCoordinates,
} from '../../src/data/coordinates.ts';
import type { Dataset } from '../../src/data/dataset.ts';
import { createRandom } from '../../src/numerics/random.ts';
import { definePlant } from '../../src/plant/plant.ts';

const delays = (outputLags: number, inputLags: number): CoordinateSettings => ({
  read: 'delays',
  outputLags,
  inputLags,
});

/** Two states, two inputs, two outputs: one is a state, one a function. */
const plant = definePlant({
  name: 'pair',
  description: 'A plant with two of everything.',
  states: [
    { name: 'a', unit: 'm', min: -1, max: 1 },
    { name: 'b', unit: 'm/s', min: -2, max: 2 },
  ],
  inputs: [
    { name: 'u', unit: 'A', min: -3, max: 3 },
    { name: 'v', unit: 'V', min: -4, max: 4 },
  ],
  outputs: [
    { name: 'speed', unit: 'm/s', min: -2, max: 2, of: 'b' },
    { name: 'sum', unit: 'm', min: -9, max: 9, of: (x, { factor }) => x[0] + factor * x[1] },
  ],
  parameters: { factor: { unit: 's', value: 10 } },
  derivative: () => [0, 0],
  operatingPoint: { x: [0, 0], u: [0.5, -0.5] },
  hazards: ['none: it does not exist'],
});

/** Trajectories whose entries tell their sample: a = k, b = k/1000, u = 100 + k, v = 200 + k. */
function countingDataset(...steps: readonly number[]): Dataset {
  return {
    sampleTime: 0.1,
    coordinates: plant.states,
    inputs: plant.inputs,
    trajectories: steps.map((count, t) => ({
      role: t === 0 ? 'fit' : 'choose',
      steps: count,
      x: Float64Array.from(Array.from({ length: count + 1 }, (_, k) => [k, k / 1000]).flat()),
      u: Float64Array.from(Array.from({ length: count }, (_, k) => [100 + k, 200 + k]).flat()),
      ...(t === 0 ? {} : { cut: 'left-range' as const }),
    })),
    cuts: { diverged: 0, leftRange: steps.length - 1 },
  };
}

describe('coordinates', () => {
  it('with state are the states, the dataset unchanged', () => {
    const dataset = countingDataset(5);
    const settings: CoordinateSettings = { read: 'state', outputLags: 2, inputLags: 2 };
    expect(toCoordinates(dataset, plant, settings)).toBe(dataset);
    expect(listCoordinates(plant, settings)).toBe(plant.states);
  });

  it('with delays are the outputs, newest first, then the inputs, each with its unit and range', () => {
    expect(listCoordinates(plant, delays(1, 2)).map(({ name, unit }) => `${name} ${unit}`)).toEqual([
      'speed m/s',
      'sum m',
      'speed[-1] m/s',
      'sum[-1] m',
      'u[-1] A',
      'v[-1] V',
      'u[-2] A',
      'v[-2] V',
    ]);
    expect(listCoordinates(plant, delays(1, 1)).map(({ min }) => min)).toEqual([-2, -9, -2, -9, -3, -4]);
  });

  it('of the motor of M. Korda, I. Mezić, Automatica 93:149–160 (2018), are y_k, y_{k−1}, u_{k−1} (read, up to order)', () => {
    expect(listCoordinates(motor, delays(1, 1)).map(({ name }) => name)).toEqual([
      'speed',
      'speed[-1]',
      'field-current[-1]',
    ]);
  });

  it('hold at each sample what was measured and applied so many samples before', () => {
    for (const [outputLags, inputLags] of [
      [0, 0],
      [2, 1],
      [1, 3],
      [0, 2],
      [3, 0],
    ]) {
      const settings = delays(outputLags, inputLags);
      const skip = Math.max(outputLags, inputLags);
      const { trajectories, coordinates } = toCoordinates(countingDataset(8, skip + 1), plant, settings);
      expect(trajectories.map(({ role, steps, cut }) => [role, steps, cut])).toEqual([
        ['fit', 8 - skip, undefined],
        ['choose', 1, 'left-range'],
      ]);
      for (const { steps, x, u } of trajectories) {
        const nx = coordinates.length;
        expect(x).toHaveLength((steps + 1) * nx);
        for (let row = 0; row <= steps; row++) {
          const k = row + skip;
          const expected = [];
          for (let lag = 0; lag <= outputLags; lag++) {
            expected.push((k - lag) / 1000, k - lag + 10 * ((k - lag) / 1000));
          }
          for (let lag = 1; lag <= inputLags; lag++) expected.push(100 + k - lag, 200 + k - lag);
          expect(Array.from(x.subarray(row * nx, (row + 1) * nx))).toEqual(expected);
        }
        // u[k] still leads from x[k] to x[k + 1].
        expect(Array.from(u)).toEqual(
          Array.from({ length: steps }, (_, row) => [100 + row + skip, 200 + row + skip]).flat(),
        );
      }
    }
  });

  it('leave out a trajectory that is too short for one step', () => {
    expect(toCoordinates(countingDataset(8, 3, 2, 1), plant, delays(2, 1)).trajectories).toHaveLength(2);
    expect(toCoordinates(countingDataset(2), plant, delays(5, 0)).trajectories).toEqual([]);
  });

  it('of a second-order linear plant obey its difference equation, by Cayley and Hamilton', () => {
    // y_{k+1} = tr(A) y_k − det(A) y_{k−1} + C B u_k + C (A − tr(A) I) B u_{k−1}, in closed form.
    const [A, B] = [
      [
        [0.9, 0.3],
        [-0.2, 0.7],
      ],
      [0.1, 0.5],
    ];
    const single = { ...plant, inputs: [plant.inputs[0]], outputs: [plant.outputs[0]] };
    const random = createRandom(1);
    const u = Float64Array.from({ length: 50 }, () => 2 * random() - 1);
    const states = [[0.3, -0.7]];
    for (let k = 0; k < 50; k++) {
      states.push([0, 1].map((i) => A[i][0] * states[k][0] + A[i][1] * states[k][1] + B[i] * u[k]));
    }
    const x = Float64Array.from(states.flat());
    const dataset: Dataset = {
      ...countingDataset(),
      inputs: single.inputs,
      trajectories: [{ role: 'fit', steps: 50, x, u }],
    };
    const [run] = toCoordinates(dataset, single, delays(1, 1)).trajectories;
    const trace = A[0][0] + A[1][1];
    const determinant = A[0][0] * A[1][1] - A[0][1] * A[1][0];
    // The output is the second state: C = [0 1].
    const before = A[1][0] * B[0] + (A[1][1] - trace) * B[1];
    for (let k = 0; k < run.steps; k++) {
      const [now, last, applied] = run.x.subarray(3 * k, 3 * k + 3);
      const next = trace * now - determinant * last + B[1] * run.u[k] + before * applied;
      expect(Math.abs(run.x[3 * (k + 1)] - next)).toBeLessThan(1e-14);
    }
  });
});

describe('the tracker of a running loop', () => {
  it('gives the rows of the dataset bit for bit once its history is filled, for any lags (twin)', () => {
    const lag = fc.integer({ min: 0, max: 4 });
    fc.assert(
      fc.property(lag, lag, (outputLags, inputLags) => {
        const settings = delays(outputLags, inputLags);
        const [run] = toCoordinates(countingDataset(9), plant, settings).trajectories;
        const skip = Math.max(outputLags, inputLags);
        const tracker = createCoordinateTracker(settings, plant);
        const nx = run.x.length / (run.steps + 1);
        for (let pass = 0; pass < 2; pass++) {
          for (let k = 0; k <= 9; k++) {
            const { x, filled } = tracker.measure([k / 1000, k + 10 * (k / 1000)]);
            expect(filled).toBe(k >= skip);
            if (filled) expect(x).toEqual(run.x.slice((k - skip) * nx, (k - skip + 1) * nx));
            tracker.apply([100 + k, 200 + k]);
          }
          tracker.reset();
        }
      }),
      { seed: 1, numRuns: 30 },
    );
  });

  it('lets the first measurement and the operating input stand in for what lies before the beginning', () => {
    const tracker = createCoordinateTracker(delays(2, 2), plant);
    expect(tracker.measure([7, 8])).toEqual({
      x: Float64Array.of(7, 8, 7, 8, 7, 8, 0.5, -0.5, 0.5, -0.5),
      filled: false,
    });
    tracker.apply([1, 2]);
    expect(Array.from(tracker.measure([9, 6]).x)).toEqual([9, 6, 7, 8, 7, 8, 1, 2, 0.5, -0.5]);
    tracker.apply([3, 4]);
    tracker.reset();
    expect(Array.from(tracker.measure([1, 1]).x)).toEqual([1, 1, 1, 1, 1, 1, 0.5, -0.5, 0.5, -0.5]);
  });

  it('with state gives the measured state, filled from the first sample', () => {
    const tracker = createCoordinateTracker({ read: 'state', outputLags: 3, inputLags: 3 }, plant);
    expect(tracker.measure([0.1, 0.2])).toEqual({ x: Float64Array.of(0.1, 0.2), filled: true });
    tracker.apply([1, 2]);
    tracker.reset();
    expect(Array.from(tracker.measure([0.3, 0.4]).x)).toEqual([0.3, 0.4]);
  });
});

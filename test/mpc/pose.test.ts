import { describe, expect, it } from 'vitest';
import { fillBlocks, poseProblem } from '../../src/mpc/pose.ts';
import type { ControllerSettings } from '../../src/mpc/settings.ts';
import { fromRows, identity, toRows } from '../../src/numerics/matrix.ts';
import { linearPredictor } from './linearProblem.ts';

/** Two states which are the outputs y1, y2; inputs u1, u2 in [−1, 1], the second with a rate limit of 5 a second. */
const predictor = (() => {
  const plain = linearPredictor(identity(2), identity(2), identity(2), 0.1);
  return { ...plain, inputs: plain.inputs.map((input, j) => (j === 1 ? { ...input, rate: 5 } : input)) };
})();

const settings: ControllerSettings = {
  horizon: 7,
  blocks: [1],
  track: {},
  move: {},
  level: {},
  terminal: 'none',
  preview: true,
  delay: null,
  disturbanceGain: 0.1,
  inputLimits: {},
  rateLimits: {},
  outputLimits: [],
};

describe('the problem posed from names', () => {
  it('tracks every output with 1, weighs moves with 0.02 and levels with 0 when the study says nothing', () => {
    const { Q, R, S, inputLimits, rateLimits, delay } = poseProblem(settings, predictor, 3);
    expect(toRows(Q)).toEqual(toRows(identity(2)));
    expect(toRows(R)).toEqual([
      [0.02, 0],
      [0, 0.02],
    ]);
    expect(S.data.every((value) => value === 0)).toBe(true);
    expect(inputLimits).toEqual({ min: [-1, -1], max: [1, 1] });
    expect(rateLimits).toEqual([Number.POSITIVE_INFINITY, 5]);
    expect(delay).toBe(3);
  });

  it('puts each named weight on its own channel; once an output is named the others are not tracked', () => {
    const { Q, R, S } = poseProblem(
      { ...settings, track: { y2: 3 }, move: { u2: 0.5 }, level: { u1: 0.1 } },
      predictor,
      0,
    );
    expect(Q.data).toEqual(fromRows([[0, 0, 0, 3]]).data);
    expect(R.data).toEqual(fromRows([[0.02, 0, 0, 0.5]]).data);
    expect(S.data).toEqual(fromRows([[0.1, 0, 0, 0]]).data);
  });

  it('takes the tighter of the limits of the plant and of the study', () => {
    const { inputLimits, rateLimits } = poseProblem(
      {
        ...settings,
        inputLimits: { u1: { min: -0.5, max: 2 }, u2: { min: -3, max: 0.2 } },
        rateLimits: { u1: 4, u2: 9 },
      },
      predictor,
      0,
    );
    expect(inputLimits).toEqual({ min: [-0.5, -1], max: [1, 0.2] });
    expect(rateLimits).toEqual([4, 5]);
  });

  it('makes a hard limit of infinite weight, and leaves out limits on outputs that a rival cannot read', () => {
    const limit = { min: -0.3, max: 0.4, weight: 1e4, fromStep: 2 };
    const { outputLimits } = poseProblem(
      {
        ...settings,
        outputLimits: [
          { ...limit, output: 'y2', hard: true },
          { ...limit, output: 'y1', hard: false },
          { ...limit, output: 'y9', hard: true },
        ],
      },
      predictor,
      0,
    );
    expect(outputLimits).toEqual([
      { ...limit, output: 1, weight: Number.POSITIVE_INFINITY },
      { ...limit, output: 0 },
    ]);
  });

  it.each([
    [[1], 4, [1, 1, 1, 1]],
    [[1, 2, 4], 13, [1, 2, 4, 4, 2]],
    [[5], 3, [3]],
    [[1, 1], 1, [1]],
  ])('repeats the last of the blocks %j and cuts it to a horizon of %i', (lengths, horizon, blocks) => {
    expect(fillBlocks(lengths, horizon)).toEqual(blocks);
  });
});

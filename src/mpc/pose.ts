import { diagonal } from '../numerics/matrix.ts';
import type { Predictor } from '../predictor/predictor.ts';
import type { ControlProblem, OutputLimit } from './problem.ts';
import type { ControllerSettings } from './settings.ts';

/** Weights where the study names none: what is tracked counts 1, a move 0.02, the level of the input nothing. */
const DEFAULT_TRACK = 1;
const DEFAULT_MOVE = 0.02;

/**
 * Turns the settings, which speak of channels by name, into the tracking problem for one predictor. Outputs are tracked
 * with the weights given; those not named are tracked with weight 1 if none at all is named, else not. Limits on outputs
 * that this predictor does not read out (a rival may not) are left out.
 *
 * @param delay input delay to compensate, whole samples.
 */
export function poseProblem(
  settings: ControllerSettings,
  predictor: Predictor,
  delay: number,
): ControlProblem {
  const { inputs, outputs } = predictor;
  const { track, move, level, inputLimits, rateLimits } = settings;
  const untracked = Object.keys(track).length > 0 ? 0 : DEFAULT_TRACK;
  return {
    predictor,
    horizon: settings.horizon,
    blocks: fillBlocks(settings.blocks, settings.horizon),
    Q: diagonal(outputs.map(({ name }) => track[name] ?? untracked)),
    S: diagonal(inputs.map(({ name }) => level[name] ?? 0)),
    R: diagonal(inputs.map(({ name }) => move[name] ?? DEFAULT_MOVE)),
    terminal: settings.terminal,
    inputLimits: {
      min: inputs.map(({ name, min }) => Math.max(min, inputLimits[name]?.min ?? min)),
      max: inputs.map(({ name, max }) => Math.min(max, inputLimits[name]?.max ?? max)),
    },
    rateLimits: inputs.map(({ name, rate }) =>
      Math.min(rate ?? Number.POSITIVE_INFINITY, rateLimits[name] ?? Number.POSITIVE_INFINITY),
    ),
    outputLimits: settings.outputLimits.flatMap((limit): OutputLimit[] => {
      const output = outputs.findIndex(({ name }) => name === limit.output);
      if (output < 0) return [];
      const { min, max, fromStep } = limit;
      return [{ output, min, max, weight: limit.hard ? Number.POSITIVE_INFINITY : limit.weight, fromStep }];
    }),
    delay,
    preview: settings.preview,
    disturbanceGain: settings.disturbanceGain,
  };
}

/** Block lengths that sum to `horizon`: the given ones in turn, the last repeated, the final one cut to fit. */
export function fillBlocks(lengths: readonly number[], horizon: number): number[] {
  const blocks: number[] = [];
  let left = horizon;
  for (let i = 0; left > 0; i++) {
    const length = Math.min(left, lengths[Math.min(i, lengths.length - 1)] ?? 1);
    blocks.push(length);
    left -= length;
  }
  return blocks;
}

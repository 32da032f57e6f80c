import type { Random } from '../../numerics/random.ts';
import { binarySequence } from './binarySequence.ts';
import { chirp } from './chirp.ts';
import { multisine } from './multisine.ts';
import { randomSteps } from './randomSteps.ts';

/** The signal shapes of an experiment. */
export const SIGNAL_SHAPES = ['random-steps', 'binary-sequence', 'multisine', 'chirp'] as const;
export type SignalShape = (typeof SIGNAL_SHAPES)[number];

/** What the shapes are drawn from; each shape reads what it needs. */
export interface SignalSettings {
  /** Samples. */
  readonly count: number;
  /** Seconds. */
  readonly sampleTime: number;
  /** Seconds that a step or a bit is held; rounded to whole samples, at least one. */
  readonly hold: number;
  /** Hz. */
  readonly highest: number;
  /** Index of the input and number of inputs. */
  readonly input: number;
  readonly inputs: number;
}

/** A signal of the given shape: `count` values in [−1, 1]. */
export function excite(shape: SignalShape, settings: SignalSettings, random: Random): Float64Array {
  const { count, sampleTime, hold, highest, input, inputs } = settings;
  const held = Math.max(1, Math.round(hold / sampleTime));
  switch (shape) {
    case 'random-steps':
      return randomSteps(count, held, random);
    case 'binary-sequence':
      return binarySequence(count, held, random);
    case 'multisine':
      return multisine(count, sampleTime, highest, input, inputs, random);
    case 'chirp':
      return chirp(count, sampleTime, highest, random);
  }
}

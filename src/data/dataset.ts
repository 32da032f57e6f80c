import type { Channel, InputChannel } from '../plant/plant.ts';

/** What a trajectory is used for: regression, choosing ridge or lifting, or the final assessment. */
export type Role = 'fit' | 'choose' | 'held-out';

/** One run of samples. `x` has `steps + 1` rows, `u` has `steps` rows; `u[k]` leads from `x[k]` to `x[k+1]`. */
export interface Trajectory {
  readonly role: Role;
  readonly steps: number;
  /** (steps + 1) × nx, row-major, physical units. */
  readonly x: Float64Array;
  /** steps × nu, row-major, physical units. */
  readonly u: Float64Array;
  /** Shape of the input signal, if it is known. */
  readonly signal?: string;
  /** Why it is shorter than planned, if it is. */
  readonly cut?: 'diverged' | 'left-range';
}

/** Snapshot data with inputs, split by whole trajectories. */
export interface Dataset {
  /** Seconds. */
  readonly sampleTime: number;
  /** The nx coordinates that `x` holds. */
  readonly coordinates: readonly Channel[];
  readonly inputs: readonly InputChannel[];
  readonly trajectories: readonly Trajectory[];
  /** Trajectories that were cut short, by reason. */
  readonly cuts: { readonly diverged: number; readonly leftRange: number };
}

/** Affine map to about [−1, 1]: `scaled = (physical − centre) / half`. */
export interface ChannelScaling {
  readonly centre: readonly number[];
  readonly half: readonly number[];
}

/** The scaling of coordinates, inputs and outputs that a predictor carries. */
export interface Scaling {
  readonly x: ChannelScaling;
  readonly u: ChannelScaling;
  readonly y: ChannelScaling;
}

/** Number of samples (pairs `x[k]`, `x[k+1]`) in the trajectories of one role. */
export function countSamples(dataset: Dataset, role: Role): number {
  return dataset.trajectories.reduce((sum, t) => sum + (t.role === role ? t.steps : 0), 0);
}

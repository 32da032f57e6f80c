export type SignalShape = 'random-steps' | 'binary-sequence' | 'multisine' | 'chirp';

export interface ExperimentSettings {
  readonly signals: readonly SignalShape[];
  readonly trajectories: number;
  /** Seconds, one trajectory. */
  readonly duration: number;
  /** Share of the input range used, (0, 1]. */
  readonly amplitude: number;
  /** Seconds that a random step or a bit of the sequence is held. */
  readonly hold: number;
  /** Hz: highest frequency of multisine and chirp. */
  readonly highest: number;
  /** Initial states are drawn from the state ranges times this factor; a trajectory that leaves `cutAt` times the ranges is cut. */
  readonly startRegion: number;
  readonly cutAt: number;
  /** Shares of the trajectories; the rest is held out. */
  readonly fitShare: number;
  readonly chooseShare: number;
}

export interface OutputLimitSettings {
  readonly output: string;
  readonly min: number;
  readonly max: number;
  readonly hard: boolean;
  readonly weight: number;
  readonly fromStep: number;
}

export interface ControllerSettings {
  readonly horizon: number;
  /** Lengths of input blocks; the last repeats until the horizon is full. */
  readonly blocks: readonly number[];
  /** Weights by channel name, on deviations divided by the channel's half range. */
  readonly track: Readonly<Record<string, number>>;
  readonly move: Readonly<Record<string, number>>;
  readonly level: Readonly<Record<string, number>>;
  readonly terminal: 'none' | 'riccati';
  readonly preview: boolean;
  /** Delay compensated, whole samples; null = as in the scenario. */
  readonly delay: number | null;
  readonly disturbanceGain: number;
  /** Tighter input and rate limits than the plant's, by input name. */
  readonly inputLimits: Readonly<Record<string, { readonly min: number; readonly max: number }>>;
  readonly rateLimits: Readonly<Record<string, number>>;
  readonly outputLimits: readonly OutputLimitSettings[];
}

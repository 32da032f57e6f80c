/** The predictors compared on a trust curve. */
export type TrustModel = 'lifted' | 're-lifted' | 'plain-linear' | 'linearised' | 'persistence' | 'floor';

/**
 * Prediction error of one model against steps ahead, on held-out trajectories. Infinity where a prediction left the
 * range of numbers (re-lifted and bilinear models may); NaN for the floor where the data are too few to tell it.
 */
export interface TrustSeries {
  readonly model: TrustModel;
  /** RMS over coordinates and starts, each coordinate divided by its half range; one entry a step ahead. */
  readonly rms: readonly number[];
  /** Quantiles of the same normalised error (2-norm over coordinates / √nx) at each step ahead. */
  readonly q50: readonly number[];
  readonly q90: readonly number[];
  readonly q95: readonly number[];
  /** RMS error of each coordinate in its own unit: [coordinate][step ahead]. */
  readonly rmsInUnits: readonly (readonly number[])[];
}

/** Held-out prediction error against steps ahead, beside the simplest rivals. */
export interface TrustCurve {
  /** Steps ahead, 1 … K. */
  readonly steps: readonly number[];
  readonly starts: number;
  readonly series: readonly TrustSeries[];
  /** Tolerance on the normalised RMS error. */
  readonly tolerance: number;
  /** Largest step ahead up to which the lifted error stays within the tolerance; 0 if none. */
  readonly trustedSteps: number;
  /**
   * Does lifting help? `ratio` = lifted over plain-linear RMS, mean over the controller's horizon; `upTo` = the last
   * step of the unbroken run from the first step at which lifted is better by at least 5 %.
   */
  readonly lifting: { readonly helps: boolean; readonly ratio: number; readonly upTo: number };
  /** Mean ratio of lifted to the floor over the horizon, where it is known: how much a better dictionary could still gain. NaN if nowhere. */
  readonly ratioToFloor: number;
}

/** Eigenvalues of `A` and what they say. */
export interface Spectrum {
  readonly real: readonly number[];
  readonly imaginary: readonly number[];
  readonly radius: number;
  /**
   * Seconds, of the modes that show in the states' step response: the smallest `1/|s|`, `s = ln λ / Ts` (oscillation
   * included), for the sample-time caution, and the largest time constant of decay; Infinity where there is no such mode.
   */
  readonly fastest: number;
  readonly slowest: number;
}

import type { Scaling } from '../data/dataset.ts';
import type { Lifting } from '../lift/lifting.ts';
import type { Matrix } from '../numerics/matrix.ts';
import type { Channel, InputChannel } from '../plant/plant.ts';

/** How the regression was done and what it is worth. */
export interface FitSummary {
  /** `gram`: normal equations, streamed. `orthogonal`: QR of the stacked regressor. `given`: not regressed. */
  readonly route: 'gram' | 'orthogonal' | 'given';
  /** Why this route: shape and conditioning in one sentence's worth of numbers, made into words by `findings`. */
  readonly samples: number;
  /** 2-norm condition number of the regressor `[Z; U]` with standardised rows, at most 1/ε. */
  readonly condition: number;
  /** Decimal digits lost to conditioning by the route taken. */
  readonly digitsLost: number;
  /** On regressors of mean square one, times the number of samples; the constant is not penalised. */
  readonly ridge: number;
  /** Ridges tried and their multi-step error on the choose split; empty when the ridge was given. */
  readonly ridgesTried: readonly { readonly ridge: number; readonly error: number }[];
  /** Numerical rank of the regressor and its size; `dependent` names functions or inputs that others express. */
  readonly rank: number;
  readonly regressors: number;
  readonly dependent: readonly string[];
  /**
   * RMS one-step residual of each lifted function on the fit split, relative to its RMS; the Gram route does not resolve
   * it below about 1e-7.
   */
  readonly residuals: readonly number[];
}

/**
 * A lifted predictor in scaled coordinates: `z⁺ = A z + B u (+ Σᵢ uᵢ Nᵢ z)`, `y = C z`, `z = psi(x)`.
 * Everything scaled by `scaling`; nothing outside the predictor sees scaled numbers unlabelled.
 */
export interface Predictor {
  readonly form: 'linear' | 'bilinear';
  /** Seconds. */
  readonly sampleTime: number;
  /** The nx channels that the lifting reads. */
  readonly coordinates: readonly Channel[];
  readonly inputs: readonly InputChannel[];
  readonly outputs: readonly Channel[];
  readonly scaling: Scaling;
  readonly lifting: Lifting;
  /** nz × nz. */
  readonly A: Matrix;
  /** nz × nu. */
  readonly B: Matrix;
  /** ny × nz: a selection. */
  readonly C: Matrix;
  /** nu matrices nz × nz; empty for the linear form. */
  readonly N: readonly Matrix[];
  readonly fit: FitSummary;
}

export interface PredictorSettings {
  readonly form: 'linear' | 'bilinear';
  readonly route: 'auto' | 'gram' | 'orthogonal';
  /** A fixed ridge, or null to choose it on the choose split. */
  readonly ridge: number | null;
  /** Normalised RMS error that still counts as trusted. */
  readonly tolerance: number;
}

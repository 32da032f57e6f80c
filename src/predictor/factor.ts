import type { Matrix } from '../numerics/matrix.ts';

/**
 * The least-squares problem `min ‖W θ − Y‖²_F + M ρ ‖θ_s‖²` with its data compressed to the size of the regressors, so
 * that any ridge ρ is solved without going through the samples again. `W` is M × p, `Y` is M × q; `θ_s` are the
 * coefficients of columns standardised to mean square one; the constant column is not penalised.
 */
export interface RegressionFactor {
  readonly route: 'gram' | 'orthogonal';
  readonly samples: number;
  /** Singular values of the standardised regressor over √M, descending, p entries. */
  readonly singular: Float64Array;
  /** Singular values below this share of the largest are noise of the route and count as zero. */
  readonly cutoff: number;
  readonly rank: number;
  /** Indices of regressors that earlier ones express; `p − rank` of them. */
  readonly dependent: readonly number[];
  /** `θ(ρ)`, p × q, for columns as they are. With deficient rank and ρ = 0 the one of least `‖θ_s‖`. */
  readonly solve: (ridge: number) => Matrix;
  /** For each target the sum of squares `‖W θ − y‖²`, q entries. */
  readonly residualSquares: (theta: Matrix) => Float64Array;
  /** For each target `‖y‖²`, q entries. */
  readonly targetSquares: Float64Array;
}

/** 2-norm condition number; what double precision cannot tell from infinite reads 1/ε. */
export function conditionOf(factor: RegressionFactor): number {
  const { singular } = factor;
  if (singular.length === 0) return 1;
  const smallest = singular[singular.length - 1];
  if (!(smallest > 0)) return 1 / Number.EPSILON;
  return Math.min(singular[0] / smallest, 1 / Number.EPSILON);
}

/**
 * Decimal digits that conditioning costs: `log₁₀ κ` by the orthogonal route, twice that by the normal equations, at most
 * 16; κ is that of the problem solved, after the ridge and the cut-off.
 */
export function digitsLostWith(factor: RegressionFactor, ridge: number): number {
  const { singular, rank, route } = factor;
  if (rank === 0) return 0;
  const smallest = singular[rank - 1];
  const condition = Math.sqrt((singular[0] ** 2 + ridge) / (smallest ** 2 + ridge));
  return Math.min(16, (route === 'gram' ? 2 : 1) * Math.log10(condition));
}

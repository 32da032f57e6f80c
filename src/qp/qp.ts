import type { Matrix } from '../numerics/matrix.ts';

/**
 * The part of a quadratic program that stays the same from step to step:
 * minimise `½ xᵀHx + qᵀx + ½ Σᵢ eᵢ² / softnessᵢ` subject to `lower ≤ G x + e ≤ upper`, with `eᵢ = 0` on every hard row
 * (`softnessᵢ = 0`). A soft row is thus a hard one with an implicit slack of weight `1 / softnessᵢ`: no variable is added.
 */
export interface QpStructure {
  /** n × n, symmetric positive definite. */
  readonly H: Matrix;
  /** m × n. */
  readonly G: Matrix;
  /** m entries ≥ 0. */
  readonly softness: Float64Array;
}

export type QpStatus =
  /** The optimality conditions hold to the promised accuracy. */
  | 'optimal'
  /** No point satisfies the hard rows; `certificate` proves it. */
  | 'infeasible'
  /** The iteration limit ended the solve; `x` is the best point so far. */
  | 'iteration-limit'
  /** NaN or infinite data, or a breakdown that refinement could not mend. */
  | 'failed';

/** Residuals of the optimality conditions, in the user's units (absolute) and relative to the data's size. */
export interface QpResiduals {
  /** ‖H x + q + Gᵀ λ‖∞. */
  stationarity: number;
  /** Largest violation of a row, slack included. */
  primal: number;
  /** Largest multiplier with the wrong sign. */
  dual: number;
  /** Largest |λᵢ| · distance to its bound. */
  complementarity: number;
  /** The worst of the four, each relative to the size of its own terms. */
  relative: number;
}

/** Outcome of one solve. The solver owns it and overwrites it at the next solve. */
export interface QpResult {
  status: QpStatus;
  /** n entries. */
  readonly x: Float64Array;
  /** m entries, positive at an upper bound, negative at a lower one: `H x + q + Gᵀ λ = 0`. */
  readonly multipliers: Float64Array;
  readonly residuals: QpResiduals;
  iterations: number;
  /** For each row: 1 at its upper bound, −1 at its lower bound, 0 inactive. */
  readonly workingSet: Int8Array;
  /**
   * m entries `v`, zero on soft rows, with `Gᵀ v = 0` and `Σ (v⁺ upper − v⁻ lower) < 0`; meaningful when infeasible.
   * All zero when the two bounds of one row cross, or a row without coefficients cannot be 0: that row is the proof.
   */
  readonly certificate: Float64Array;
}

/** A solver prepared for one structure. Only `q`, `lower` and `upper` change between solves. */
export interface QpSolver {
  readonly n: number;
  readonly m: number;
  /** 2-norm condition number of H. */
  readonly condition: number;
  /**
   * @param q n entries. @param lower, upper m entries, ±Infinity where there is no bound; none is modified.
   * Never throws for a numerical outcome. The working set of the last solve is the warm start. A row whose bounds are
   * equal is an equality, its multiplier free in sign; infinite bounds of the wrong sign count as data that failed.
   */
  readonly solve: (q: Float64Array, lower: Float64Array, upper: Float64Array) => QpResult;
  /** Replaces the warm start: one entry a row as in `QpResult.workingSet`; all zero is a cold start. */
  readonly setWorkingSet: (workingSet: Int8Array) => void;
}

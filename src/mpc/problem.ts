import type { Matrix } from '../numerics/matrix.ts';
import type { Predictor } from '../predictor/predictor.ts';

/** Two-sided limit on one output over the horizon, in the output's unit. */
export interface OutputLimit {
  /** Index of the output. */
  readonly output: number;
  readonly min: number;
  readonly max: number;
  /** Weight of the quadratic slack on the violation divided by the output's half range; `Infinity` = hard. */
  readonly weight: number;
  /** First step ahead at which it is imposed, ≥ 1. */
  readonly fromStep: number;
}

/**
 * The tracking problem over a finite horizon, physical units except the weights, which act on deviations divided by
 * the half range of their channel (the map is `predictor.scaling`):
 * `Σ_{k=1}^{N} ‖y_k − r_k‖²_Q + Σ_{k=0}^{N−1} ‖u_k − ū‖²_S + ‖Δu_k‖²_R + terminal + slack`.
 */
export interface ControlProblem {
  readonly predictor: Predictor;
  /** Horizon N in steps. */
  readonly horizon: number;
  /** Lengths of the input blocks, summing to N; all 1 without move blocking. */
  readonly blocks: readonly number[];
  /** Q: ny × ny, S and R: nu × nu, on scaled deviations. */
  readonly Q: Matrix;
  readonly S: Matrix;
  readonly R: Matrix;
  readonly terminal: 'none' | 'riccati';
  readonly inputLimits: { readonly min: readonly number[]; readonly max: readonly number[] };
  /** Unit/s; Infinity where there is none. */
  readonly rateLimits: readonly number[];
  readonly outputLimits: readonly OutputLimit[];
  /** Input delay in whole samples that the controller compensates. */
  readonly delay: number;
  /** Does the controller see the reference ahead (true), or only its present value (false)? */
  readonly preview: boolean;
  /** Gain in (0, 1] of the filter on the lifted one-step residual; 0 = no disturbance estimate. */
  readonly disturbanceGain: number;
}

/** What a row of the condensed QP limits. */
export interface RowLabel {
  readonly kind: 'input' | 'rate' | 'output';
  readonly channel: number;
  /** Step within the horizon. */
  readonly step: number;
}

/**
 * The condensed QP in scaled coordinates: minimise `½ Uᵀ H U + (F θ)ᵀ U` subject to
 * `Wl + E θ ≤ G U ≤ Wu + E θ`, `θ = (z, u_prev, r, d, 1)`: lifted state (nz), last input (nu), reference (N·ny, stage by
 * stage), disturbance (nz), one constant.
 */
export interface CondensedQp {
  readonly N: number;
  readonly nu: number;
  readonly ny: number;
  readonly nz: number;
  /** Number of free moves times nu. */
  readonly n: number;
  readonly m: number;
  readonly ntheta: number;
  /** Start of each part within θ. */
  readonly theta: {
    readonly z: number;
    readonly uPrev: number;
    readonly r: number;
    readonly d: number;
    readonly one: number;
  };
  /** n × n. */
  readonly H: Matrix;
  /** n × ntheta. */
  readonly F: Matrix;
  /** m × n. */
  readonly G: Matrix;
  /** m × ntheta. */
  readonly E: Matrix;
  readonly Wl: Float64Array;
  readonly Wu: Float64Array;
  readonly softness: Float64Array;
  readonly rows: readonly RowLabel[];
  readonly blocks: readonly number[];
  /** 2-norm condition number of H. */
  readonly condition: number;
}

/** Everything the online controller needs, and all that is exported. */
export interface ControllerDesign {
  readonly problem: ControlProblem;
  readonly qp: CondensedQp;
  /** Unconstrained law of the first move in scaled coordinates: `u_0 = −K θ`, nu × ntheta. */
  readonly K: Matrix;
  /** Terminal weight on `(z_N − z_s, u_{N−1} − u_s)`, (nz + nu) square; zero when there is none. Replaces Q at step N. */
  readonly P: Matrix;
  /** Steady-state target: `z_s = Tz (r_N, d, 1)`, nz × (ny + nz + 1); `u_s = Tu (r_N, d, 1)`, nu × (ny + nz + 1). */
  readonly Tz: Matrix;
  readonly Tu: Matrix;
  /** Facts that cautions are made from. */
  readonly notes: {
    /** Lifted modes that the input cannot move and that were clipped for the terminal weight. */
    readonly clippedModes: number;
    /** Residual of the Riccati equation relative to ‖P‖; 0 without terminal weight. */
    readonly riccatiResidual: number;
    /** False when the terminal weight was asked for and left out, because its equation has no stabilising solution. */
    readonly riccatiConverged: boolean;
  };
}

import type { Fallback } from '../mpc/controller.ts';
import type { QpStatus } from '../qp/qp.ts';

/** A closed loop run against the true plant. Physical units; row-major arrays. */
export interface LoopRecord {
  readonly controller: string;
  readonly sampleTime: number;
  /** Samples that were run; fewer than planned when the plant left all bounds. */
  readonly steps: number;
  readonly diverged: boolean;
  readonly nx: number;
  readonly nu: number;
  readonly ny: number;
  /** (steps + 1) × nx and (steps + 1) × ny: true state and output at the samples. */
  readonly x: Float64Array;
  readonly y: Float64Array;
  /** (steps + 1) × ny: reference at sample k. */
  readonly reference: Float64Array;
  /** steps × nu: what the controller sent, and what reached the plant (delayed, limited by the actuator, disturbed). */
  readonly u: Float64Array;
  readonly applied: Float64Array;
  /** Points between samples at which the outputs are also kept, per sample (the sample itself included). */
  readonly fine: number;
  /** (steps · fine + 1) × ny. */
  readonly yFine: Float64Array;
  readonly status: readonly QpStatus[];
  readonly fallback: readonly Fallback[];
  readonly iterations: readonly number[];
  /** Share of steps at which a coordinate lay outside the region of the fitting data. */
  readonly outsideData: number;
  /** Stage cost summed over the run, by term, on scaled deviations: the controller's own weights on true signals. */
  readonly cost: {
    readonly tracking: number;
    readonly level: number;
    readonly move: number;
    readonly excess: number;
    readonly total: number;
  };
}

/** How often and how badly one limit was broken. */
export interface LimitReport {
  readonly kind: 'output' | 'input' | 'rate';
  readonly channel: string;
  readonly unit: string;
  readonly min: number;
  readonly max: number;
  /** Separate excursions. */
  readonly count: number;
  /** Share of time, 0 … 1. */
  readonly share: number;
  /** Worst excess in `unit` and relative to the channel's range. */
  readonly worst: number;
  readonly worstOfRange: number;
  /** Longest excursion and start of the first, seconds; `first` is null when there is none. */
  readonly longest: number;
  readonly first: number | null;
}

/** Tracking figures of one output. */
export interface TrackingReport {
  readonly output: string;
  readonly unit: string;
  /** RMS of y − r over the run. */
  readonly rms: number;
  readonly worst: number;
  /** Largest overshoot after a step of the reference, % of that step; null without a step. */
  readonly overshoot: number | null;
  /** Longest time to stay within 2 % of the step, seconds; null without a step or when one never settles. */
  readonly settling: number | null;
  /** Steps of the reference, and how many of them the output settled to before the next one. */
  readonly referenceSteps: number;
  readonly settled: number;
  /** Mean error over the last fifth of the last constant stretch of the reference; null without one. */
  readonly offset: number | null;
}

/** Input effort of one input. */
export interface EffortReport {
  readonly input: string;
  readonly unit: string;
  readonly rms: number;
  /** Largest |Δu| / Ts. */
  readonly worstRate: number;
  /** Share of steps at a limit. */
  readonly atLimit: number;
  /** Sign changes of Δu per second beyond 1 % of the range: chatter. */
  readonly reversals: number;
}

/** The closed loop in figures. */
export interface LoopReport {
  readonly limits: readonly LimitReport[];
  readonly tracking: readonly TrackingReport[];
  readonly effort: readonly EffortReport[];
  readonly notOptimal: number;
  readonly iterations: { readonly median: number; readonly q95: number; readonly worst: number };
}

import type { QpStatus } from '../qp/qp.ts';

/** What was applied when the optimum was not to be had. */
export type Fallback = 'none' | 'shifted-plan' | 'held';

/** One decision of the controller, physical units. */
export interface ControlStep {
  /** Input to send now, nu entries; it reaches the plant `delay` samples later. */
  readonly u: Float64Array;
  readonly status: QpStatus;
  readonly fallback: Fallback;
  readonly iterations: number;
  /** Predicted outputs y_1 … y_N after the delay, N × ny, and planned inputs, N × nu; physical units. */
  readonly plannedOutputs: Float64Array;
  readonly plannedInputs: Float64Array;
}

/** The online controller: keeps the disturbance estimate, the queued inputs and the warm start. */
export interface Controller {
  /**
   * @param x measured coordinates, nx, physical.
   * @param reference (delay + N) × ny rows, physical: row i is the reference i + 1 samples ahead; without preview all rows equal the first.
   */
  readonly step: (x: ArrayLike<number>, reference: Float64Array) => ControlStep;
  readonly reset: () => void;
}

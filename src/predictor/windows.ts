import type { Dataset, Role, Scaling } from '../data/dataset.ts';
import { scaleInto } from './regressors.ts';

/** Stretches of `steps` samples cut from trajectories, scaled; arrays are row-major, one window after another. */
export interface Windows {
  readonly count: number;
  readonly steps: number;
  readonly nx: number;
  readonly nu: number;
  /** count × nx: the state at the start. */
  readonly start: Float64Array;
  /** count × steps × nu: the inputs from the start on. */
  readonly inputs: Float64Array;
  /** count × steps × nx: the states 1 … steps ahead. */
  readonly states: Float64Array;
}

/** The length in steps that half of a role's trajectories reach; 0 when there is none. */
export function typicalLength(dataset: Dataset, role: Role): number {
  const lengths = dataset.trajectories.filter((t) => t.role === role).map((t) => t.steps);
  lengths.sort((a, b) => b - a);
  return lengths[Math.floor((lengths.length - 1) / 2)] ?? 0;
}

/**
 * At most `limit` windows of the role's trajectories, evenly spaced over all possible starts. A window never spans two
 * trajectories; those shorter than `steps` give none.
 */
export function cutWindows(
  dataset: Dataset,
  role: Role,
  scaling: Scaling,
  steps: number,
  limit: number,
): Windows {
  const long = dataset.trajectories.filter((t) => t.role === role && t.steps >= steps && steps > 0);
  const available = long.reduce((sum, t) => sum + t.steps - steps + 1, 0);
  const count = Math.min(available, limit);
  const nx = dataset.coordinates.length;
  const nu = dataset.inputs.length;
  const windows: Windows = {
    count,
    steps,
    nx,
    nu,
    start: new Float64Array(count * nx),
    inputs: new Float64Array(count * steps * nu),
    states: new Float64Array(count * steps * nx),
  };
  let trajectory = 0;
  let before = 0;
  for (let w = 0; w < count; w++) {
    const index = Math.floor(((w + 0.5) * available) / count);
    while (index - before >= long[trajectory].steps - steps + 1) {
      before += long[trajectory].steps - steps + 1;
      trajectory++;
    }
    const { x, u } = long[trajectory];
    const k = index - before;
    scaleInto(windows.start, w * nx, x, k * nx, scaling.x);
    for (let j = 0; j < steps; j++) {
      scaleInto(windows.inputs, (w * steps + j) * nu, u, (k + j) * nu, scaling.u);
      scaleInto(windows.states, (w * steps + j) * nx, x, (k + j + 1) * nx, scaling.x);
    }
  }
  return windows;
}

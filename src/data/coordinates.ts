import {
  type Channel,
  type InputChannel,
  nominalParameters,
  type OutputChannel,
  type Plant,
  readOutputs,
} from '../plant/plant.ts';
import type { Dataset, Trajectory } from './dataset.ts';

/** What the lifting reads: the whole state, or delayed outputs and inputs when the state is not measured. */
export interface CoordinateSettings {
  readonly read: 'state' | 'delays';
  /** For `delays`: y_k … y_{k − outputLags} and u_{k−1} … u_{k − inputLags}. */
  readonly outputLags: number;
  readonly inputLags: number;
}

/**
 * The channels of the coordinates: the states, or `y`, `y[-1]`, …, `u[-1]`, …: the present outputs, then the outputs one
 * sample ago and so on, then the inputs of the last sample and so on, each with its own unit and range.
 */
export function listCoordinates(plant: Plant, settings: CoordinateSettings): readonly Channel[] {
  if (settings.read === 'state') return plant.states;
  const { outputLags, inputLags } = settings;
  return [
    ...Array.from({ length: outputLags + 1 }, (_, lag) => plant.outputs.map((y) => delayed(y, lag))).flat(),
    ...Array.from({ length: inputLags }, (_, i) => plant.inputs.map((u) => delayed(u, i + 1))).flat(),
  ];
}

function delayed({ name, unit, min, max }: OutputChannel | InputChannel, lag: number): Channel {
  return { name: lag === 0 ? name : `${name}[-${lag}]`, unit, min, max };
}

/** Samples of history that one coordinate vector needs besides the present. */
function historyOf({ outputLags, inputLags }: CoordinateSettings): number {
  return Math.max(outputLags, inputLags);
}

/**
 * The same experiment in the coordinates that are lifted. With `state` it is `dataset` itself. With `delays` each trajectory
 * loses the `max(outputLags, inputLags)` samples that its first coordinates look back on, the inputs staying aligned; one
 * that has no step left is left out. Outputs are computed with nominal parameters.
 *
 * @param dataset in the plant's states.
 */
export function toCoordinates(dataset: Dataset, plant: Plant, settings: CoordinateSettings): Dataset {
  if (settings.read === 'state') return dataset;
  const coordinates = listCoordinates(plant, settings);
  const skip = historyOf(settings);
  return {
    ...dataset,
    coordinates,
    trajectories: dataset.trajectories
      .filter(({ steps }) => steps > skip)
      .map((trajectory) => delayTrajectory(trajectory, plant, settings, coordinates.length)),
  };
}

function delayTrajectory(
  trajectory: Trajectory,
  plant: Plant,
  settings: CoordinateSettings,
  nx: number,
): Trajectory {
  const { outputLags, inputLags } = settings;
  const [n, ny, nu] = [plant.states.length, plant.outputs.length, plant.inputs.length];
  const p = nominalParameters(plant);
  const y = new Float64Array((trajectory.steps + 1) * ny);
  for (let k = 0; k <= trajectory.steps; k++) {
    y.set(readOutputs(plant, trajectory.x.subarray(k * n, (k + 1) * n), p), k * ny);
  }
  const skip = historyOf(settings);
  const steps = trajectory.steps - skip;
  const x = new Float64Array((steps + 1) * nx);
  for (let row = 0; row <= steps; row++) {
    const k = row + skip;
    let at = row * nx;
    for (let lag = 0; lag <= outputLags; lag++, at += ny) {
      x.set(y.subarray((k - lag) * ny, (k - lag + 1) * ny), at);
    }
    for (let lag = 1; lag <= inputLags; lag++, at += nu) {
      x.set(trajectory.u.subarray((k - lag) * nu, (k - lag + 1) * nu), at);
    }
  }
  return { ...trajectory, steps, x, u: trajectory.u.slice(skip * nu) };
}

/** The coordinates of a running loop from what is measured and applied. */
export interface CoordinateTracker {
  /**
   * Takes the measurement of this sample: the state, or with `delays` the outputs. Call once a sample, before `apply`.
   * @returns the coordinates (nx, physical; overwritten by the next `measure` or `apply`), and whether all their history is
   * measured. Until then the first measurement and the plant's operating input stand in for what lies before the beginning.
   */
  readonly measure: (measured: ArrayLike<number>) => {
    readonly x: Float64Array;
    readonly filled: boolean;
  };
  /** Takes the input that the actuator gives from this sample to the next (delayed and limited as it is), nu entries. */
  readonly apply: (u: ArrayLike<number>) => void;
  /** Forgets all history. */
  readonly reset: () => void;
}

/** Follows the coordinates of a running loop, in the same order as `toCoordinates`. No allocation while it runs. */
export function createCoordinateTracker(settings: CoordinateSettings, plant: Plant): CoordinateTracker {
  if (settings.read === 'state') return createStateTracker(plant.states.length);
  const { outputLags, inputLags } = settings;
  const [ny, nu] = [plant.outputs.length, plant.inputs.length];
  const inputsFrom = (outputLags + 1) * ny;
  const x = new Float64Array(inputsFrom + inputLags * nu);
  const result = { x, filled: false };
  let samples = 0;
  const reset = () => {
    samples = 0;
    for (let lag = 0; lag < inputLags; lag++) x.set(plant.operatingPoint.u, inputsFrom + lag * nu);
  };
  reset();
  return {
    measure: (measured) => {
      if (samples === 0) for (let i = 0; i < inputsFrom; i++) x[i] = measured[i % ny];
      // The oldest output falls off the end.
      else x.copyWithin(ny, 0, outputLags * ny);
      for (let i = 0; i < ny; i++) x[i] = measured[i];
      result.filled = samples >= historyOf(settings);
      samples++;
      return result;
    },
    apply: (u) => {
      if (inputLags === 0) return;
      x.copyWithin(inputsFrom + nu, inputsFrom, inputsFrom + (inputLags - 1) * nu);
      for (let i = 0; i < nu; i++) x[inputsFrom + i] = u[i];
    },
    reset,
  };
}

function createStateTracker(nx: number): CoordinateTracker {
  const result = { x: new Float64Array(nx), filled: true };
  return {
    measure: (measured) => {
      for (let i = 0; i < nx; i++) result.x[i] = measured[i];
      return result;
    },
    apply: () => {},
    reset: () => {},
  };
}

import { decomposeSymmetric } from '../numerics/eigen.ts';
import { type Matrix, zeros } from '../numerics/matrix.ts';
import type { Dataset, Role, Trajectory } from './dataset.ts';

/** Lags of the input over which its richness is measured, each input. */
export const EXCITATION_LAGS = 8;
/** Values of an input closer than this share of its range count as one level. */
const LEVEL_WIDTH = 1e-3;

/** What one coordinate or input visited. */
export interface VisitedRange {
  readonly name: string;
  readonly unit: string;
  readonly min: number;
  readonly max: number;
  /** Width visited over the width of the channel's range; above 1 where the data go beyond it. */
  readonly share: number;
  /** Share of ten equal cells of the range that hold at least one sample: a gap in the middle shows here. */
  readonly cells: number;
}

/** How rich the data of one role are: the numbers that the cautions on excitation are made from. */
export interface Excitation {
  readonly samples: number;
  readonly trajectories: number;
  readonly coordinates: readonly VisitedRange[];
  readonly inputs: readonly (VisitedRange & {
    /** Distinct values, to a thousandth of the range: with two, no nonlinearity in the input can be seen. */
    readonly levels: number;
  })[];
  /**
   * 2-norm condition number of the matrix of the inputs' `EXCITATION_LAGS` last values, deviations from the mean over
   * the half range: Infinity when the input is not persistently exciting of that order (J. Willems, P. Rapisarda,
   * I. Markovsky, B. De Moor, Syst. Control Lett. 54:325–329, 2005), or when no trajectory is that long.
   */
  readonly lagCondition: number;
}

/** Measures the excitation in the trajectories of one role. Cost: samples · (nx + (nu · lags)²). */
export function measureExcitation(dataset: Dataset, role: Role = 'fit'): Excitation {
  const trajectories = dataset.trajectories.filter((trajectory) => trajectory.role === role);
  const nx = dataset.coordinates.length;
  const nu = dataset.inputs.length;
  return {
    samples: trajectories.reduce((sum, { steps }) => sum + steps, 0),
    trajectories: trajectories.length,
    coordinates: dataset.coordinates.map((channel, i) => {
      const columns = trajectories.map(({ x }) => ({ values: x, width: nx, at: i }));
      return visitedRange(channel, columns);
    }),
    inputs: dataset.inputs.map((channel, i) => {
      const columns = trajectories.map(({ u }) => ({ values: u, width: nu, at: i }));
      return { ...visitedRange(channel, columns), levels: countLevels(channel, columns) };
    }),
    lagCondition: conditionOfLags(dataset, trajectories),
  };
}

interface Column {
  readonly values: Float64Array;
  readonly width: number;
  readonly at: number;
}
type NamedRange = Pick<VisitedRange, 'name' | 'unit' | 'min' | 'max'>;

const CELLS = 10;

function visitedRange(channel: NamedRange, columns: readonly Column[]): VisitedRange {
  const range = channel.max - channel.min;
  let min = Number.POSITIVE_INFINITY;
  let max = Number.NEGATIVE_INFINITY;
  const visited = new Set<number>();
  for (const { values, width, at } of columns) {
    for (let k = at; k < values.length; k += width) {
      const value = values[k];
      min = Math.min(min, value);
      max = Math.max(max, value);
      if (value < channel.min || value > channel.max) continue;
      visited.add(Math.min(CELLS - 1, Math.floor(((value - channel.min) / range) * CELLS)));
    }
  }
  const share = max >= min ? (max - min) / range : 0;
  return { name: channel.name, unit: channel.unit, min, max, share, cells: visited.size / CELLS };
}

function countLevels(channel: NamedRange, columns: readonly Column[]): number {
  const width = LEVEL_WIDTH * (channel.max - channel.min);
  const levels = new Set<number>();
  for (const column of columns) {
    for (let k = column.at; k < column.values.length; k += column.width) {
      levels.add(Math.round((column.values[k] - channel.min) / width));
    }
  }
  return levels.size;
}

/** Condition of the lag matrix from the eigenvalues of its Gram matrix: `√(λ_max / λ_min)`. */
function conditionOfLags(dataset: Dataset, trajectories: readonly Trajectory[]): number {
  const nu = dataset.inputs.length;
  const size = EXCITATION_LAGS * nu;
  const half = dataset.inputs.map(({ min, max }) => (max - min) / 2);
  const mean = half.map((_, j) => {
    let sum = 0;
    let count = 0;
    for (const { u } of trajectories) for (let k = j; k < u.length; k += nu, count++) sum += u[k];
    return sum / count;
  });
  const gram: Matrix = zeros(size, size);
  const row = new Float64Array(size);
  let rows = 0;
  for (const { u, steps } of trajectories) {
    for (let k = 0; k + EXCITATION_LAGS <= steps; k++, rows++) {
      for (let i = 0; i < size; i++) row[i] = (u[k * nu + i] - mean[i % nu]) / half[i % nu];
      for (let i = 0; i < size; i++) {
        for (let j = 0; j <= i; j++) gram.data[i * size + j] += row[i] * row[j];
      }
    }
  }
  if (rows < size || !gram.data.every(Number.isFinite)) return Number.POSITIVE_INFINITY;
  const { values } = decomposeSymmetric(gram);
  const smallest = values[0];
  const largest = values[size - 1];
  // Below this the smallest eigenvalue is the rounding of a sum over the rows and means nothing.
  return smallest > largest * size * Number.EPSILON
    ? Math.sqrt(largest / smallest)
    : Number.POSITIVE_INFINITY;
}

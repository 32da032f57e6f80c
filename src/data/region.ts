import type { ChannelScaling, Dataset, Role, Trajectory } from './dataset.ts';

/** Data points kept as the region's skeleton, and others that its reach is measured with. */
const SKELETON = 800;
const PROBES = 1600;
/** Share of the data's own points that may lie beyond the reach. */
const MISS = 0.01;

/** Where the data lie: a box, and a cloud of points with the distance to which it reaches. */
export interface DataRegion {
  readonly nx: number;
  readonly scaling: ChannelScaling;
  /** Smallest and largest of each coordinate, physical units. */
  readonly min: readonly number[];
  readonly max: readonly number[];
  /** Scaled points of the data, rows of nx. */
  readonly points: Float64Array;
  /** Scaled distance to the nearest point beyond which a state counts as outside. */
  readonly reach: number;
}

/**
 * The region of the data of one role, by two measures: the box, and the distance to the nearest of at most 800 points
 * spread evenly over the samples.
 *
 * The reach is the split-conformal quantile of that distance over other samples of the same data, `k = ⌈(n + 1)(1 − α)⌉`-th
 * smallest, α = 0.01: were the samples independent, a new one would fall beyond it with probability ≤ α (V. Vovk,
 * A. Gammerman, G. Shafer, Algorithmic Learning in a Random World, 2005); along trajectories that holds roughly. With too
 * few samples for it the reach is infinite and the box alone decides.
 * Cost: 1600 · 800 · nx once, 800 · nx a question.
 */
export function describeRegion(dataset: Dataset, role: Role = 'fit'): DataRegion {
  const nx = dataset.coordinates.length;
  const trajectories = dataset.trajectories.filter((trajectory) => trajectory.role === role);
  const scaling = {
    centre: dataset.coordinates.map(({ min, max }) => (min + max) / 2),
    half: dataset.coordinates.map(({ min, max }) => (max - min) / 2),
  };
  const min = new Array<number>(nx).fill(Number.POSITIVE_INFINITY);
  const max = new Array<number>(nx).fill(Number.NEGATIVE_INFINITY);
  for (const { x } of trajectories) {
    for (let k = 0; k < x.length; k++) {
      min[k % nx] = Math.min(min[k % nx], x[k]);
      max[k % nx] = Math.max(max[k % nx], x[k]);
    }
  }
  const { points, probes } = spreadPoints(trajectories, scaling);
  const box = { nx, scaling, min, max, points };
  const distances = probes.map((probe) => nearestDistance(points, nx, probe)).sort((a, b) => a - b);
  const k = Math.ceil((distances.length + 1) * (1 - MISS));
  return { ...box, reach: distances[k - 1] ?? Number.POSITIVE_INFINITY };
}

/** Is a state (nx, physical) outside the region of the data? A state that is not finite is. */
export function outsideRegion(region: DataRegion, x: ArrayLike<number>): boolean {
  const { nx, scaling, min, max, points, reach } = region;
  const scaled = new Float64Array(nx);
  for (let i = 0; i < nx; i++) {
    if (!(x[i] >= min[i] && x[i] <= max[i])) return true;
    scaled[i] = (x[i] - scaling.centre[i]) / scaling.half[i];
  }
  return nearestDistance(points, nx, scaled) > reach;
}

/** Share of the rows of `path` (rows × nx, physical) that lie outside the region; 0 for no rows. */
export function shareOutside(region: DataRegion, path: Float64Array): number {
  const rows = path.length / region.nx;
  let outside = 0;
  for (let k = 0; k < rows; k++) {
    if (outsideRegion(region, path.subarray(k * region.nx, (k + 1) * region.nx))) outside++;
  }
  return rows > 0 ? outside / rows : 0;
}

/**
 * Scaled points spread evenly over the samples of alternate trajectories: half of the trajectories give the skeleton, the
 * others the probes, because neighbours on one trajectory are nearer to one another than to any new state. One trajectory
 * alone gives both.
 */
function spreadPoints(
  trajectories: readonly Trajectory[],
  scaling: ChannelScaling,
): { points: Float64Array; probes: Float64Array[] } {
  const nx = scaling.centre.length;
  const parity = (odd: number) => trajectories.filter((_, i) => i % 2 === odd);
  const skeleton = everyNth(parity(0), nx, SKELETON);
  const probes = everyNth(parity(trajectories.length > 1 ? 1 : 0), nx, PROBES);
  const scale = (x: Float64Array) => x.map((value, i) => (value - scaling.centre[i]) / scaling.half[i]);
  const points = new Float64Array(skeleton.length * nx);
  for (const [k, x] of skeleton.entries()) points.set(scale(x), k * nx);
  return { points, probes: probes.map(scale) };
}

/** At most `most` states of the trajectories, evenly spread over all their samples. */
function everyNth(trajectories: readonly Trajectory[], nx: number, most: number): Float64Array[] {
  const states = trajectories.flatMap(({ x }) =>
    Array.from({ length: x.length / nx }, (_, k) => x.subarray(k * nx, (k + 1) * nx)),
  );
  const count = Math.min(most, states.length);
  return Array.from({ length: count }, (_, i) => states[Math.floor((i * states.length) / count)]);
}

function nearestDistance(points: Float64Array, nx: number, scaled: ArrayLike<number>): number {
  let nearest = Number.POSITIVE_INFINITY;
  for (let k = 0; k < points.length; k += nx) {
    let sum = 0;
    for (let i = 0; i < nx; i++) sum += (points[k + i] - scaled[i]) ** 2;
    if (sum < nearest) nearest = sum;
  }
  return Math.sqrt(nearest);
}

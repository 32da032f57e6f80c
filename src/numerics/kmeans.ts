import type { Random } from './random.ts';

/** k clusters of points. */
export interface Clusters {
  /** k × dimension, row-major: the mean of each cluster. */
  readonly centres: Float64Array;
  /** Number of points of each cluster, none of them 0. */
  readonly sizes: Int32Array;
  /** Sum of squared distances of the points to their centre. */
  readonly inertia: number;
  readonly iterations: number;
  /** Did the assignment stop changing within the iterations allowed? */
  readonly converged: boolean;
}

/**
 * k-means: Lloyd's iteration from a k-means++ start. A cluster that loses all its points is given the point farthest from
 * its own centre.
 * Source: S. Lloyd, IEEE Trans. Inf. Theory 28:129–137, 1982; D. Arthur, S. Vassilvitskii, "k-means++: the advantages of
 * careful seeding", SODA 2007, 1027–1035. Cost: iterations · points · k · dimension.
 *
 * @param points n × dimension, row-major, finite, not modified. @param k 1 … number of distinct points.
 * @returns null when there are fewer than k distinct points.
 */
export function clusterPoints(
  points: Float64Array,
  dimension: number,
  k: number,
  random: Random,
  mostIterations = 50,
): Clusters | null {
  const n = points.length / dimension;
  const centres = seedCentres(points, dimension, k, random);
  if (centres === null) return null;
  const owner = new Int32Array(n).fill(-1);
  const distances = new Float64Array(n);
  const sizes = new Int32Array(k);
  let iterations = 0;
  let changed = assignPoints(points, dimension, centres, owner, distances);
  while (changed && iterations < mostIterations) {
    iterations++;
    fillEmpty(owner, distances, sizes, k);
    moveCentres(points, dimension, centres, owner, sizes);
    changed = assignPoints(points, dimension, centres, owner, distances);
  }
  fillEmpty(owner, distances, sizes, k);
  if (changed) moveCentres(points, dimension, centres, owner, sizes);
  let inertia = 0;
  for (let i = 0; i < n; i++) inertia += squaredDistance(points, i, centres, owner[i], dimension);
  return { centres, sizes, inertia, iterations, converged: !changed };
}

function squaredDistance(a: Float64Array, i: number, b: Float64Array, j: number, dimension: number): number {
  let sum = 0;
  for (let d = 0; d < dimension; d++) {
    const difference = a[i * dimension + d] - b[j * dimension + d];
    sum += difference * difference;
  }
  return sum;
}

/** Each next centre is a point drawn with probability proportional to its squared distance to the centres so far. */
function seedCentres(
  points: Float64Array,
  dimension: number,
  k: number,
  random: Random,
): Float64Array | null {
  const n = points.length / dimension;
  if (n < k) return null;
  const centres = new Float64Array(k * dimension);
  const nearest = new Float64Array(n).fill(Number.POSITIVE_INFINITY);
  let chosen = Math.floor(random() * n);
  for (let c = 0; ; c++) {
    centres.set(points.subarray(chosen * dimension, (chosen + 1) * dimension), c * dimension);
    if (c === k - 1) return centres;
    let sum = 0;
    for (let i = 0; i < n; i++) {
      nearest[i] = Math.min(nearest[i], squaredDistance(points, i, centres, c, dimension));
      sum += nearest[i];
    }
    if (!(sum > 0)) return null;
    let rest = random() * sum;
    chosen = -1;
    // The last point at a distance stands in when rounding leaves a rest.
    for (let i = 0; i < n; i++) {
      if (!(nearest[i] > 0)) continue;
      chosen = i;
      rest -= nearest[i];
      if (rest < 0) break;
    }
  }
}

/** Gives every point to its nearest centre, the first of equally near ones; did any point change hands? */
function assignPoints(
  points: Float64Array,
  dimension: number,
  centres: Float64Array,
  owner: Int32Array,
  distances: Float64Array,
): boolean {
  const k = centres.length / dimension;
  let changed = false;
  for (let i = 0; i < owner.length; i++) {
    let best = 0;
    let least = Number.POSITIVE_INFINITY;
    for (let c = 0; c < k; c++) {
      const distance = squaredDistance(points, i, centres, c, dimension);
      if (distance < least) {
        least = distance;
        best = c;
      }
    }
    distances[i] = least;
    if (owner[i] !== best) {
      owner[i] = best;
      changed = true;
    }
  }
  return changed;
}

/** Counts the clusters' points, and moves the farthest points of clusters that can spare one into empty ones. */
function fillEmpty(owner: Int32Array, distances: Float64Array, sizes: Int32Array, k: number): void {
  sizes.fill(0);
  for (const c of owner) sizes[c]++;
  for (let c = 0; c < k; c++) {
    if (sizes[c] > 0) continue;
    let farthest = -1;
    for (let i = 0; i < owner.length; i++) {
      if (sizes[owner[i]] > 1 && (farthest < 0 || distances[i] > distances[farthest])) farthest = i;
    }
    sizes[owner[farthest]]--;
    owner[farthest] = c;
    distances[farthest] = 0;
    sizes[c] = 1;
  }
}

function moveCentres(
  points: Float64Array,
  dimension: number,
  centres: Float64Array,
  owner: Int32Array,
  sizes: Int32Array,
): void {
  centres.fill(0);
  for (let i = 0; i < owner.length; i++) {
    for (let d = 0; d < dimension; d++) centres[owner[i] * dimension + d] += points[i * dimension + d];
  }
  for (let c = 0; c < sizes.length; c++) {
    for (let d = 0; d < dimension; d++) centres[c * dimension + d] /= sizes[c];
  }
}

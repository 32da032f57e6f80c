import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { type Clusters, clusterPoints } from '../../src/numerics/kmeans.ts';
import { createRandom } from '../../src/numerics/random.ts';

const pointsOf = (rows: readonly (readonly number[])[]) => Float64Array.from(rows.flat());
const rowsOf = (flat: Float64Array, dimension: number) =>
  Array.from({ length: flat.length / dimension }, (_, i) =>
    Array.from(flat.subarray(i * dimension, (i + 1) * dimension)),
  );
const squared = (a: readonly number[], b: readonly number[]) =>
  a.reduce((sum, value, i) => sum + (value - b[i]) ** 2, 0);

function cluster(
  points: Float64Array,
  dimension: number,
  k: number,
  seed: number,
  mostIterations?: number,
): Clusters {
  const clusters = clusterPoints(points, dimension, k, createRandom(seed), mostIterations);
  if (!clusters) throw new Error('there are fewer distinct points than clusters');
  return clusters;
}

describe('k-means', () => {
  it('finds well-separated clusters exactly: each centre is the mean of its own points, for every seed', () => {
    const random = createRandom(5);
    const places = [
      [0, 0, 0],
      [1000, 0, 0],
      [0, 1000, 0],
      [-1000, 0, 1000],
    ];
    const sizes = [5, 40, 7, 100];
    const own = places.map((place, c) =>
      Array.from({ length: sizes[c] }, () => place.map((value) => value + random() - 0.5)),
    );
    const means = own.map((rows) =>
      [0, 1, 2].map((d) => rows.reduce((sum, row) => sum + row[d], 0) / rows.length),
    );
    const inertia = own.reduce(
      (sum, rows, c) => sum + rows.reduce((part, row) => part + squared(row, means[c]), 0),
      0,
    );
    // A start that misses the cluster of 5 has a chance of about 38/(5·10^6), the others' spread over its distance.
    for (let seed = 1; seed <= 20; seed++) {
      const found = cluster(pointsOf(own.flat()), 3, 4, seed);
      expect(found.converged).toBe(true);
      expect(Math.abs(found.inertia / inertia - 1)).toBeLessThan(1e-12);
      expect(Array.from(found.sizes).sort((a, b) => a - b)).toEqual([5, 7, 40, 100]);
      for (const centre of rowsOf(found.centres, 3)) {
        expect(Math.min(...means.map((mean) => squared(mean, centre)))).toBeLessThan(1e-18);
      }
    }
  });

  it('of one cluster is the mean, of as many as points the points themselves', () => {
    const rows = [
      [1, 2],
      [3, -4],
      [5, 8],
    ];
    const one = cluster(pointsOf(rows), 2, 1, 1);
    expect(Array.from(one.centres)).toEqual([3, 2]);
    expect(one.inertia).toBe(4 + 0 + 0 + 36 + 4 + 36);
    const all = cluster(pointsOf(rows), 2, 3, 1);
    expect(all.inertia).toBe(0);
    expect(rowsOf(all.centres, 2).sort((a, b) => a[0] - b[0])).toEqual(rows);
  });

  it('is null when there are fewer distinct points than clusters', () => {
    const twice = pointsOf([[1], [1], [2], [2]]);
    expect(clusterPoints(twice, 1, 3, createRandom(1))).toBeNull();
    expect(clusterPoints(twice, 1, 2, createRandom(1))?.inertia).toBe(0);
    expect(clusterPoints(new Float64Array(0), 2, 1, createRandom(1))).toBeNull();
  });

  it('converged, it is a fixed point: points are nearest to the mean of their own cluster, none is empty', () => {
    const value = fc.integer({ min: -20, max: 20 });
    const rows = fc.array(fc.tuple(value, value), { minLength: 3, maxLength: 60 });
    fc.assert(
      fc.property(rows, fc.integer({ min: 1, max: 8 }), fc.integer(), (list, k, seed) => {
        const points = pointsOf(list);
        const found = clusterPoints(points, 2, k, createRandom(seed), 200);
        if (new Set(list.map(String)).size < k) {
          expect(found).toBeNull();
          return;
        }
        if (!found) throw new Error('there are enough distinct points');
        expect(found.converged).toBe(true);
        const centres = rowsOf(found.centres, 2);
        const owners = list.map((row) => {
          const distances = centres.map((centre) => squared(row, centre));
          return distances.indexOf(Math.min(...distances));
        });
        const sizes = centres.map((_, c) => owners.filter((owner) => owner === c).length);
        expect(sizes).toEqual(Array.from(found.sizes));
        expect(Math.min(...sizes)).toBeGreaterThan(0);
        centres.forEach((centre, c) => {
          const mine = list.filter((_, i) => owners[i] === c);
          for (const d of [0, 1]) {
            const mean = mine.reduce((sum, row) => sum + row[d], 0) / mine.length;
            expect(Math.abs(mean - centre[d])).toBeLessThan(1e-12);
          }
        });
      }),
      { seed: 1 },
    );
  });

  it('scales with the points by powers of two to the last bit, near 1e±9', () => {
    const random = createRandom(9);
    const points = Float64Array.from({ length: 400 }, () => random());
    const one = cluster(points, 2, 7, 3);
    for (const factor of [2 ** 30, 2 ** -30]) {
      const other = cluster(
        points.map((value) => factor * value),
        2,
        7,
        3,
      );
      expect(other.centres).toEqual(one.centres.map((value) => factor * value));
    }
  });

  it('cut off early says so, its centres still means of clusters that are not empty', () => {
    const random = createRandom(2);
    const points = Float64Array.from({ length: 2000 }, () => random());
    const cut = cluster(points, 2, 30, 1, 1);
    expect(cut.converged).toBe(false);
    expect(cut.iterations).toBe(1);
    expect(Math.min(...cut.sizes)).toBeGreaterThan(0);
    // Means weighted by sizes add up to the sum of all points.
    for (const d of [0, 1]) {
      const sum = rowsOf(points, 2).reduce((part, row) => part + row[d], 0);
      const weighted = rowsOf(cut.centres, 2).reduce((part, row, c) => part + cut.sizes[c] * row[d], 0);
      expect(Math.abs(weighted / sum - 1)).toBeLessThan(1e-12);
    }
    const more = cluster(points, 2, 30, 1, 200);
    expect(more.converged).toBe(true);
    expect(more.inertia).toBeLessThan(cut.inertia);
  });

  it('gives a cluster that loses all its points a new one: no centre is ever left without', () => {
    // Found by search: from some seeds Lloyd's iteration empties a cluster of these.
    const points = pointsOf([
      [0, 0],
      [2, 1],
      [5, 7],
      [6, 11],
      [9, 1],
    ]);
    for (let seed = 1; seed <= 20; seed++) {
      const { sizes, centres } = cluster(points, 2, 3, seed);
      expect(Math.min(...sizes)).toBeGreaterThan(0);
      expect(centres.every(Number.isFinite)).toBe(true);
    }
  });
});

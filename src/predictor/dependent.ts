import type { Matrix } from '../numerics/matrix.ts';

/**
 * Which columns of `T` earlier ones express: the columns are taken in the given order, and one whose part outside
 * the span of those kept so far is at most `cutoff` of its length is named. So states are kept before functions, functions
 * before inputs, and a copy is named rather than its original.
 *
 * @param count how many are to be found (columns less rank). Where the criterion finds fewer, the columns with the
 * smallest remaining parts make up the number.
 * Method: Gram–Schmidt, each column twice (W. Kahan, B. Parlett: twice is enough). Cost `2 r p²`.
 */
export function findDependent(T: Matrix, order: readonly number[], cutoff: number, count: number): number[] {
  if (count <= 0) return [];
  const forced = new Set<number>();
  for (;;) {
    const { dependent, smallest } = sweep(T, order, cutoff, forced);
    if (dependent.length >= count || smallest < 0) return dependent.sort((a, b) => a - b);
    forced.add(smallest);
  }
}

function sweep(T: Matrix, order: readonly number[], cutoff: number, forced: ReadonlySet<number>) {
  const { rows, cols, data } = T;
  const basis: Float64Array[] = [];
  const dependent: number[] = [];
  let smallest = -1;
  let smallestPart = Number.POSITIVE_INFINITY;
  for (const j of order) {
    const v = Float64Array.from({ length: rows }, (_, i) => data[i * cols + j]);
    const length = norm(v);
    for (let pass = 0; pass < 2; pass++) {
      for (const b of basis) {
        let dot = 0;
        for (let i = 0; i < rows; i++) dot += b[i] * v[i];
        for (let i = 0; i < rows; i++) v[i] -= dot * b[i];
      }
    }
    const left = norm(v);
    if (forced.has(j) || !(left > cutoff * length)) {
      dependent.push(j);
      continue;
    }
    if (left / length < smallestPart) {
      smallestPart = left / length;
      smallest = j;
    }
    basis.push(v.map((entry) => entry / left));
  }
  return { dependent, smallest };
}

function norm(v: Float64Array): number {
  let sum = 0;
  for (const entry of v) sum += entry * entry;
  return Math.sqrt(sum);
}

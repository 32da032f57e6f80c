import { MOST_FUNCTIONS } from './limits.ts';
import { refuseLifting } from './unusableLifting.ts';

/** What a degree counts: the order along each axis, or the sum of the orders. */
export type DegreeCounts = 'per-axis' | 'total';

/** Number of multi-indices: `(d + 1)^n` per axis, `C(n + d, d)` in total. */
export function countMultiIndices(nx: number, degree: number, counts: DegreeCounts): number {
  if (counts === 'per-axis') return (degree + 1) ** nx;
  let count = 1;
  for (let i = 1; i <= degree; i++) count = Math.round((count * (nx + i)) / i);
  return count;
}

/**
 * The orders (one an axis) of all products of a degree, by rising sum, within a sum the first axis highest first:
 * (0,0), (1,0), (0,1), (2,0), (1,1), (0,2), …
 * @throws UnusableLiftingError when there are more than a lifting may hold.
 */
export function listMultiIndices(nx: number, degree: number, counts: DegreeCounts): number[][] {
  const count = countMultiIndices(nx, degree, counts);
  if (!(count <= MOST_FUNCTIONS)) {
    refuseLifting(
      'degree',
      `one that gives at most ${MOST_FUNCTIONS} functions of ${nx} coordinates`,
      `${degree} (${counts}: ${count} functions)`,
      counts === 'total' ? 'lower it' : 'lower it, or let it count the total',
    );
  }
  const all: number[][] = [];
  const highest = counts === 'total' ? degree : degree * nx;
  for (let sum = 0; sum <= highest; sum++) extend([], sum, nx, degree, all);
  return all;
}

/** Appends to `all` every way of completing `head` to `nx` orders ≤ `degree` with the rest of the sum. */
function extend(head: readonly number[], rest: number, nx: number, degree: number, all: number[][]): void {
  const axes = nx - head.length;
  if (rest > axes * degree) return;
  if (axes === 0) {
    all.push([...head]);
    return;
  }
  for (let order = Math.min(rest, degree); order >= 0; order--) {
    extend([...head, order], rest - order, nx, degree, all);
  }
}

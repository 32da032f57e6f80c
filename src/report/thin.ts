import type { Point } from './spec.ts';

/** Digits kept of a coordinate: a plot of 3000 pixels needs four. */
const DIGITS = 6;

/** A number as short as a plot needs it; null where there is nothing to plot. */
export function plotted(value: number): number | null {
  return Number.isFinite(value) ? Number(value.toPrecision(DIGITS)) : null;
}

/**
 * A series thinned to at most four points a bucket of equal length in x: the first, the lowest, the highest and the last,
 * in their order, so that no extreme is lost and the line stays connected. Values that are not finite become gaps.
 *
 * @param x ascending. @param buckets half of the pixels that the line will have: with more than two points a pixel the drawing
 * library makes teeth of slopes. Short series are kept whole.
 */
export function thinSeries(x: ArrayLike<number>, y: ArrayLike<number>, buckets = 300): Point[] {
  const point = (k: number): Point => ({ x: Number(x[k].toPrecision(DIGITS)), y: plotted(y[k]) });
  const count = x.length;
  if (count <= 2 * buckets) return Array.from({ length: count }, (_, k) => point(k));
  const perBucket = (x[count - 1] - x[0]) / buckets;
  const points: Point[] = [];
  let start = 0;
  while (start < count) {
    const bucket = Math.min(buckets - 1, Math.floor((x[start] - x[0]) / perBucket));
    let end = start + 1;
    while (end < count && Math.min(buckets - 1, Math.floor((x[end] - x[0]) / perBucket)) === bucket) end++;
    let lowest = start;
    let highest = start;
    let gap = -1;
    for (let k = start; k < end; k++) {
      if (!Number.isFinite(y[k])) gap = k;
      // The negated tests replace a first value that is not finite.
      if (y[k] < y[lowest] || !Number.isFinite(y[lowest])) lowest = k;
      if (y[k] > y[highest] || !Number.isFinite(y[highest])) highest = k;
    }
    const kept = new Set([start, lowest, highest, end - 1]);
    if (gap >= 0) kept.add(gap);
    points.push(...[...kept].sort((a, b) => a - b).map(point));
    start = end;
  }
  return points;
}

/** Cells of its own extent for each of which a cloud keeps one point. */
export interface CloudCells {
  readonly across: number;
  readonly up: number;
}

/**
 * A cloud of points thinned to one for each cell of a grid over its extent, besides the extreme points of both coordinates.
 * What is left covers the same area; points that are not finite are left out.
 */
export function thinCloud(
  points: readonly { readonly x: number; readonly y: number }[],
  { across, up }: CloudCells,
): Point[] {
  const finite = points.filter(({ x, y }) => Number.isFinite(x) && Number.isFinite(y));
  if (finite.length === 0) return [];
  const extreme = (key: 'x' | 'y', sign: 1 | -1) =>
    finite.reduce((best, point) => (sign * point[key] > sign * best[key] ? point : best));
  const [left, right, bottom, top] = [extreme('x', -1), extreme('x', 1), extreme('y', -1), extreme('y', 1)];
  const cell = (value: number, low: number, high: number, cells: number) =>
    high > low ? Math.min(cells - 1, Math.floor(((value - low) / (high - low)) * cells)) : 0;
  const seen = new Set<number>();
  const kept = [left, right, bottom, top];
  for (const point of finite) {
    const at = cell(point.x, left.x, right.x, across) * up + cell(point.y, bottom.y, top.y, up);
    if (seen.has(at)) continue;
    seen.add(at);
    kept.push(point);
  }
  return kept.map(({ x, y }) => ({ x: Number(x.toPrecision(DIGITS)), y: plotted(y) }));
}

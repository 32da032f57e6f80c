/**
 * The `share` quantile of ascending values by linear interpolation between order statistics at `(n − 1) share`
 * (definition 7 of R. J. Hyndman, Y. Fan, "Sample quantiles in statistical packages", Am. Stat. 50:361–365, 1996).
 * NaN when there are no values.
 */
export function quantileOfSorted(sorted: ArrayLike<number>, share: number): number {
  const n = sorted.length;
  if (n === 0) return Number.NaN;
  const at = (n - 1) * share;
  const low = Math.floor(at);
  const rest = at - low;
  const below = sorted[low];
  // Not below + rest · (above − below) when they are equal: two infinite neighbours would give NaN.
  if (!(rest > 0) || sorted[low + 1] === below) return below;
  return below + rest * (sorted[low + 1] - below);
}

/** Several quantiles of unordered values, which are not modified. NaN sorts last, so that it shows in the upper ones. */
export function quantiles(values: ArrayLike<number>, shares: readonly number[]): number[] {
  const sorted = Float64Array.from(values).sort();
  return shares.map((share) => quantileOfSorted(sorted, share));
}

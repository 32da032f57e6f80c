import type { Point, SeriesSpec } from '../spec.ts';
import type { SeriesStyle } from '../style.ts';

type Extras = Partial<SeriesSpec>;

/** A line with a marker on about one point in `every`, counted from `phase`, so that markers of series do not coincide. */
export function lineSeries(
  style: SeriesStyle,
  data: readonly Point[],
  axes: { readonly x: string; readonly y: string },
  markers: { readonly every: number; readonly phase: number } | null,
  extras: Extras = {},
): SeriesSpec {
  const radius = markers
    ? data.map((_, k) =>
        k % markers.every === markers.phase % markers.every && k > 0 && k < data.length - 1 ? 4.5 : 0,
      )
    : 0;
  return {
    label: style.label,
    data,
    xAxisID: axes.x,
    yAxisID: axes.y,
    showLine: true,
    borderColor: style.colour,
    backgroundColor: style.colour,
    borderWidth: style.width,
    borderDash: style.dash,
    borderJoinStyle: 'round',
    pointStyle: markers ? style.marker : false,
    pointRadius: radius,
    ...extras,
  };
}

/** Points without a line. */
export function pointSeries(
  label: string,
  data: readonly Point[],
  axes: { readonly x: string; readonly y: string },
  look: {
    readonly marker: SeriesStyle['marker'];
    readonly radius: number;
    readonly border: string;
    readonly inside: string;
  },
  extras: Extras = {},
): SeriesSpec {
  return {
    label,
    data,
    xAxisID: axes.x,
    yAxisID: axes.y,
    showLine: false,
    borderColor: look.border,
    backgroundColor: look.inside,
    pointBorderColor: look.border,
    pointBackgroundColor: look.inside,
    pointBorderWidth: 1.5,
    borderWidth: 0,
    borderDash: [],
    pointStyle: look.marker,
    pointRadius: look.radius,
    ...extras,
  };
}

/** Smallest and largest finite value, widened by a share of their distance; `fallback` where there is none. */
export function paddedRange(
  values: Iterable<number>,
  share: number,
  fallback: { readonly min: number; readonly max: number },
): { min: number; max: number } {
  let min = Number.POSITIVE_INFINITY;
  let max = Number.NEGATIVE_INFINITY;
  for (const value of values) {
    if (!Number.isFinite(value)) continue;
    min = Math.min(min, value);
    max = Math.max(max, value);
  }
  if (!(max >= min)) return { min: fallback.min, max: fallback.max };
  // A constant gets the room of its own size, or of one.
  const room = max > min ? (max - min) * share : Math.abs(max) || 1;
  return { min: min - room, max: max + room };
}

/** Column `at` of a row-major array with `width` columns. */
export function column(values: Float64Array, width: number, at: number): Float64Array {
  return Float64Array.from({ length: Math.floor(values.length / width) }, (_, k) => values[k * width + at]);
}

import type { Marker } from './style.ts';

/** Numbers of a chart in a table, for readers who cannot see it. */
export interface NumberTable {
  readonly caption: string;
  readonly head: readonly string[];
  readonly rows: readonly (readonly string[])[];
}

/** A point in data coordinates; `y: null` interrupts a line. */
export interface Point {
  readonly x: number;
  readonly y: number | null;
}

/**
 * What is drawn besides the series, in data coordinates of the axes named: the drawing library has no such things, and a
 * description of plain data can be written into the page.
 */
export type Mark =
  /** A shaded stretch between two values of one axis; `hatched` where the signal must not be. */
  | {
      readonly kind: 'band';
      readonly axis: string;
      readonly from: number | null;
      readonly to: number | null;
      readonly colour: string;
      readonly hatched: boolean;
    }
  /** A straight line at one value of an axis, with its name on it. */
  | {
      readonly kind: 'line';
      readonly axis: string;
      readonly at: number;
      readonly colour: string;
      readonly dash: readonly number[];
      readonly width: number;
      /** Nameless lines lie under the series. */
      readonly label: string;
    }
  | {
      readonly kind: 'circle';
      readonly x: string;
      readonly y: string;
      readonly radius: number;
      readonly colour: string;
      readonly dash: readonly number[];
    }
  /** Words beside a point; those that would overlap are moved apart vertically. */
  | {
      readonly kind: 'label';
      readonly x: string;
      readonly y: string;
      readonly at: { readonly x: number; readonly y: number };
      readonly text: string;
      readonly colour: string;
      /** `end`: to the right of the plot; `right`: to the right of the point. */
      readonly place: 'end' | 'right';
    }
  /** Words in the left upper corner of the panel of one y axis. */
  | { readonly kind: 'caption'; readonly axis: string; readonly text: string }
  /** Lines of text in the right upper corner of the plot. */
  | { readonly kind: 'note'; readonly lines: readonly string[] };

/** One series as the drawing library wants it; extra fields pass through. */
export interface SeriesSpec {
  readonly label: string;
  readonly data: readonly Point[];
  readonly xAxisID: string;
  readonly yAxisID: string;
  readonly showLine: boolean;
  readonly borderColor: string;
  readonly backgroundColor: string;
  readonly borderWidth: number;
  readonly borderDash: readonly number[];
  readonly borderJoinStyle?: 'round';
  readonly pointStyle: Marker;
  readonly pointRadius: number | readonly number[];
  readonly pointBorderColor?: string;
  readonly pointBackgroundColor?: string;
  readonly pointBorderWidth?: number;
  readonly stepped?: boolean | 'before' | 'after';
  readonly fill?: string | boolean;
  readonly spanGaps?: boolean;
  /** Left out of the key. */
  readonly unnamed?: boolean;
  readonly order?: number;
}

/** An axis as the drawing library wants it. */
export interface AxisSpec {
  readonly type: 'linear' | 'logarithmic';
  readonly position: 'left' | 'bottom';
  readonly min?: number;
  readonly max?: number;
  readonly title: string;
  /** Share of the height, for axes that stand above one another. */
  readonly weight?: number;
  /** Nothing but room between two panels. */
  readonly gap?: boolean;
}

/**
 * One chart as plain data: the same description is drawn into a PNG and into the page, so that both show the same.
 */
export interface ChartSpec {
  readonly name: string;
  /** What is seen, in one sentence. */
  readonly title: string;
  /** How to read it, in one sentence. */
  readonly reading: string;
  /** What a reader who cannot see it should know, with figures. */
  readonly alternative: string;
  /** Logical pixels at a width of 800. */
  readonly height: number;
  readonly series: readonly SeriesSpec[];
  readonly axes: Readonly<Record<string, AxisSpec>>;
  readonly marks: readonly Mark[];
  /** Logical pixels to the right of the plot for labels at the ends of lines; a narrow view leaves them out. */
  readonly endLabels: number;
  /** Are the lines named at their ends, so that a wide view needs no key? */
  readonly namedAtEnds: boolean;
  /** Same scale on the axes `x` and `y`. */
  readonly equalScales: boolean;
  readonly numbers?: NumberTable;
}

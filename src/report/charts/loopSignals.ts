import type { StudyResult } from '../../findings/studyResult.ts';
import type { LimitReport, LoopRecord } from '../../loop/record.ts';
import type { OutputChannel } from '../../plant/plant.ts';
import type { Point, SeriesSpec } from '../spec.ts';
import { COLOURS } from '../style.ts';
import { plotted, thinSeries } from '../thin.ts';
import { column, lineSeries, pointSeries } from './series.ts';

const REFERENCE_STYLE = {
  label: 'reference',
  colour: COLOURS.reference.light,
  dash: [7, 4],
  marker: false,
  width: 1.75,
} as const;

/** Times of the samples, or of the points between them where `fine` points are kept a sample. */
export function timesOf({ sampleTime }: LoopRecord, count: number, fine = 1): Float64Array {
  return Float64Array.from({ length: count }, (_, k) => (k * sampleTime) / fine);
}

/** Is output `at` led by a reference: has it a tracking weight, or a reference that changes? */
export function isLed({ design, plant, runs }: StudyResult, at: number): boolean {
  const { Q, predictor } = design.problem;
  const own = predictor.outputs.findIndex(({ name }) => name === plant.outputs[at].name);
  if (own >= 0 && Q.data[own * Q.cols + own] > 0) return true;
  const { reference, ny } = runs[0].record;
  const values = column(reference, ny, at);
  return values.some((value) => value !== values[0]);
}

/** The outputs to be drawn: those with a reference or a limit; all when there is none of either. */
export function shownOutputs(result: StudyResult): { readonly output: OutputChannel; readonly at: number }[] {
  const all = result.plant.outputs.map((output, at) => ({ output, at }));
  const limited = new Set(
    result.runs[0].report.limits.filter(({ kind }) => kind === 'output').map(({ channel }) => channel),
  );
  const told = all.filter(({ output, at }) => isLed(result, at) || limited.has(output.name));
  return told.length > 0 ? told : all;
}

/** Joined from sample to sample: a step then takes one sample, which does not show, and a sine is smooth. */
export function referenceSeries(
  record: LoopRecord,
  at: number,
  axis: string,
  extras: Partial<SeriesSpec>,
): SeriesSpec {
  const values = column(record.reference, record.ny, at).subarray(0, record.steps + 1);
  const points = thinSeries(timesOf(record, values.length), values);
  return lineSeries(REFERENCE_STYLE, points, { x: 'x', y: axis }, null, extras);
}

/** One output between the samples too. */
export function fineOutput(record: LoopRecord, at: number): { time: Float64Array; values: Float64Array } {
  const values = column(record.yFine, record.ny, at);
  return { time: timesOf(record, values.length, record.fine), values };
}

/** The stretches of a signal beyond its limits as one line with gaps, and the worst point of each of them. */
export function findExcursions(
  time: Float64Array,
  values: Float64Array,
  { min, max }: Pick<LimitReport, 'min' | 'max'>,
): { readonly beyond: Point[]; readonly worst: Point[] } {
  const excess = (value: number) => Math.max(min - value, value - max);
  const beyond: Point[] = [];
  const worst: Point[] = [];
  let peak: { k: number; by: number } | null = null;
  const point = (k: number): Point => ({ x: Number(time[k].toPrecision(6)), y: plotted(values[k]) });
  for (let k = 0; k <= values.length; k++) {
    const by = k < values.length ? excess(values[k]) : Number.NaN;
    if (by > 0) {
      beyond.push(point(k));
      if (!peak || by > peak.by) peak = { k, by };
    } else if (peak) {
      beyond.push({ x: beyond[beyond.length - 1].x, y: null });
      worst.push(point(peak.k));
      peak = null;
    }
  }
  return { beyond, worst };
}

/** The broken stretches as a thick line, and a triangle at the worst of each. */
export function brokenSeries(
  { beyond, worst }: ReturnType<typeof findExcursions>,
  axis: string,
  extras: Partial<SeriesSpec>,
): SeriesSpec[] {
  const style = {
    label: 'limit broken',
    colour: COLOURS.broken.light,
    dash: [],
    marker: false,
    width: 6,
  } as const;
  const axes = { x: 'x', y: axis };
  const look = {
    marker: 'triangle',
    radius: 5.5,
    border: COLOURS.ink.light,
    inside: COLOURS.broken.light,
  } as const;
  return [
    // Under the signal, so that the signal stays visible on it.
    lineSeries(style, beyond, axes, null, { unnamed: true, order: 8 }),
    pointSeries(style.label, worst, axes, look, { order: -1, ...extras }),
  ];
}

import type { StudyResult } from '../../findings/studyResult.ts';
import type { QpStatus } from '../../qp/qp.ts';
import type { ChartSpec, SeriesSpec } from '../spec.ts';
import { COLOURS, type Marker } from '../style.ts';
import { thinSeries } from '../thin.ts';
import { formatFigure, plural } from '../words.ts';
import { timesOf } from './loopSignals.ts';
import { timeAxis } from './panels.ts';
import { lineSeries, pointSeries } from './series.ts';

const AXES = { x: 'x', y: 'y' } as const;
const ITERATIONS = {
  label: 'iterations',
  colour: COLOURS.lifted.light,
  dash: [],
  marker: false,
  width: 1.75,
} as const;

/** How each outcome other than `optimal` is marked. */
const TROUBLE: Record<Exclude<QpStatus, 'optimal'>, { label: string; marker: Marker; inside: string }> = {
  infeasible: { label: 'infeasible', marker: 'triangle', inside: COLOURS.broken.light },
  'iteration-limit': { label: 'iteration limit', marker: 'rect', inside: COLOURS.paper.light },
  failed: { label: 'failed', marker: 'rectRot', inside: COLOURS.ink.light },
};

/** Iterations of each solve of the lifted controller, and how the solves ended. */
export function solverChart({ runs }: StudyResult): ChartSpec {
  const { record, report } = runs[0];
  const { median, q95, worst } = report.iterations;
  const time = timesOf(record, record.steps);
  const series: SeriesSpec[] = [
    lineSeries(ITERATIONS, thinSeries(time, record.iterations), AXES, null, { stepped: 'before' }),
  ];
  for (const [status, { label, marker, inside }] of Object.entries(TROUBLE)) {
    const at = record.status.flatMap((its, k) => (its === status ? [k] : []));
    if (at.length === 0) continue;
    const points = at.map((k) => ({ x: Number(time[k].toPrecision(6)), y: record.iterations[k] }));
    series.push(
      pointSeries(
        label,
        points,
        AXES,
        { marker, radius: 6, border: COLOURS.ink.light, inside },
        { order: -1 },
      ),
    );
  }
  const how = `median ${formatFigure(median)}, 95 % ${formatFigure(q95)}, worst ${formatFigure(worst)} iterations`;
  const title =
    report.notOptimal === 0
      ? `All ${record.steps} solves are optimal: ${how}`
      : `${plural(report.notOptimal, 'solve')} of ${record.steps} did not reach the optimum: ${how}`;
  const most = Math.max(1, worst, ...record.iterations);
  const end = record.steps * record.sampleTime;
  return {
    name: 'solver',
    title,
    reading:
      'Iterations of the quadratic program at each sample; solves that did not end at the optimum are marked by their outcome.',
    alternative: `${title}. Applied instead of the optimum: ${describeFallbacks(record.fallback)}.`,
    height: 450,
    series,
    axes: {
      x: timeAxis(end),
      y: { type: 'linear', position: 'left', min: 0, max: 1.12 * most, title: 'iterations of one solve' },
    },
    marks: [],
    endLabels: 0,
    namedAtEnds: false,
    equalScales: false,
  };
}

function describeFallbacks(fallback: readonly string[]): string {
  const shifted = fallback.filter((name) => name === 'shifted-plan').length;
  const held = fallback.filter((name) => name === 'held').length;
  if (shifted + held === 0) return 'nothing';
  return `the last plan shifted at ${plural(shifted, 'sample')}, the last input held at ${plural(held, 'sample')}`;
}

import type { LoopRun, StudyResult } from '../../findings/studyResult.ts';
import type { AxisSpec, ChartSpec, Mark, SeriesSpec } from '../spec.ts';
import { RUN_STYLES } from '../style.ts';
import { thinSeries } from '../thin.ts';
import { axisTitle, formatFigure, list, withUnit } from '../words.ts';
import { LIMIT_LABELS, limitMarks } from './limits.ts';
import { fineOutput, isLed, referenceSeries, shownOutputs } from './loopSignals.ts';
import { stackPanels, timeAxis } from './panels.ts';
import { lineSeries, paddedRange } from './series.ts';

/** The lifted controller beside the same controller on the simpler predictors: outputs under the same scenario. */
export function rivalsChart(result: StudyResult): ChartSpec {
  const { runs } = result;
  const panels: Record<string, AxisSpec> = {};
  const series: SeriesSpec[] = [];
  const marks: Mark[] = [];
  const longest = Math.max(...runs.map(({ record }) => record.steps * record.sampleTime));
  for (const [panel, { output, at }] of shownOutputs(result).entries()) {
    const id = `y${at}`;
    const limit = runs[0].report.limits.find(
      ({ kind, channel }) => kind === 'output' && channel === output.name,
    );
    const range = output.max - output.min;
    const near = runs.flatMap(({ record }) =>
      [...fineOutput(record, at).values].filter(
        (y) => y > output.min - 0.5 * range && y < output.max + 0.5 * range,
      ),
    );
    panels[id] = {
      type: 'linear',
      position: 'left',
      title: axisTitle(output),
      weight: 1,
      ...paddedRange([...near, ...(limit ? [limit.min, limit.max] : [])], 0.1, output),
    };
    if (limit) marks.push(...limitMarks(id, longest, limit));
    const unnamed = { unnamed: panel > 0 };
    if (isLed(result, at)) series.push(referenceSeries(runs[0].record, at, id, unnamed));
    // The lifted run last, on top of the others.
    for (const [i, { name, record }] of runs.entries()) {
      const { time, values } = fineOutput(record, at);
      const points = thinSeries(time, values, 300);
      const every = Math.max(1, Math.round(points.length / 9));
      const markers = { every, phase: Math.round((i * every) / runs.length) };
      series.push(lineSeries(RUN_STYLES[name], points, { x: 'x', y: id }, markers, { ...unnamed, order: i }));
    }
  }
  const title = titleOf(runs);
  return {
    name: 'rivals',
    title,
    reading:
      'The same weights, limits and scenario; only the predictor inside the controller differs. A line that leaves the plot or ends early belongs to a loop that went astray.',
    alternative: `${title}. ${list(runs.map(describeRun))}.`,
    height: Math.max(450, 110 + 190 * Object.keys(panels).length),
    series,
    axes: {
      x: timeAxis(longest),
      ...stackPanels(panels),
    },
    marks,
    endLabels: LIMIT_LABELS,
    namedAtEnds: false,
    equalScales: false,
  };
}

function titleOf(runs: readonly LoopRun[]): string {
  const [own, ...others] = runs;
  if (others.length === 0) return 'The lifted controller ran without a rival';
  const compared = others.map(({ name, record }) => {
    const ratio = record.cost.total / own.record.cost.total;
    return record.diverged
      ? `${RUN_STYLES[name].label} diverged`
      : `${RUN_STYLES[name].label} costs ${formatFigure(ratio)} times as much as lifted`;
  });
  return `Under the same scenario ${list(compared)}`;
}

function describeRun({ name, record, report }: LoopRun): string {
  const errors = report.tracking.map(({ output, rms, unit }) => `${output} ${withUnit(rms, unit)} RMS`);
  return `${RUN_STYLES[name].label}: cost ${formatFigure(record.cost.total)}, ${list(errors)}`;
}

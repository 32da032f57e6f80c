import type { StudyResult } from '../../findings/studyResult.ts';
import type { LimitReport } from '../../loop/record.ts';
import type { AxisSpec, ChartSpec, Mark, SeriesSpec } from '../spec.ts';
import { COLOURS, type SeriesStyle } from '../style.ts';
import { thinSeries } from '../thin.ts';
import { axisTitle, list, percent, plural, withUnit } from '../words.ts';
import { LIMIT_LABELS, limitMarks } from './limits.ts';
import {
  brokenSeries,
  findExcursions,
  fineOutput,
  isLed,
  referenceSeries,
  shownOutputs,
  timesOf,
} from './loopSignals.ts';
import { stackPanels, timeAxis } from './panels.ts';
import { column, lineSeries, paddedRange } from './series.ts';

const OUTPUT: SeriesStyle = {
  label: 'output',
  colour: COLOURS.lifted.light,
  dash: [],
  marker: false,
  width: 2.5,
};
const INPUT: SeriesStyle = {
  label: 'input',
  colour: COLOURS.plainLinear.light,
  dash: [],
  marker: false,
  width: 2,
};

/**
 * The lifted controller on the true plant: outputs with their references and limits, below them the inputs with theirs, over
 * one time axis. Outputs are drawn and held against their limits between the samples too.
 */
export function closedLoopChart(result: StudyResult): ChartSpec {
  const { plant, runs } = result;
  const { record, report } = runs[0];
  const panels: Record<string, AxisSpec> = {};
  const series: SeriesSpec[] = [];
  const marks: Mark[] = [];
  const end = record.steps * record.sampleTime;
  const named = new Set<string>();
  /** Each kind of line stands once in the key. */
  const once = (label: string) => {
    const unnamed = named.has(label);
    named.add(label);
    return { unnamed };
  };
  const limitOf = (kind: LimitReport['kind'], channel: string) =>
    report.limits.find((limit) => limit.kind === kind && limit.channel === channel);

  for (const { output, at } of shownOutputs(result)) {
    const id = `y${at}`;
    const limit = limitOf('output', output.name);
    const { time, values } = fineOutput(record, at);
    const led = isLed(result, at);
    const wanted = led ? column(record.reference, record.ny, at).subarray(0, record.steps + 1) : [];
    panels[id] = {
      type: 'linear',
      position: 'left',
      title: axisTitle(output),
      weight: 1,
      ...boundedRange([...values, ...wanted, ...(limit ? [limit.min, limit.max] : [])], output),
    };
    if (limit) marks.push(...limitMarks(id, end, limit));
    if (led) series.push(referenceSeries(record, at, id, once('reference')));
    series.push(lineSeries(OUTPUT, thinSeries(time, values), { x: 'x', y: id }, null, once('output')));
    if (limit) {
      const excursions = findExcursions(time, values, limit);
      if (excursions.worst.length > 0) series.push(...brokenSeries(excursions, id, once('limit broken')));
    }
  }
  for (const [j, input] of plant.inputs.entries()) {
    const id = `u${j}`;
    const limit = limitOf('input', input.name) ?? { ...input };
    const sent = column(record.u, record.nu, j);
    const held = Float64Array.from([...sent, sent[sent.length - 1]]);
    const time = timesOf(record, held.length);
    const room = 0.14 * (limit.max - limit.min);
    panels[id] = {
      type: 'linear',
      position: 'left',
      title: axisTitle(input),
      weight: 0.7,
      ...paddedRange([...held, limit.min - room, limit.max + room], 0, input),
    };
    marks.push(...limitMarks(id, end, limit));
    series.push(
      lineSeries(INPUT, thinSeries(time, held), { x: 'x', y: id }, null, {
        stepped: 'before',
        ...once('input'),
      }),
    );
    const excursions = findExcursions(time, held, limit);
    const rates = rateExcursions(held, time, limitOf('rate', input.name));
    if (excursions.worst.length > 0) series.push(...brokenSeries(excursions, id, once('limit broken')));
    if (rates.worst.length > 0) series.push(...brokenSeries(rates, id, once('limit broken')));
  }
  const title = titleOf(result);
  return {
    name: 'closed-loop',
    title,
    reading:
      'Hatched: where the signal must not be; a thick line and a triangle mark each excursion beyond a limit, between the samples too, and its worst point.',
    alternative: `${title}. ${describeTracking(result)}`,
    height: Math.max(450, 110 + 150 * Object.keys(panels).length),
    series,
    axes: {
      x: timeAxis(end),
      ...stackPanels(panels),
    },
    marks,
    endLabels: LIMIT_LABELS,
    namedAtEnds: false,
    equalScales: false,
  };
}

/** What is to be seen, with room round it; a run that went astray does not flatten the rest beyond three ranges. */
function boundedRange(values: readonly number[], channel: { readonly min: number; readonly max: number }) {
  const { min, max } = paddedRange(values, 0.1, channel);
  const range = channel.max - channel.min;
  return { min: Math.max(min, channel.min - 3 * range), max: Math.min(max, channel.max + 3 * range) };
}

/** Samples at which the input moved faster than allowed; the excursion is drawn on the input itself. */
function rateExcursions(held: Float64Array, time: Float64Array, limit: LimitReport | undefined) {
  if (!limit || limit.count === 0) return { beyond: [], worst: [] };
  const rate = Float64Array.from({ length: held.length }, (_, k) =>
    k > 0 && k < held.length - 1 ? (held[k] - held[k - 1]) / (time[k] - time[k - 1]) : 0,
  );
  // Rounding in a rate that sits on its limit is no excursion.
  const slack = 1e-9 * Math.max(Math.abs(limit.min), Math.abs(limit.max));
  const { worst } = findExcursions(time, rate, { min: limit.min - slack, max: limit.max + slack });
  const at = new Map(Array.from(time, (t, k) => [Number(t.toPrecision(6)), held[k]]));
  return { beyond: [], worst: worst.map(({ x }) => ({ x, y: at.get(x) ?? null })) };
}

function titleOf({ runs }: StudyResult): string {
  const { record, report } = runs[0];
  if (record.diverged)
    return `The loop diverged and was stopped after ${withUnit(record.steps * record.sampleTime, 's')}`;
  const broken = report.limits.filter(({ count }) => count > 0);
  if (broken.length === 0) {
    const followed = report.tracking.map(({ output, rms, unit }) => `${output} to ${withUnit(rms, unit)}`);
    return `The loop follows its reference (RMS error: ${list(followed)}) and breaks no limit`;
  }
  const worst = broken.reduce((a, b) => (b.worstOfRange > a.worstOfRange ? b : a));
  const unit = worst.kind === 'rate' ? `the rate of ${worst.channel}` : worst.channel;
  const others = broken.length > 1 ? `; ${plural(broken.length - 1, 'other limit')} broken too` : '';
  return `The limit on ${unit} is broken ${plural(worst.count, 'time')}, at worst by ${withUnit(worst.worst, worst.unit)} (${percent(worst.worstOfRange)} of its range)${others}`;
}

function describeTracking({ runs }: StudyResult): string {
  return runs[0].report.tracking
    .map(
      ({ output, rms, worst, unit }) =>
        `${output}: RMS error ${withUnit(rms, unit)}, worst ${withUnit(worst, unit)}`,
    )
    .join('; ')
    .concat('.');
}

import type { StudyResult } from '../../findings/studyResult.ts';
import { RUN_STYLES } from '../style.ts';
import { formatFigure, percent, withUnit } from '../words.ts';
import { NONE, type TableSpec } from './html.ts';
import { figure } from './verdict.ts';

/** Every limit: how often, how long and how far it was broken. */
export function limitTable({ runs }: StudyResult): TableSpec {
  return {
    caption: 'Limits under the lifted controller, checked between the samples too',
    head: ['limit', 'from', 'to', 'broken', 'share of time', 'worst by', '% of range', 'longest', 'first at'],
    rows: runs[0].report.limits.map((limit) => {
      const { kind, channel, unit, min, max, count, share, worst, worstOfRange, longest, first } = limit;
      const named = kind === 'output' ? channel : `${channel}, ${kind}`;
      const broken = count > 0;
      return [
        named,
        withUnit(min, unit),
        withUnit(max, unit),
        broken ? `${count} ×` : 'never',
        broken ? percent(share) : '0',
        broken ? withUnit(worst, unit) : '0',
        broken ? formatFigure(100 * worstOfRange) : '0',
        broken ? withUnit(longest, 's') : '0',
        first === null ? NONE : withUnit(first, 's'),
      ];
    }),
  };
}

/** How each output followed its reference. */
export function trackingTable({ runs }: StudyResult): TableSpec {
  return {
    caption: 'Tracking under the lifted controller',
    head: ['output', 'RMS error', 'worst error', 'overshoot', 'settling', 'steps settled', 'offset left'],
    rows: runs[0].report.tracking.map((row) => [
      row.output,
      withUnit(row.rms, row.unit),
      withUnit(row.worst, row.unit),
      row.overshoot === null ? NONE : percent(row.overshoot / 100),
      row.settling === null ? NONE : withUnit(row.settling, 's'),
      row.referenceSteps > 0 ? `${row.settled} of ${row.referenceSteps}` : NONE,
      row.offset === null ? NONE : withUnit(row.offset, row.unit),
    ]),
  };
}

/** What each input did. */
export function effortTable({ runs }: StudyResult): TableSpec {
  return {
    caption: 'Input effort of the lifted controller',
    head: ['input', 'RMS', 'fastest change', 'at a limit', 'reversals'],
    rows: runs[0].report.effort.map(({ input, unit, rms, worstRate, atLimit, reversals }) => [
      input,
      withUnit(rms, unit),
      withUnit(worstRate, unit === '1' ? '1/s' : `${unit}/s`),
      percent(atLimit),
      withUnit(reversals, '1/s'),
    ]),
  };
}

/** The closed loops side by side. */
export function rivalTable({ runs }: StudyResult): TableSpec {
  const own = runs[0].record.cost.total;
  const outputs = runs[0].report.tracking;
  return {
    caption: 'The same controller on other predictors: cost on scaled deviations, by its own weights',
    head: [
      'predictor',
      'cost',
      'times lifted',
      'of it tracking',
      'input moves',
      'excess',
      ...outputs.map(({ output }) => `RMS error of ${output}`),
      'limits broken',
      'solves not optimal',
      'ended',
    ],
    rows: runs.map(({ name, record, report }) => {
      const { cost } = record;
      return [
        RUN_STYLES[name].label,
        formatFigure(cost.total),
        formatFigure(cost.total / own),
        formatFigure(cost.tracking),
        formatFigure(cost.move),
        formatFigure(cost.excess),
        ...outputs.map(({ output, unit }) => {
          const row = report.tracking.find((its) => its.output === output);
          return row ? withUnit(row.rms, unit) : NONE;
        }),
        String(report.limits.filter(({ count }) => count > 0).length),
        `${report.notOptimal} of ${record.steps}`,
        record.diverged ? `diverged at ${withUnit(record.steps * record.sampleTime, 's')}` : 'as planned',
      ];
    }),
  };
}

/** The acceptance limits of the study. */
export function acceptanceTable({ acceptance }: StudyResult): TableSpec {
  return {
    caption: 'Acceptance limits of the study; shares are of the range',
    head: ['quantity', 'allowed', 'reached', 'verdict'],
    rows: acceptance.map(({ name, limit, reached, unit, met }) => [
      name,
      figure(limit, unit),
      figure(reached, unit),
      met ? 'met' : 'missed',
    ]),
  };
}

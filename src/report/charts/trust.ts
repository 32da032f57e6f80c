import type { StudyResult } from '../../findings/studyResult.ts';
import type { TrustModel, TrustSeries } from '../../predictor/trust.ts';
import type { ChartSpec, Mark, NumberTable, SeriesSpec } from '../spec.ts';
import { COLOURS, MODEL_STYLES } from '../style.ts';
import { plotted } from '../thin.ts';
import { formatFigure, percent, plural, stepsAhead, withUnit } from '../words.ts';
import { lineSeries } from './series.ts';

const AXES = { x: 'x', y: 'y' } as const;
/** Drawn first to last: the study's own predictor on top. */
const ORDER: readonly TrustModel[] = [
  'persistence',
  'linearised',
  'plain-linear',
  'floor',
  're-lifted',
  'lifted',
];

/** Models whose errors set the height of the plot; the others may explode. */
const STEADY: readonly TrustModel[] = ['lifted', 'plain-linear', 'persistence', 'floor'];

/** Held-out error of the lifted predictor against steps ahead, beside its rivals. */
export function trustChart(result: StudyResult): ChartSpec {
  const { trust, sampleTime, design } = result;
  const { steps, tolerance, trustedSteps } = trust;
  const { horizon } = design.problem;
  const shown = ORDER.flatMap((model) => trust.series.filter((series) => series.model === model));
  const range = errorRange(shown, tolerance);
  const every = Math.max(1, Math.round(steps.length / 8));
  const toPoints = (values: readonly number[]) =>
    steps.map((x, k) => ({ x, y: plotted(100 * Math.max(values[k], range.min / 100)) }));

  const lifted = shown.find(({ model }) => model === 'lifted');
  const spread = lifted ? spreadOf(toPoints(lifted.q50), toPoints(lifted.q95)) : [];
  const lines = shown.map((series, i) => {
    const phase = Math.round((i * every) / shown.length);
    return lineSeries(MODEL_STYLES[series.model], toPoints(series.rms), AXES, { every, phase });
  });
  return {
    name: 'trust',
    title: titleOf(result),
    reading:
      'Held-out RMS error of each predictor against steps ahead, lower is better; in the shaded steps the lifted one stays within the tolerance, and its tinted belt reaches from the middle to the 95 % quantile.',
    alternative: `${titleOf(result)}. ${describeAt(shown, horizon, steps)}`,
    height: 470,
    series: [...spread, ...lines],
    axes: {
      x: {
        type: 'linear',
        position: 'bottom',
        min: steps[0] ?? 1,
        max: Math.max(2, steps.at(-1) ?? 1),
        title: `steps ahead, ${withUnit(sampleTime, 's')} each`,
      },
      y: {
        type: 'logarithmic',
        position: 'left',
        min: range.min,
        max: range.max,
        title: 'prediction error, % of half range',
      },
    },
    marks: [...trustMarks(result), ...endLabels(shown, steps, range)],
    endLabels: 150,
    namedAtEnds: true,
    equalScales: false,
    numbers: errorTable(result, shown),
  };

  function trustMarks({ trust: { tolerance: limit } }: StudyResult): Mark[] {
    const trusted: Mark = {
      kind: 'band',
      axis: 'x',
      from: null,
      to: trustedSteps,
      colour: COLOURS.trusted.light,
      hatched: false,
    };
    return [
      ...(trustedSteps > 0 ? [trusted] : []),
      {
        kind: 'line',
        axis: 'y',
        at: 100 * limit,
        colour: COLOURS.ink.light,
        dash: [],
        width: 1,
        label: '',
      },
      {
        kind: 'label',
        ...AXES,
        at: { x: steps.at(-1) ?? 1, y: 100 * limit },
        text: `tolerance ${percent(limit)}`,
        colour: COLOURS.ink.light,
        place: 'end',
      },
      {
        kind: 'line',
        axis: 'x',
        at: horizon,
        colour: COLOURS.quiet.light,
        dash: [2, 2],
        width: 1,
        label: `horizon ${horizon}`,
      },
      ...(trustedSteps > 0 && trustedSteps < (steps.at(-1) ?? 0)
        ? [
            {
              kind: 'line',
              axis: 'x',
              at: trustedSteps,
              colour: COLOURS.quiet.light,
              dash: [],
              width: 1,
              label: `trusted to ${trustedSteps}`,
            } as const,
          ]
        : []),
    ];
  }
}

function titleOf({ trust, sampleTime }: StudyResult): string {
  const { tolerance, trustedSteps, steps, lifting } = trust;
  const whole = trustedSteps === steps.length && trustedSteps > 0;
  const held = `${percent(tolerance)} of half range`;
  const reach =
    trustedSteps === 0
      ? `The lifted prediction is off by more than ${held} at the first step`
      : `The lifted prediction stays within ${held} for ${whole ? 'all ' : ''}${stepsAhead(trustedSteps, sampleTime)}`;
  const worth = lifting.helps
    ? `with ${formatFigure(lifting.ratio)} times the error of plain linear regression`
    : 'and is no better than plain linear regression';
  return `${reach}, ${worth}`;
}

/** Range of the error axis in %: what the models show, but neither rounding nor explosions. */
function errorRange(shown: readonly TrustSeries[], tolerance: number): { min: number; max: number } {
  const values = shown.flatMap(({ rms }) => rms.filter((value) => Number.isFinite(value) && value > 0));
  const tame = shown.flatMap(({ model, rms }) => (STEADY.includes(model) ? rms : [])).filter(Number.isFinite);
  const high =
    100 * Math.max(tolerance, Math.min(Math.max(...values, tolerance), 4 * Math.max(...tame, tolerance), 30));
  const low = 100 * Math.min(tolerance, Math.max(Math.min(...values, tolerance), tolerance * 1e-5));
  return { min: low / 1.5, max: high * 2.5 };
}

/** Two unnamed lines with the space between them tinted. */
function spreadOf(low: SeriesSpec['data'], high: SeriesSpec['data']): SeriesSpec[] {
  const bare = {
    label: 'lifted, 50 to 95 % of errors',
    dash: [],
    colour: COLOURS.spread.light,
    marker: false,
    width: 0,
  } as const;
  return [
    lineSeries(bare, high, AXES, null, { fill: '+1', unnamed: true, order: 10 }),
    lineSeries(bare, low, AXES, null, { unnamed: true, order: 10 }),
  ];
}

function endLabels(
  shown: readonly TrustSeries[],
  steps: readonly number[],
  range: { readonly min: number; readonly max: number },
): Mark[] {
  return shown.flatMap(({ model, rms }): Mark[] => {
    const last = rms.findLastIndex((value) => Number.isFinite(value) && 100 * value <= range.max);
    if (last < 0) return [];
    const { label, colour } = MODEL_STYLES[model];
    const y = Math.max(100 * rms[last], range.min);
    const place = last === rms.length - 1 ? 'end' : 'right';
    const text = place === 'end' ? label : `${label}, leaves the plot`;
    return [{ kind: 'label', ...AXES, at: { x: steps[last], y }, text, colour, place }];
  });
}

function describeAt(shown: readonly TrustSeries[], horizon: number, steps: readonly number[]): string {
  const k = Math.min(horizon, steps.length) - 1;
  const errors = [...shown]
    .reverse()
    .map(({ model, rms }) => `${MODEL_STYLES[model].label} ${percent(rms[k])}`);
  return `RMS error ${plural(k + 1, 'step')} ahead: ${errors.join(', ')}.`;
}

/** Errors at a few steps, and the lifted error of each coordinate in its unit. */
function errorTable({ trust, predictor, design }: StudyResult, shown: readonly TrustSeries[]): NumberTable {
  const last = trust.steps.length;
  const at = [1, 2, 5, 10, 20, 50, 100, design.problem.horizon, trust.trustedSteps, last]
    .filter((step) => step >= 1 && step <= last)
    .sort((a, b) => a - b)
    .filter((step, i, all) => step !== all[i - 1]);
  const models = [...shown].reverse();
  const lifted = models.find(({ model }) => model === 'lifted');
  return {
    caption: 'Prediction error: RMS in % of half range, and the lifted error of each coordinate in its unit',
    head: [
      'steps ahead',
      ...models.map(({ model }) => `${MODEL_STYLES[model].label}, %`),
      ...(lifted?.rmsInUnits ?? []).map((_, i) => {
        const { name, unit } = predictor.coordinates[i];
        return unit === '1' ? name : `${name}, ${unit}`;
      }),
    ],
    rows: at.map((step) => [
      String(step),
      ...models.map(({ rms }) => formatFigure(100 * rms[step - 1])),
      ...(lifted?.rmsInUnits ?? []).map((errors) => formatFigure(errors[step - 1])),
    ]),
  };
}

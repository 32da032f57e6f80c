import { measureExcitation } from '../../data/coverage.ts';
import type { Trajectory } from '../../data/dataset.ts';
import type { StudyResult } from '../../findings/studyResult.ts';
import type { AxisSpec, ChartSpec, Mark, SeriesSpec } from '../spec.ts';
import { COLOURS } from '../style.ts';
import { thinSeries } from '../thin.ts';
import { axisTitle, formatFigure, list, percent, withUnit } from '../words.ts';
import { LIMIT_LABELS, limitMarks } from './limits.ts';
import { stackPanels } from './panels.ts';
import { column, lineSeries } from './series.ts';

/** More panels than this are too flat to be read. */
const MOST_PANELS = 6;
const INPUT_STYLE = { label: '', colour: COLOURS.lifted.light, dash: [], marker: false, width: 2 } as const;

/** Input signals in time: one trajectory for each shape of signal, one panel an input. */
export function excitationChart({ dataset }: StudyResult): ChartSpec {
  const { inputs, sampleTime } = dataset;
  const examples = oneOfEachShape(dataset.trajectories);
  const pairs = examples
    .flatMap((example) => inputs.map((input, j) => ({ example, input, j })))
    .slice(0, MOST_PANELS);
  const longest = Math.max(1, ...examples.map(({ steps }) => steps)) * sampleTime;
  const panels: Record<string, AxisSpec> = {};
  const series: SeriesSpec[] = [];
  const marks: Mark[] = [];
  for (const [i, { example, input, j }] of pairs.entries()) {
    const id = `y${i}`;
    const room = 0.14 * (input.max - input.min);
    panels[id] = {
      type: 'linear',
      position: 'left',
      min: input.min - room,
      max: input.max + 2 * room,
      title: axisTitle(input),
      weight: 1,
    };
    // The last value is held to the end of its sample.
    const u = column(example.u, inputs.length, j);
    const held = Float64Array.from([...u, u[u.length - 1]]);
    const time = Float64Array.from(held, (_, k) => k * sampleTime);
    series.push(
      lineSeries(INPUT_STYLE, thinSeries(time, held), { x: 'x', y: id }, null, {
        stepped: 'before',
        unnamed: true,
      }),
    );
    marks.push(...limitMarks(id, longest, input));
    const named = nameShape(example);
    marks.push({ kind: 'caption', axis: id, text: inputs.length > 1 ? `${named}: ${input.name}` : named });
  }
  const fit = measureExcitation(dataset, 'fit');
  const covered = fit.inputs.map(
    ({ name, share }) => `${percent(Math.min(1, share))} of the range of ${name}`,
  );
  const title = `The experiment uses ${list(covered)} in ${dataset.trajectories.length} trajectories`;
  return {
    name: 'excitation',
    title,
    reading:
      'One trajectory for each shape of input signal; the hatched margins lie beyond the limits of the actuator.',
    alternative: `${title}. Shapes: ${list(examples.map(nameShape))}.`,
    height: Math.max(450, 90 + 130 * pairs.length),
    series,
    axes: {
      x: {
        type: 'linear',
        position: 'bottom',
        min: 0,
        max: Number(longest.toPrecision(6)),
        title: 'time, s',
      },
      ...stackPanels(panels),
    },
    marks,
    endLabels: LIMIT_LABELS,
    namedAtEnds: false,
    equalScales: false,
    numbers: {
      caption: 'What the fitting data visited',
      head: ['channel', 'from', 'to', 'share of the range', 'tenths of the range visited'],
      rows: [...fit.coordinates, ...fit.inputs].map(({ name, unit, min, max, share, cells }) => [
        name,
        withUnit(min, unit),
        withUnit(max, unit),
        percent(share),
        formatFigure(10 * cells),
      ]),
    },
  };
}

/** The longest trajectory of each shape; of all where the shapes are not known. */
function oneOfEachShape(trajectories: readonly Trajectory[]): Trajectory[] {
  const best = new Map<string, Trajectory>();
  for (const trajectory of trajectories) {
    const known = best.get(nameShape(trajectory));
    if (!known || trajectory.steps > known.steps) best.set(nameShape(trajectory), trajectory);
  }
  return [...best.values()];
}

function nameShape({ signal }: Trajectory): string {
  return signal?.replaceAll('-', ' ') ?? 'longest trajectory';
}

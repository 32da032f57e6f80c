import type { Dataset, Role } from '../../data/dataset.ts';
import type { StudyResult } from '../../findings/studyResult.ts';
import type { Channel } from '../../plant/plant.ts';
import type { ChartSpec, SeriesSpec } from '../spec.ts';
import { COLOURS } from '../style.ts';
import { type CloudCells, plotted, thinCloud } from '../thin.ts';
import { axisTitle, percent, sentenceCase } from '../words.ts';
import { column, lineSeries, paddedRange, pointSeries } from './series.ts';

const AXES = { x: 'x', y: 'y' } as const;
/** Pairs of coordinates that are drawn at most. */
const MOST_PAIRS = 3;
/** Cells a side in which data count as near. */
const CELLS = 24;

/** One coordinate (or input): its values by role, and along the closed loop where that is known. */
interface Visited {
  readonly channel: Channel;
  readonly byRole: (role: Role) => Float64Array;
  readonly path: Float64Array | null;
}

/**
 * Where the data lie and where the closed loop went, for the pairs of coordinates that matter: those first whose path runs
 * most through empty cells of the fitting data. A single coordinate is paired with the first input.
 */
export function coverageCharts(result: StudyResult): ChartSpec[] {
  const all = visitedCoordinates(result);
  const pairs = all.flatMap((across, i) => all.slice(i + 1).map((up) => ({ across, up })));
  const ranked = pairs
    .map((pair, order) => ({ ...pair, order, strayed: strayedShare(pair.across, pair.up) }))
    .sort((a, b) => b.strayed - a.strayed || a.order - b.order)
    .slice(0, MOST_PAIRS);
  return ranked.map((pair, i) => coverageChart(result, pair, i));
}

function visitedCoordinates({ dataset, runs, plant }: StudyResult): Visited[] {
  const record = runs[0]?.record;
  const coordinates = dataset.coordinates.map((channel, i): Visited => {
    const state = plant.states.findIndex(({ name }) => name === channel.name);
    const output = plant.outputs.findIndex(({ name }) => name === channel.name);
    let path: Float64Array | null = null;
    if (record && state >= 0) path = column(record.x, record.nx, state);
    else if (record && output >= 0) path = column(record.y, record.ny, output);
    return { channel, path, byRole: (role) => gather(dataset, role, i) };
  });
  if (coordinates.length > 1 || dataset.inputs.length === 0) return coordinates;
  const path = record ? column(record.applied, record.nu, 0) : null;
  return [...coordinates, { channel: dataset.inputs[0], path, byRole: (role) => gatherInput(dataset, role) }];
}

/** Values of one coordinate along all trajectories of a role, without the last of each, to which no input belongs. */
function gather({ trajectories, coordinates }: Dataset, role: Role, at: number): Float64Array {
  const nx = coordinates.length;
  const values = [];
  for (const { x, steps, role: its } of trajectories) {
    if (its === role) for (let k = 0; k < steps; k++) values.push(x[k * nx + at]);
  }
  return Float64Array.from(values);
}

function gatherInput({ trajectories, inputs }: Dataset, role: Role): Float64Array {
  const values = [];
  for (const { u, steps, role: its } of trajectories) {
    if (its === role) for (let k = 0; k < steps; k++) values.push(u[k * inputs.length]);
  }
  return Float64Array.from(values);
}

/** Share of the path in cells that, with their neighbours, hold no fitting data. */
function strayedShare(across: Visited, up: Visited): number {
  if (!across.path || !up.path) return 0;
  const cellOf = ({ channel: { min, max } }: Visited, value: number) =>
    Math.floor(((value - min) / (max - min)) * CELLS);
  const key = (i: number, j: number) => `${i},${j}`;
  const occupied = new Set<string>();
  const x = across.byRole('fit');
  const y = up.byRole('fit');
  for (let k = 0; k < x.length; k++) {
    const [i, j] = [cellOf(across, x[k]), cellOf(up, y[k])];
    for (let di = -1; di <= 1; di++) for (let dj = -1; dj <= 1; dj++) occupied.add(key(i + di, j + dj));
  }
  const rows = Math.min(across.path.length, up.path.length);
  let strayed = 0;
  for (let k = 0; k < rows; k++) {
    if (!occupied.has(key(cellOf(across, across.path[k]), cellOf(up, up.path[k])))) strayed++;
  }
  return rows > 0 ? strayed / rows : 0;
}

function coverageChart(
  { runs }: StudyResult,
  { across, up }: { readonly across: Visited; readonly up: Visited },
  index: number,
): ChartSpec {
  const outside = runs[0]?.record.outsideData ?? 0;
  const zip = (x: Float64Array, y: Float64Array) => Array.from(x, (value, k) => ({ x: value, y: y[k] }));
  const cloud = (role: Role, cells: CloudCells) =>
    thinCloud(zip(across.byRole(role), up.byRole(role)), cells);
  const fit = cloud('fit', { across: 110, up: 70 });
  const heldOut = cloud('held-out', { across: 55, up: 35 });
  const path = across.path && up.path ? zip(across.path, up.path) : [];
  const points = path.map(({ x, y }) => ({ x: plotted(x) ?? 0, y: plotted(y) }));
  const shown = [...fit, ...heldOut];
  const named = `${up.channel.name} against ${across.channel.name}`;
  const title =
    index > 0
      ? `The same for ${named}`
      : outside === 0
        ? 'The closed loop stays where the fitting data are'
        : `The closed loop is outside the fitting data for ${percent(outside)} of its samples`;
  const series: SeriesSpec[] = [
    pointSeries('fit', fit, AXES, {
      marker: 'circle',
      radius: 1.6,
      border: COLOURS.fitData.light,
      inside: COLOURS.fitData.light,
    }),
    pointSeries('held out', heldOut, AXES, {
      marker: 'crossRot',
      radius: 2.2,
      border: COLOURS.heldOut.light,
      inside: COLOURS.heldOut.light,
    }),
  ];
  if (points.length > 0) {
    const style = {
      label: 'closed loop',
      colour: COLOURS.lifted.light,
      dash: [],
      marker: false,
      width: 2.5,
    } as const;
    series.push(lineSeries(style, points, AXES, null));
    series.push(
      pointSeries('its start', points.slice(0, 1), AXES, {
        marker: 'rect',
        radius: 7,
        border: COLOURS.ink.light,
        inside: COLOURS.paper.light,
      }),
    );
  }
  return {
    name: index === 0 ? 'coverage' : `coverage-${index + 1}`,
    title,
    reading: `${sentenceCase(named)}: where the line leaves the dots, the predictor extrapolates. Dots are thinned where they lie close.`,
    alternative: `${title}. ${named}: samples for fitting, held-out samples and the closed-loop path.`,
    height: 450,
    // The first in the list is drawn on top; the key keeps the order of the list.
    series: series.map((entry, i) => ({ ...entry, order: series.length - i })),
    axes: {
      x: {
        type: 'linear',
        position: 'bottom',
        title: axisTitle(across.channel),
        ...paddedRange([...shown.map(({ x }) => x), ...points.map(({ x }) => x)], 0.04, across.channel),
      },
      y: {
        type: 'linear',
        position: 'left',
        title: axisTitle(up.channel),
        ...paddedRange(
          [...shown, ...points].flatMap(({ y }) => y ?? []),
          0.04,
          up.channel,
        ),
      },
    },
    marks: [],
    endLabels: 0,
    namedAtEnds: false,
    equalScales: false,
  };
}

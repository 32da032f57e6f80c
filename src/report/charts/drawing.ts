import type { Chart, ChartConfiguration, Plugin } from 'chart.js';
import type { ChartSpec } from '../spec.ts';
import { drawKey, KEY_FUNCTIONS, keyItems } from './drawKey.ts';
import { drawAbove, drawBelow, MARK_FUNCTIONS } from './drawMarks.ts';
import type { ChartView } from './view.ts';

/** What draws besides the library, handed in so that each function can be written into the page as text. */
export const PAINTERS = { drawBelow, drawAbove, drawKey, keyItems };
export type Painters = typeof PAINTERS;

/*
 * The functions below are written into the page as their own text (see `drawingSource`): they use nothing from outside this
 * file but what they are handed.
 */

/** The configuration of the drawing library for one description and one way of viewing it. Changes neither. */
export function chartConfig(description: ChartSpec, view: ChartView, painters: Painters): ChartConfiguration {
  const spec = recolour(description, view.colours);
  const narrow = view.width < 620;
  const endLabels = narrow ? 0 : spec.endLabels;
  const font = (size: number, weight?: 'bold') => ({ size, weight, family: view.fontFamily });
  const text = narrow
    ? { ...view.text, axis: view.text.axis - 2, tick: view.text.tick - 2, label: view.text.label - 2 }
    : view.text;
  const scales = Object.fromEntries(
    Object.entries(spec.axes).map(([id, axis]) => [
      id,
      {
        type: axis.type,
        position: axis.position,
        min: axis.min,
        max: axis.max,
        ...(axis.weight === undefined ? {} : { stack: 'panels', stackWeight: axis.weight }),
        border: { display: false },
        grid: { color: view.grid, lineWidth: 1, drawTicks: false, display: !axis.gap },
        ticks: {
          display: !axis.gap,
          color: view.quiet,
          font: font(text.tick),
          padding: 6,
          callback: axis.type === 'linear' ? tickText : undefined,
          includeBounds: false,
          maxRotation: 0,
          autoSkipPadding: 14,
          maxTicksLimit: axis.weight !== undefined && axis.weight < 0.8 ? 5 : 9,
        },
        title: { display: !axis.gap, text: axis.title, color: view.ink, font: font(text.axis) },
        afterBuildTicks: axis.type === 'logarithmic' ? keepDecades : undefined,
      },
    ]),
  );
  const marks: Plugin = {
    id: 'marks',
    beforeDraw: (chart) => paint(chart, view.paper),
    beforeDatasetsDraw: (chart) => painters.drawBelow(chart, spec.marks, view.quiet),
    afterDatasetsDraw: (chart) => painters.drawAbove(chart, spec.marks, view, text.label, endLabels),
    afterDraw: (chart) => painters.drawKey(chart),
    afterUpdate: (chart) => {
      if (spec.equalScales) equaliseScales(chart);
    },
  };
  return {
    type: 'line',
    data: { datasets: spec.series },
    options: {
      animation: false,
      normalized: true,
      responsive: view.responsive,
      maintainAspectRatio: false,
      devicePixelRatio: view.ratio,
      locale: 'en-GB',
      font: { family: view.fontFamily },
      layout: { padding: { top: 4, left: 4, bottom: 4, right: endLabels || 14 } },
      interaction: { mode: 'nearest', axis: 'x', intersect: false },
      scales,
      plugins: {
        title: {
          display: view.title,
          text: breakLines(spec.title, 72),
          align: 'start',
          color: view.ink,
          font: font(text.title, 'bold'),
          padding: { top: 4, bottom: 10 },
        },
        legend: {
          display: !(spec.namedAtEnds && endLabels > 0) && spec.series.filter((s) => !s.unnamed).length > 1,
          align: 'start',
          onClick: () => {},
          labels: {
            boxWidth: 44,
            boxHeight: 10,
            padding: 12,
            color: view.ink,
            font: font(text.label),
            generateLabels: (chart: Chart) => painters.keyItems(chart, view.ink),
          },
        },
        tooltip: { titleFont: font(12), bodyFont: font(12), displayColors: false },
        filler: { propagate: false },
      },
    },
    plugins: [marks],
  } as unknown as ChartConfiguration;
}

/** A copy with every colour exchanged. Numbers that are not finite become gaps. */
export function recolour<T>(spec: T, colours: Readonly<Record<string, string>>): T {
  return JSON.parse(JSON.stringify(spec), (_, value) =>
    typeof value === 'string' && Object.hasOwn(colours, value) ? colours[value] : value,
  );
}

/** Lines of at most `most` characters, broken at spaces. */
export function breakLines(text: string, most: number): string[] {
  const lines: string[] = [];
  for (const word of text.split(' ')) {
    const last = lines.at(-1);
    if (last !== undefined && last.length + 1 + word.length <= most)
      lines[lines.length - 1] = `${last} ${word}`;
    else lines.push(word);
  }
  return lines;
}

/** A tick in few characters: long figures as `5e6`. */
export function tickText(value: number | string): string {
  const figure = Number(Number(value).toPrecision(6));
  const size = Math.abs(figure);
  if (size === 0 || (size >= 1e-3 && size < 1e5)) return String(figure);
  return figure.toExponential().replace('e+', 'e');
}

/** Leaves the powers of ten, or 1, 2 and 5 of each where there are fewer than three powers of ten. */
export function keepDecades(scale: { ticks: { value: number }[] }): void {
  const mantissa = (value: number) => value / 10 ** Math.floor(Math.log10(value) + 1e-9);
  const near = (value: number, wanted: number) => Math.abs(mantissa(value) / wanted - 1) < 1e-6;
  const decades = scale.ticks.filter(({ value }) => near(value, 1));
  scale.ticks =
    decades.length >= 3 ? decades : scale.ticks.filter(({ value }) => [1, 2, 5].some((m) => near(value, m)));
}

/** Widens the shorter axis so that one unit is as long on `x` as on `y`. */
export function equaliseScales(chart: Chart): void {
  const { x, y } = chart.scales;
  const perX = (x.max - x.min) / x.width;
  const perY = (y.max - y.min) / y.height;
  if (Math.abs(perX / perY - 1) < 0.004) return;
  const [axis, length, scale] =
    perX < perY ? (['x', x.width * perY, x] as const) : (['y', y.height * perX, y] as const);
  const middle = (scale.min + scale.max) / 2;
  const options = chart.options.scales?.[axis] as { min: number; max: number };
  options.min = middle - length / 2;
  options.max = middle + length / 2;
  chart.update('none');
}

function paint({ ctx, width, height }: Chart, paper: string): void {
  ctx.save();
  ctx.fillStyle = paper;
  ctx.fillRect(0, 0, width, height);
  ctx.restore();
}

/**
 * The drawing as text, for a page that has no modules: defines `chartConfig` and `painters`.
 */
export function drawingSource(): string {
  const own = [chartConfig, recolour, breakLines, tickText, keepDecades, equaliseScales, paint];
  const names = Object.keys(PAINTERS).join(', ');
  return [...own, ...MARK_FUNCTIONS, ...KEY_FUNCTIONS]
    .map(String)
    .join('\n')
    .concat(`\nconst painters = { ${names} };`);
}

import type { Chart, ChartConfiguration, Plugin } from 'chart.js';
import type { ChartSpec, Mark } from '../spec.ts';

/** How a description is to be drawn: what differs between a PNG, a wide page, a phone, a dark page and a print. */
export interface ChartView {
  /** Logical pixels. */
  readonly width: number;
  /** The sentence on top is drawn too; a page writes it as text instead. */
  readonly title: boolean;
  readonly fontFamily: string;
  /** Exchange of colours by their light form; empty on white. */
  readonly colours: Readonly<Record<string, string>>;
  readonly paper: string;
  readonly ink: string;
  readonly quiet: string;
  readonly grid: string;
  readonly responsive: boolean;
  readonly ratio: number;
  readonly text: {
    readonly title: number;
    readonly axis: number;
    readonly tick: number;
    readonly label: number;
  };
}

/*
 * The functions below are written into the page as their own text (see `drawingSource`). They use nothing from outside
 * this list but the drawing library's chart that they are handed.
 */

/** The configuration of the drawing library for one description and one way of viewing it. Changes neither. */
export function chartConfig(description: ChartSpec, view: ChartView): ChartConfiguration {
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
    beforeDatasetsDraw: (chart) => drawBelow(chart, spec.marks, view.quiet),
    afterDatasetsDraw: (chart) => drawAbove(chart, spec.marks, view, text.label, endLabels),
    afterDraw: (chart) => drawKey(chart),
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
            generateLabels: (chart: Chart) => keyItems(chart, view.ink),
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

/** Bands, circles and the frames of the panels. */
function drawBelow(chart: Chart, marks: readonly Mark[], frame: string): void {
  const { ctx, chartArea: area } = chart;
  ctx.save();
  for (const mark of marks) {
    if (mark.kind === 'circle') {
      const x = chart.scales[mark.x];
      const y = chart.scales[mark.y];
      ctx.beginPath();
      ctx.rect(area.left, y.top, area.right - area.left, y.height);
      ctx.save();
      ctx.clip();
      ctx.beginPath();
      ctx.strokeStyle = mark.colour;
      ctx.setLineDash([...mark.dash]);
      ctx.lineWidth = 1.5;
      const rx = Math.abs(x.getPixelForValue(mark.radius) - x.getPixelForValue(0));
      const ry = Math.abs(y.getPixelForValue(mark.radius) - y.getPixelForValue(0));
      ctx.ellipse(x.getPixelForValue(0), y.getPixelForValue(0), rx, ry, 0, 0, 2 * Math.PI);
      ctx.stroke();
      ctx.restore();
    }
    if (mark.kind === 'line' && !mark.label) strokeLine(chart, mark);
    if (mark.kind !== 'band') continue;
    const scale = chart.scales[mark.axis];
    const low = Math.max(scale.min, mark.from ?? scale.min);
    const high = Math.min(scale.max, mark.to ?? scale.max);
    if (!(low < high)) continue;
    const [a, b] = [scale.getPixelForValue(low), scale.getPixelForValue(high)].sort((p, q) => p - q);
    const box = scale.isHorizontal()
      ? { x: a, y: area.top, width: b - a, height: area.bottom - area.top }
      : { x: area.left, y: a, width: area.right - area.left, height: b - a };
    if (mark.hatched) hatch(ctx, box, mark.colour);
    else {
      ctx.fillStyle = mark.colour;
      ctx.fillRect(box.x, box.y, box.width, box.height);
    }
  }
  ctx.strokeStyle = frame;
  ctx.lineWidth = 1;
  ctx.setLineDash([]);
  for (const scale of Object.values(chart.scales)) {
    if (scale.isHorizontal() || !(scale.options as unknown as { ticks: { display: boolean } }).ticks.display)
      continue;
    ctx.strokeRect(area.left, scale.top, area.right - area.left, scale.height);
  }
  ctx.restore();
}

/** Slanting lines at 45°, 7 pixels apart. */
function hatch(
  ctx: CanvasRenderingContext2D,
  box: { x: number; y: number; width: number; height: number },
  colour: string,
): void {
  ctx.save();
  ctx.beginPath();
  ctx.rect(box.x, box.y, box.width, box.height);
  ctx.clip();
  ctx.beginPath();
  ctx.strokeStyle = colour;
  ctx.setLineDash([]);
  ctx.lineWidth = 1;
  for (let x = box.x - box.height; x < box.x + box.width; x += 7) {
    ctx.moveTo(x, box.y + box.height);
    ctx.lineTo(x + box.height, box.y);
  }
  ctx.stroke();
  ctx.restore();
}

/** Strokes a straight line; returns its pixel, or null where it is not in the plot. */
function strokeLine(chart: Chart, mark: Extract<Mark, { kind: 'line' }>): number | null {
  const { ctx, chartArea: area } = chart;
  const scale = chart.scales[mark.axis];
  const at = scale.getPixelForValue(mark.at);
  const flat = !scale.isHorizontal();
  const [low, high] = flat ? [scale.top, scale.bottom] : [area.left, area.right];
  if (!(at >= low - 0.5 && at <= high + 0.5)) return null;
  ctx.save();
  ctx.beginPath();
  ctx.strokeStyle = mark.colour;
  ctx.lineWidth = mark.width;
  ctx.setLineDash([...mark.dash]);
  ctx.moveTo(flat ? area.left : at, flat ? at : area.top);
  ctx.lineTo(flat ? area.right : at, flat ? at : area.bottom);
  ctx.stroke();
  ctx.restore();
  return at;
}

/** Lines with their names, labels and notes. */
function drawAbove(
  chart: Chart,
  marks: readonly Mark[],
  view: ChartView,
  size: number,
  endLabels: number,
): void {
  const { ctx, chartArea: area } = chart;
  ctx.save();
  ctx.font = `${size}px ${view.fontFamily}`;
  ctx.lineJoin = 'round';
  const write = (text: string, x: number, y: number, colour: string) => {
    ctx.setLineDash([]);
    ctx.strokeStyle = view.paper;
    ctx.lineWidth = 4;
    ctx.strokeText(text, x, y);
    ctx.fillStyle = colour;
    ctx.fillText(text, x, y);
  };
  let upright = 0;
  for (const mark of marks) {
    if (mark.kind !== 'line' || !mark.label) continue;
    const at = strokeLine(chart, mark);
    if (at === null) continue;
    ctx.textBaseline = 'middle';
    if (!chart.scales[mark.axis].isHorizontal()) {
      ctx.textAlign = 'left';
      write(mark.label, area.left + 8, at - 0.85 * size, mark.colour);
    } else {
      const left = at + 6 + ctx.measureText(mark.label).width > area.right;
      ctx.textAlign = left ? 'right' : 'left';
      write(mark.label, left ? at - 6 : at + 6, area.top + size * (0.9 + 1.4 * upright++), mark.colour);
    }
  }
  drawLabels(chart, marks, size, endLabels, write);
  for (const mark of marks) {
    if (mark.kind === 'caption') {
      ctx.textAlign = 'left';
      ctx.textBaseline = 'middle';
      write(mark.text, area.left + 8, chart.scales[mark.axis].top + size * 0.95, view.ink);
    }
    if (mark.kind !== 'note') continue;
    ctx.textAlign = 'right';
    ctx.textBaseline = 'middle';
    mark.lines.forEach((line, i) => {
      write(line, area.right - 10, area.top + size * (1.1 + 1.45 * i), view.ink);
    });
  }
  ctx.restore();
}

/** Labels at points; those at the ends of lines are moved apart and tied to their lines. */
function drawLabels(
  chart: Chart,
  marks: readonly Mark[],
  size: number,
  endLabels: number,
  write: (text: string, x: number, y: number, colour: string) => void,
): void {
  const { ctx, chartArea: area } = chart;
  const ends = [];
  for (const mark of marks) {
    if (mark.kind !== 'label') continue;
    const x = chart.scales[mark.x].getPixelForValue(mark.at.x);
    const scale = chart.scales[mark.y];
    const y = Math.min(scale.bottom, Math.max(scale.top, scale.getPixelForValue(mark.at.y)));
    if (mark.place === 'end') {
      ends.push({ mark, x, y, to: y });
      continue;
    }
    ctx.textBaseline = 'middle';
    ctx.textAlign = 'left';
    write(mark.text, x + 10, Math.max(y, scale.top + size), mark.colour);
  }
  if (endLabels === 0) return;
  ends.sort((a, b) => a.y - b.y);
  const apart = size * 1.3;
  for (let i = 1; i < ends.length; i++) ends[i].to = Math.max(ends[i].to, ends[i - 1].to + apart);
  let lowest = area.bottom;
  for (let i = ends.length - 1; i >= 0; i--) {
    ends[i].to = Math.min(ends[i].to, lowest);
    lowest = ends[i].to - apart;
  }
  ctx.textAlign = 'left';
  ctx.textBaseline = 'middle';
  for (const { mark, x, y, to } of ends) {
    ctx.beginPath();
    ctx.setLineDash([]);
    ctx.strokeStyle = mark.colour;
    ctx.lineWidth = 1;
    ctx.moveTo(Math.min(x, area.right) + 2, y);
    ctx.lineTo(area.right + 14, to);
    ctx.stroke();
    write(mark.text, area.right + 18, to, mark.colour);
  }
}

type Swatch = {
  borderColor: string;
  backgroundColor: string;
  borderDash: number[];
  borderWidth: number;
  pointStyle: string | false;
  pointBorderColor?: string;
  pointBackgroundColor?: string;
  showLine: boolean;
  fill?: string | boolean;
  label: string;
  unnamed?: boolean;
};

/** Entries of the key without boxes: `drawKey` draws line, dash and marker there. */
function keyItems(chart: Chart, ink: string) {
  return chart.data.datasets.flatMap((set, datasetIndex) =>
    (set as unknown as Swatch).unnamed
      ? []
      : [
          {
            text: set.label ?? '',
            datasetIndex,
            fontColor: ink,
            fillStyle: 'transparent',
            strokeStyle: 'transparent',
            lineWidth: 0,
          },
        ],
  );
}

/** Draws each series of the key as it looks in the plot. */
function drawKey(chart: Chart): void {
  const key = chart.legend as unknown as
    | {
        options: { display: boolean };
        legendHitBoxes: { left: number; top: number; height: number }[];
        legendItems: { datasetIndex: number }[];
      }
    | undefined;
  if (!key?.options.display) return;
  const { ctx } = chart;
  ctx.save();
  key.legendItems.forEach(({ datasetIndex }, i) => {
    const set = chart.data.datasets[datasetIndex] as unknown as Swatch;
    const { left, top, height } = key.legendHitBoxes[i];
    const y = top + height / 2;
    if (set.fill) {
      ctx.fillStyle = set.backgroundColor;
      ctx.fillRect(left, y - 7, 44, 14);
    }
    if (set.showLine && set.borderWidth > 0) {
      ctx.beginPath();
      ctx.setLineDash(set.borderDash);
      ctx.strokeStyle = set.borderColor;
      ctx.lineWidth = set.borderWidth;
      ctx.moveTo(left, y);
      ctx.lineTo(left + 44, y);
      ctx.stroke();
    }
    if (set.pointStyle) {
      ctx.setLineDash([]);
      drawMarker(ctx, set.pointStyle, left + 22, y, 5, set);
    }
  });
  ctx.restore();
}

/** One marker as the drawing library shapes it. */
function drawMarker(
  ctx: CanvasRenderingContext2D,
  shape: string,
  x: number,
  y: number,
  r: number,
  set: Swatch,
): void {
  const path: Record<string, readonly (readonly [number, number])[]> = {
    rect: [
      [-0.8, -0.8],
      [0.8, -0.8],
      [0.8, 0.8],
      [-0.8, 0.8],
    ],
    rectRot: [
      [0, -1],
      [1, 0],
      [0, 1],
      [-1, 0],
    ],
    triangle: [
      [0, -1],
      [0.87, 0.5],
      [-0.87, 0.5],
    ],
  };
  const strokes: Record<string, number> = { crossRot: 2, star: 4 };
  ctx.beginPath();
  ctx.fillStyle = set.pointBackgroundColor ?? set.backgroundColor;
  ctx.strokeStyle = set.pointBorderColor ?? set.borderColor;
  ctx.lineWidth = 1.5;
  if (shape === 'circle') ctx.arc(x, y, r, 0, 2 * Math.PI);
  for (const [i, [dx, dy]] of (path[shape] ?? []).entries()) {
    if (i === 0) ctx.moveTo(x + r * dx, y + r * dy);
    else ctx.lineTo(x + r * dx, y + r * dy);
  }
  if (path[shape]) ctx.closePath();
  const count = strokes[shape] ?? 0;
  for (let i = 0; i < count; i++) {
    const angle = Math.PI / 4 + (i * Math.PI) / count;
    ctx.moveTo(x - r * Math.cos(angle), y - r * Math.sin(angle));
    ctx.lineTo(x + r * Math.cos(angle), y + r * Math.sin(angle));
  }
  if (count === 0) ctx.fill();
  ctx.stroke();
}

/** The functions of this file as text, for a page that has no modules. */
export function drawingSource(): string {
  return [
    chartConfig,
    recolour,
    breakLines,
    tickText,
    keepDecades,
    equaliseScales,
    paint,
    drawBelow,
    hatch,
    strokeLine,
    drawAbove,
    drawLabels,
    keyItems,
    drawKey,
    drawMarker,
  ]
    .map(String)
    .join('\n');
}

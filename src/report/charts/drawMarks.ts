import type { Chart } from 'chart.js';
import type { Mark } from '../spec.ts';
import type { ChartView } from './view.ts';

/*
 * The functions below are written into the page as their own text (see `drawing.ts`): they use nothing from outside this file
 * but what they are handed.
 */

/** Bands, circles and the frames of the panels. */
export function drawBelow(chart: Chart, marks: readonly Mark[], frame: string): void {
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
export function drawAbove(
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

/** All that the page needs of this file. */
export const MARK_FUNCTIONS = [drawBelow, hatch, strokeLine, drawAbove, drawLabels];

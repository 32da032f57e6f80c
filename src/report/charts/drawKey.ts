import type { Chart } from 'chart.js';

/*
 * The functions below are written into the page as their own text (see `drawing.ts`): they use nothing from outside this file
 * but what they are handed.
 */

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
export function keyItems(chart: Chart, ink: string) {
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
export function drawKey(chart: Chart): void {
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

/** All that the page needs of this file. */
export const KEY_FUNCTIONS = [keyItems, drawKey, drawMarker];

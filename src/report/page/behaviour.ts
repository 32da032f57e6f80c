import { drawingSource } from '../charts/drawing.ts';
import type { ChartSpec } from '../spec.ts';
import { COLOURS, TEXT } from '../style.ts';
import { scriptJson, scriptText } from './html.ts';

/** CSS pixels of a chart in print: the width of the text on A4. */
const PRINT_WIDTH = 680;
/** Share of its height that a chart keeps on a phone. */
const NARROW_HEIGHT = 0.85;

/**
 * The script of the page: draws every chart at the width of its box, again when the width or the colour scheme changes, and
 * on white for a print. The drawing itself is the code that draws the PNGs.
 */
export function behaviourScript(charts: readonly ChartSpec[]): string {
  const look = (scheme: 'light' | 'dark') => ({
    colours:
      scheme === 'light'
        ? {}
        : Object.fromEntries(Object.values(COLOURS).map(({ light, dark }) => [light, dark])),
    paper: COLOURS.paper[scheme],
    ink: COLOURS.ink[scheme],
    quiet: COLOURS.quiet[scheme],
    grid: COLOURS.grid[scheme],
  });
  return `'use strict';
(() => {
${scriptText(drawingSource())}
const charts = ${scriptJson(charts)};
const looks = ${scriptJson({ light: look('light'), dark: look('dark') })};
const text = ${scriptJson(TEXT)};
const dark = matchMedia('(prefers-color-scheme: dark)');
const print = matchMedia('print');
const drawn = new Map();
let state = '';
function drawAll(printing) {
  const scheme = dark.matches && !printing ? 'dark' : 'light';
  const widthOf = (box) => (printing ? ${PRINT_WIDTH} : Math.max(240, Math.floor(box.clientWidth)));
  const boxes = charts.map((spec) => document.getElementById('plot-' + spec.name));
  const wanted = [scheme, printing, ...boxes.map(widthOf)].join();
  if (wanted === state) return;
  const widths = boxes.map(widthOf);
  state = wanted;
  charts.forEach((spec, i) => {
    const canvas = boxes[i].querySelector('canvas');
    drawn.get(spec.name)?.destroy();
    const height = widths[i] < 620 ? Math.round(spec.height * ${NARROW_HEIGHT}) : spec.height;
    canvas.width = widths[i];
    canvas.height = height;
    canvas.style.width = widths[i] + 'px';
    canvas.style.height = height + 'px';
    const view = {
      ...looks[scheme],
      text,
      width: widths[i],
      title: false,
      fontFamily: getComputedStyle(document.body).fontFamily,
      responsive: false,
      ratio: printing ? 2 : Math.max(1, devicePixelRatio),
    };
    drawn.set(spec.name, new Chart(canvas, chartConfig(spec, view, painters)));
  });
}
const draw = () => drawAll(print.matches);
addEventListener('resize', draw);
addEventListener('beforeprint', () => drawAll(true));
addEventListener('afterprint', () => drawAll(false));
dark.addEventListener('change', draw);
print.addEventListener('change', draw);
draw();
})();`;
}

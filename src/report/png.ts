import { createCanvas, GlobalFonts } from '@napi-rs/canvas';
import { Chart, registerables } from 'chart.js';
import { chartConfig, PAINTERS } from './charts/drawing.ts';
import type { ChartSpec } from './spec.ts';
import { COLOURS, TEXT } from './style.ts';

/** Contents of the font files. Without them no text would be drawn, silently: hence they are asked for. */
export interface ChartFonts {
  readonly regular: Uint8Array;
  readonly bold: Uint8Array;
}

/** Logical width of a chart, drawn at two pixels each way. */
export const PNG_WIDTH = 800;
const RATIO = 2;
/** A name of our own, so that no font of the machine stands in for the one given. */
const FAMILY = 'Chart Sans';

/**
 * Letters that the Latin font files lack and units or names may hold; drawn in words so that the picture is the same on
 * every machine.
 */
const SPELLED: Record<string, string> = {
  '\u2126': 'ohm',
  '\u03a9': 'ohm',
  '\u03b1': 'alpha',
  '\u03b2': 'beta',
  '\u03b3': 'gamma',
  '\u0394': 'delta',
  '\u03b4': 'delta',
  '\u03b8': 'theta',
  '\u03bb': 'lambda',
  '\u03bc': '\u00b5',
  '\u03c0': 'pi',
  '\u03c1': 'rho',
  '\u03c3': 'sigma',
  '\u03c4': 'tau',
  '\u03c6': 'phi',
  '\u03c8': 'psi',
  '\u03c9': 'omega',
  '\u2264': '<=',
  '\u2265': '>=',
  '\u2192': '->',
};

let registered: ChartFonts | undefined;

/** Registers the two fonts once. @throws Error when a file is not a font. */
function registerFonts(fonts: ChartFonts): void {
  if (registered?.regular === fonts.regular && registered.bold === fonts.bold) return;
  for (const [weight, bytes] of Object.entries(fonts)) {
    if (!GlobalFonts.register(Buffer.from(bytes), FAMILY)) {
      throw new Error(`the ${weight} font of the charts is not a font file`);
    }
  }
  Chart.register(...registerables);
  registered = fonts;
}

/**
 * A chart as PNG, 1600 pixels wide: the same bytes for the same description and fonts.
 * @throws Error when a font file is not a font.
 */
export function drawPng(spec: ChartSpec, fonts: ChartFonts): Uint8Array {
  registerFonts(fonts);
  const canvas = createCanvas(PNG_WIDTH, spec.height);
  canvas.getContext('2d').lang = 'en';
  const config = chartConfig(
    spellOut(spec),
    {
      width: PNG_WIDTH,
      title: true,
      fontFamily: FAMILY,
      colours: {},
      paper: COLOURS.paper.light,
      ink: COLOURS.ink.light,
      quiet: COLOURS.quiet.light,
      grid: COLOURS.grid.light,
      responsive: false,
      ratio: RATIO,
      text: TEXT,
    },
    PAINTERS,
  );
  const chart = new Chart(canvas as unknown as HTMLCanvasElement, config);
  const png = canvas.toBuffer('image/png');
  chart.destroy();
  return new Uint8Array(png);
}

function spellOut(spec: ChartSpec): ChartSpec {
  const letters = new RegExp(`[${Object.keys(SPELLED).join('')}]`, 'gu');
  return JSON.parse(JSON.stringify(spec), (_, value) =>
    typeof value === 'string' ? value.replace(letters, (letter) => SPELLED[letter]) : value,
  );
}

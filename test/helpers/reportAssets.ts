import { readFileSync } from 'node:fs';
import { createRequire } from 'node:module';
import { dirname, join } from 'node:path';
import type { ChartFonts } from '../../src/report/png.ts';

const find = createRequire(import.meta.url).resolve;
const font = (weight: number) =>
  readFileSync(find(`@fontsource/dejavu-sans/files/dejavu-sans-latin-${weight}-normal.woff2`));

export const fonts: ChartFonts = { regular: font(400), bold: font(700) };
export const chartScript = readFileSync(join(dirname(find('chart.js')), 'chart.umd.min.js'), 'utf8');

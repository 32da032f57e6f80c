import { readFileSync } from 'node:fs';
import { createRequire } from 'node:module';
import type { ChartFonts } from '../report/png.ts';

/** The two font files of the charts, from the font package. */
export function readFonts(): ChartFonts {
  const find = createRequire(import.meta.url).resolve;
  const read = (weight: 400 | 700) =>
    readFileSync(find(`@fontsource/dejavu-sans/files/dejavu-sans-latin-${weight}-normal.woff2`));
  return { regular: read(400), bold: read(700) };
}

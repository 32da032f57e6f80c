import type { StudyResult } from '../findings/studyResult.ts';
import { describeCharts } from './charts/all.ts';
import { type ChartFonts, drawPng } from './png.ts';

/** All charts of a study as PNG files. @throws Error when a font file is not a font. */
export function drawCharts(result: StudyResult, fonts: ChartFonts): { name: string; png: Uint8Array }[] {
  return describeCharts(result).map((spec) => ({ name: `${spec.name}.png`, png: drawPng(spec, fonts) }));
}

import { join } from 'node:path';
import type { Caution } from '../findings/caution.ts';
import { findCautions } from '../findings/findCautions.ts';
import type { StudyResult } from '../findings/studyResult.ts';
import { readChartScript } from './chartScript.ts';
import { readFonts } from './fonts.ts';
import { type OpenStudy, studyName } from './openStudy.ts';
import { version } from './version.ts';
import { writeFolderWhole, writeWhole } from './writeWhole.ts';

/** 1 when an acceptance limit was missed or a caution is an error, else 0. */
export function exitCodeOf(result: StudyResult, cautions: readonly Caution[]): number {
  const missed = result.acceptance.some(({ met }) => !met);
  return missed || cautions.some(({ severity }) => severity === 'error') ? 1 : 0;
}

/** Writes `report.html` and the folder `charts`; returns the cautions that the page shows. */
export async function writeReport({ folder }: OpenStudy, result: StudyResult): Promise<readonly Caution[]> {
  const cautions = findCautions(result);
  const { drawCharts } = await import('../report/drawCharts.ts');
  const charts = drawCharts(result, readFonts());
  writeFolderWhole(
    join(folder, 'charts'),
    charts.map(({ name, png }) => ({ path: name, bytes: png })),
  );
  const { renderReport } = await import('../report/page.ts');
  writeWhole(join(folder, 'report.html'), renderReport(result, cautions, { chartScript: readChartScript() }));
  return cautions;
}

/** Writes the folder `export`; returns the paths of its files below the folder of results. */
export async function writeExport(
  { folder, study }: OpenStudy,
  result: StudyResult,
): Promise<readonly string[]> {
  const { exportFiles } = await import('../export/exportFiles.ts');
  const files = exportFiles(result, { name: studyName(study.file), version: version() });
  writeFolderWhole(join(folder, 'export'), files);
  return files.map(({ path }) => join('export', path));
}

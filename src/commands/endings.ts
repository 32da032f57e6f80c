import { join } from 'node:path';
import { exportFiles } from '../export/exportFiles.ts';
import type { Caution } from '../findings/caution.ts';
import { findCautions } from '../findings/findCautions.ts';
import type { StudyResult } from '../findings/studyResult.ts';
import type { OpenStudy } from './openStudy.ts';
import { writeFolderWhole, writeWhole } from './writeWhole.ts';

/** 1 when an acceptance limit was missed or a caution is an error, else 0. */
export function exitCodeOf(result: StudyResult, cautions: readonly Caution[]): number {
  const missed = result.acceptance.some(({ met }) => !met);
  return missed || cautions.some(({ severity }) => severity === 'error') ? 1 : 0;
}

/** Writes `report.html` and the folder `charts`; returns the cautions that the page shows. */
export async function writeReport({ folder }: OpenStudy, result: StudyResult): Promise<readonly Caution[]> {
  const { reportFiles } = await import('../report/reportFiles.ts');
  const cautions = findCautions(result);
  const { page, charts } = await reportFiles(result, cautions);
  writeFolderWhole(join(folder, 'charts'), charts);
  writeWhole(join(folder, 'report.html'), page);
  return cautions;
}

/** Writes the folder `export`; returns the paths of its files below the folder of results. */
export async function writeExport({ folder }: OpenStudy, result: StudyResult): Promise<readonly string[]> {
  const files = await exportFiles(result);
  writeFolderWhole(join(folder, 'export'), files);
  return files.map(({ path }) => join('export', path));
}

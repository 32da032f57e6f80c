import type { StudyResult } from '../findings/studyResult.ts';
import { listMatrices } from './arrays.ts';
import { headerName, writeCHeader } from './cHeader.ts';
import { controllerDocument } from './controllerDocument.ts';
import { CONTROLLER_SCHEMA } from './controllerSchema.ts';
import { writeJson } from './json.ts';
import { writeMatrixMarket } from './matrixMarket.ts';
import type { ExportOptions } from './options.ts';
import { writeReadme } from './readme.ts';
import { computeExample } from './workedExample.ts';

/** One exported file; `path` is relative to the export folder, with `/`. */
export interface ExportedFile {
  readonly path: string;
  readonly bytes: string;
}

/**
 * Everything that is handed over of a controller: README.md, controller.json with its schema, a worked example, the C99
 * header, and one Matrix Market file a matrix. The same result and options give the same bytes; no times, no paths.
 */
export function exportFiles(result: StudyResult, options: ExportOptions): readonly ExportedFile[] {
  const example = computeExample(result);
  const text = (path: string, bytes: string): ExportedFile => ({ path, bytes });
  return [
    text('README.md', writeReadme(result, options, example)),
    text('controller.json', writeJson(controllerDocument(result, options))),
    text('controller.schema.json', writeJson(CONTROLLER_SCHEMA)),
    text('example.json', writeJson(example)),
    text(headerName(options.name), writeCHeader(result, options)),
    ...listMatrices(result.design).map(({ name, matrix, shape, unit, meaning }) =>
      text(
        `matrices/${name}.mtx`,
        writeMatrixMarket(matrix, [
          `${name} of the controller "${result.title}" for the plant ${result.plant.name}`,
          `shape ${shape.join(' x ')}; ${unit}`,
          meaning,
        ]),
      ),
    ),
  ];
}

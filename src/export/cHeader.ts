import { STANDING_HAZARDS } from '../findings/hazards.ts';
import type { StudyResult } from '../findings/studyResult.ts';
import {
  type ExportedArray,
  listLiftingConstants,
  listMatrices,
  listSettings,
  SIZE_MEANINGS,
  type SizeName,
  sizesOf,
} from './arrays.ts';
import { liftingFormula } from './liftingFormulas.ts';
import { cLiteral } from './numberText.ts';
import type { ExportOptions } from './options.ts';
import { commentText, symbolName } from './symbols.ts';

/** Width of comments, and the longest line of numbers: C99 5.2.4.1 promises 4095 characters a line. */
const COMMENT_WIDTH = 100;
const LONGEST_LINE = 4000;

/** The name of the header's file. */
export function headerName(name: string): string {
  return `liftwright_${symbolName(name)}.h`;
}

/**
 * A C99 header of constants: sizes as macros, every matrix, vector and scalar as `static const`, double by default and float
 * where `LIFTWRIGHT_<NAME>_FLOAT` is defined. Every number is the shortest decimal that reads back as the same double; in
 * float the compiler rounds that double once more (`Math.fround`). Infinite bounds are a macro, `INFINITY` of math.h unless
 * the user defines it before; math.h is included only where it is needed. A constant beyond the range of float turns the
 * float build into an error. The same result gives the same bytes.
 */
export function writeCHeader(result: StudyResult, options: ExportOptions): string {
  const { design, plant } = result;
  const { predictor, delay, disturbanceGain } = design.problem;
  const small = `liftwright_${symbolName(options.name)}`;
  const capital = small.toUpperCase();
  const arrays = [...listMatrices(design), ...listSettings(design)];
  const constants = listLiftingConstants(design);
  const numbers = [...arrays, ...constants].flatMap(({ matrix }) => [matrix.data]);
  const has = (test: (value: number) => boolean) => numbers.some((data) => data.some(test));
  const sizes = Object.entries(sizesOf(design)) as [SizeName, number][];
  const { theta } = design.qp;
  const define = (name: string, value: number | string, meaning: string) =>
    `#define ${`${capital}_${name}`.padEnd(capital.length + 16)} ${value} /* ${meaning} */`;
  const scalar = (name: string, value: number, unit: string, meaning: string) => [
    comment(`${name}: ${unit}. ${meaning}.`),
    `static const ${small}_real ${small}_${name} = ${cLiteral(value, `${capital}_INFINITY`)};`,
    '',
  ];
  const tooLarge = [...arrays, ...constants].find(
    ({ matrix, whole }) =>
      !whole && matrix.data.some((value) => Number.isFinite(value) && !Number.isFinite(Math.fround(value))),
  );

  const lines = [
    comment(
      `${headerName(options.name)}: constants of the controller "${result.title}" for the plant ${plant.name}.`,
      `Made by liftwright ${options.version}; do not edit. Study ${result.studyHash}, data ${result.dataHash}, seed ${result.seed}.`,
      'How the input is computed from these constants is written in README.md beside this file.',
      'SAFETY:',
      ...STANDING_HAZARDS,
      ...plant.hazards,
    ),
    `#ifndef ${capital}_H`,
    `#define ${capital}_H`,
    '',
    ...(has((value) => !Number.isFinite(value))
      ? [
          comment(
            'Where there is no limit its bound is infinite. Define this macro before the header to have another value, for instance on a target without math.h.',
          ),
          `#ifndef ${capital}_INFINITY`,
          '#include <math.h>',
          `#define ${capital}_INFINITY INFINITY`,
          '#endif',
          '',
        ]
      : []),
    comment(
      `Define ${capital}_FLOAT to have all constants in single precision. The decimals are those of the doubles; keep the compiler from reading them as float (gcc: no -fsingle-precision-constant).`,
    ),
    `#ifdef ${capital}_FLOAT`,
    ...(tooLarge ? [`#error "${small}_${tooLarge.name} does not fit into float: use double"`] : []),
    `typedef float ${small}_real;`,
    '#else',
    `typedef double ${small}_real;`,
    '#endif',
    '',
    comment('Sizes.'),
    ...sizes.map(([name, value]) => define(name, value, SIZE_MEANINGS[name])),
    '',
    comment('theta = (z, u_prev, r, d, 1): where each part begins.'),
    define('THETA_Z', theta.z, 'lifted state after the delay, NZ'),
    define('THETA_U_PREV', theta.uPrev, 'last input sent, NU'),
    define('THETA_R', theta.r, 'reference, N * NY, stage by stage'),
    define('THETA_D', theta.d, 'lifted disturbance, NZ'),
    define('THETA_ONE', theta.one, 'the number 1'),
    '',
    define('DELAY', delay, 'samples of input delay that are compensated'),
    '',
    ...scalar('sample_time', result.sampleTime, 's', 'Sample time'),
    ...scalar('disturbance_gain', disturbanceGain, '1', 'Gain of the filter on the lifted one-step residual'),
    ...arrays.flatMap((array) => declare(array, small, capital)),
    comment('Lifting z = psi(x), x and z scaled. Its entries, part by part:'),
    ...predictor.lifting.parts.map((part, i) =>
      comment(
        `Part ${i + 1}, ${part.family}: ${liftingFormula(part)}. Entries: ${part.names.join(', ') || 'none'}.`,
      ),
    ),
    '',
    ...constants.flatMap((array) => declare(array, small, capital)),
    `#endif /* ${capital}_H */`,
  ];
  return `${lines.join('\n')}\n`;
}

/** One array with its comment; one without entries is left out, since C has none. */
function declare(array: ExportedArray, small: string, capital: string): string[] {
  const { name, matrix, shape, unit, meaning, origin, whole } = array;
  const bounds = shape.map((size) => (typeof size === 'number' ? String(size) : `${capital}_${size}`));
  const told = `${name} [${shape.join('][')}] = ${matrix.rows}${shape.length > 1 ? ` x ${matrix.cols}` : ''}`;
  const about = comment(`${told}; ${unit}. ${meaning}. From ${origin} of controller.json.`);
  if (matrix.data.length === 0) return [about, ''];
  const text = (value: number) => (whole ? String(value) : cLiteral(value, `${capital}_INFINITY`));
  const row = (i: number) => Array.from(matrix.data.subarray(i * matrix.cols, (i + 1) * matrix.cols), text);
  const rows = Array.from({ length: matrix.rows }, (_, i) => row(i));
  const body =
    shape.length === 1
      ? breakLine(rows.flat(), '  ', COMMENT_WIDTH)
      : rows.map((entries) => `  {${breakLine(entries, '   ', LONGEST_LINE).trimStart()}}`).join(',\n');
  const type = whole ? 'int' : `${small}_real`;
  return [about, `static const ${type} ${small}_${name}[${bounds.join('][')}] = {`, body, '};', ''];
}

/** Entries with commas, on as many lines as they need. */
function breakLine(entries: readonly string[], indent: string, width: number): string {
  const lines: string[] = [];
  let line = indent;
  entries.forEach((entry, i) => {
    const piece = i < entries.length - 1 ? `${entry},` : entry;
    if (line !== indent && line.length + piece.length + 1 > width) {
      lines.push(line);
      line = indent;
    }
    line += line === indent ? piece : ` ${piece}`;
  });
  return [...lines, line].join('\n');
}

/** A C comment of sentences, each beginning a line, broken at the width. */
function comment(...sentences: readonly string[]): string {
  const lines = sentences.flatMap((sentence) => wrap(commentText(sentence)));
  if (lines.length === 1) return `/* ${lines[0]} */`;
  return ['/*', ...lines.map((line) => ` * ${line}`.trimEnd()), ' */'].join('\n');
}

function wrap(text: string): string[] {
  const lines: string[] = [];
  let line = '';
  for (const word of text.split(' ')) {
    if (line !== '' && line.length + word.length + 1 > COMMENT_WIDTH) {
      lines.push(line);
      line = word;
    } else line = line === '' ? word : `${line} ${word}`;
  }
  return [...lines, line];
}

import { type Matrix, zeros } from '../numerics/matrix.ts';
import { shortest } from './numberText.ts';

/** Stored entries below this share of all make the coordinate format the shorter one. */
const SPARSE = 1 / 3;
/** Longest line that the format allows. */
const LONGEST_LINE = 1024;

/**
 * A real matrix as text of the Matrix Market exchange format: the header, comment lines, the size line, then for `array` all
 * entries one a line column by column, for `coordinate` one line `row column value` for each stored entry, counted from 1,
 * columns in turn. Entries that are +0 are left out of `coordinate`; a −0 is stored, so that every bit comes back. Infinite
 * entries, of which the format says nothing, are written `inf` and `-inf`, not-a-number `nan`, as C99's `printf` writes them
 * and `strtod` reads them.
 * Source: R. F. Boisvert, R. Pozo, K. A. Remington, The Matrix Market Exchange Formats: Initial Design, NISTIR 5935, 1996.
 *
 * @param comments lines without the `%`; longer than a line may be, or broken, they are split.
 * @param format the shorter one when left out.
 */
export function writeMatrixMarket(
  M: Matrix,
  comments: readonly string[],
  format: 'array' | 'coordinate' = isSparse(M) ? 'coordinate' : 'array',
): string {
  const { rows, cols, data } = M;
  const lines = [`%%MatrixMarket matrix ${format} real general`];
  for (const comment of comments) {
    for (const line of comment.split(/\r?\n/)) {
      for (let at = 0; at === 0 || at < line.length; at += LONGEST_LINE - 2) {
        lines.push(`% ${line.slice(at, at + LONGEST_LINE - 2)}`.trimEnd());
      }
    }
  }
  const entries: string[] = [];
  for (let j = 0; j < cols; j++) {
    for (let i = 0; i < rows; i++) {
      const value = data[i * cols + j];
      if (format === 'array') entries.push(numberText(value));
      else if (!Object.is(value, 0)) entries.push(`${i + 1} ${j + 1} ${numberText(value)}`);
    }
  }
  lines.push(format === 'array' ? `${rows} ${cols}` : `${rows} ${cols} ${entries.length}`, ...entries);
  return `${lines.join('\n')}\n`;
}

function isSparse({ data }: Matrix): boolean {
  const stored = data.reduce((count, value) => (Object.is(value, 0) ? count : count + 1), 0);
  return stored < SPARSE * data.length;
}

function numberText(value: number): string {
  if (Number.isFinite(value)) return shortest(value);
  return Number.isNaN(value) ? 'nan' : value > 0 ? 'inf' : '-inf';
}

/** A text that is not a Matrix Market file of real numbers; the message names the line. */
export class UnusableMatrixError extends Error {
  constructor(line: number, must: string, got: string) {
    super(`line ${line}: must be ${must}, got ${got.slice(0, 80) || 'nothing'}`);
    this.name = 'UnusableMatrixError';
  }
}

/**
 * Reads a dense or sparse real matrix of the Matrix Market exchange format, `general` or `symmetric`. Words of the header may be
 * in any case; blank lines and several numbers on a line are accepted.
 *
 * @throws UnusableMatrixError when the text is something else, too short, too long, or an index is out of range.
 */
export function readMatrixMarket(text: string): Matrix {
  const lines = text.split(/\r?\n/);
  const [banner, object, format, field, symmetry] = lines[0].trim().toLowerCase().split(/\s+/);
  const isKnown =
    banner === '%%matrixmarket' &&
    object === 'matrix' &&
    (format === 'array' || format === 'coordinate') &&
    (field === 'real' || field === 'integer' || field === 'double') &&
    (symmetry === 'general' || symmetry === 'symmetric');
  if (!isKnown) {
    const must = '%%MatrixMarket matrix array|coordinate real general|symmetric';
    throw new UnusableMatrixError(1, must, lines[0]);
  }
  const words: { readonly text: string; readonly line: number }[] = [];
  for (let i = 1; i < lines.length; i++) {
    if (lines[i].startsWith('%')) continue;
    for (const word of lines[i].trim().split(/\s+/)) if (word !== '') words.push({ text: word, line: i + 1 });
  }
  let next = 0;
  const take = () => words[next++] ?? { text: '', line: lines.length };
  const takeIndex = (most: number, least: number) => {
    const { text: word, line } = take();
    const value = Number(word);
    const isIndex = /^\d+$/.test(word) && value >= least && value <= most;
    if (!isIndex) throw new UnusableMatrixError(line, `an integer from ${least} to ${most}`, word);
    return value;
  };
  const takeNumber = () => {
    const { text: word, line } = take();
    const value = parseReal(word);
    if (value === null) throw new UnusableMatrixError(line, 'a real number', word);
    return value;
  };
  const M = zeros(takeIndex(2 ** 24, 0), takeIndex(2 ** 24, 0));
  const { rows, cols, data } = M;
  const isSymmetric = symmetry === 'symmetric';
  const set = (i: number, j: number, value: number) => {
    data[i * cols + j] = value;
    if (isSymmetric) data[j * cols + i] = value;
  };
  if (isSymmetric && rows !== cols) throw new UnusableMatrixError(words[0].line, 'square', `${rows} ${cols}`);
  if (format === 'array') {
    for (let j = 0; j < cols; j++) for (let i = isSymmetric ? j : 0; i < rows; i++) set(i, j, takeNumber());
  } else {
    const entries = takeIndex(rows * cols, 0);
    for (let k = 0; k < entries; k++) {
      const i = takeIndex(rows, 1) - 1;
      set(i, takeIndex(cols, 1) - 1, takeNumber());
    }
  }
  if (next < words.length) throw new UnusableMatrixError(words[next].line, 'the end', words[next].text);
  return M;
}

function parseReal(word: string): number | null {
  const special = /^([+-]?)(inf(?:inity)?|nan)$/i.exec(word);
  if (special) {
    if (special[2].toLowerCase() === 'nan') return Number.NaN;
    return special[1] === '-' ? Number.NEGATIVE_INFINITY : Number.POSITIVE_INFINITY;
  }
  return /^[+-]?(\d+\.?\d*|\.\d+)([eEdD][+-]?\d+)?$/.test(word) ? Number(word.replace(/d/i, 'e')) : null;
}

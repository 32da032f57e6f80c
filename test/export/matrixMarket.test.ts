import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { readMatrixMarket, UnusableMatrixError, writeMatrixMarket } from '../../src/export/matrixMarket.ts';
import { fromRows, toRows, zeros } from '../../src/numerics/matrix.ts';
import { bitsOf, UGLY } from './bits.ts';

describe('Matrix Market files', () => {
  // R. F. Boisvert, R. Pozo, K. A. Remington, NISTIR 5935, 1996, and the page "Text File Formats" of the Matrix Market: the
  // 5 × 5 example with 8 entries. The matrix is read; the lines of its entries are from memory, in the form of that page.
  const EXAMPLE = [
    [1, 0, 0, 6, 0],
    [0, 10.5, 0, 0, 0],
    [0, 0, 0.015, 0, 0],
    [0, 250.5, 0, -280, 33.32],
    [0, 0, 0, 0, 12],
  ];
  const PRINTED = `%%MatrixMarket matrix coordinate real general
%=================================================================================
% comments
%=================================================================================
  5  5  8
    1     1   1.000e+00
    2     2   1.050e+01
    3     3   1.500e-02
    1     4   6.000e+00
    4     2   2.505e+02
    4     4  -2.800e+02
    4     5   3.332e+01
    5     5   1.200e+01
`;

  it('the published sparse example reads as the matrix that it shows (published: NIST)', () => {
    expect(toRows(readMatrixMarket(PRINTED))).toEqual(EXAMPLE);
    expect(toRows(readMatrixMarket(writeMatrixMarket(fromRows(EXAMPLE), [], 'coordinate')))).toEqual(EXAMPLE);
  });

  it('a dense file lists its entries column by column under the sizes (published form: NISTIR 5935, array format)', () => {
    const M = fromRows([
      [11, 12, 13],
      [21, 22, 23],
    ]);
    expect(writeMatrixMarket(M, ['made by hand'], 'array')).toBe(
      '%%MatrixMarket matrix array real general\n% made by hand\n2 3\n11\n21\n12\n22\n13\n23\n',
    );
    expect(
      toRows(readMatrixMarket('%%matrixmarket MATRIX Array Real General\n2 3\n11 21\n\n12 22 13 23')),
    ).toEqual(toRows(M));
  });

  it('a symmetric file gives both halves from its lower one (closed form)', () => {
    const dense = '%%MatrixMarket matrix array real symmetric\n3 3\n1\n2\n3\n4\n5\n6\n';
    const rows = [
      [1, 2, 3],
      [2, 4, 5],
      [3, 5, 6],
    ];
    expect(toRows(readMatrixMarket(dense))).toEqual(rows);
    const sparse = '%%MatrixMarket matrix coordinate real symmetric\n2 2 2\n2 1 7\n2 2 1d0\n';
    expect(toRows(readMatrixMarket(sparse))).toEqual([
      [0, 7],
      [7, 1],
    ]);
  });

  it('every bit comes back in both formats: −0, subnormals, infinities, NaN (relation: writing then reading)', () => {
    const value = fc.oneof(fc.double(), fc.constantFrom(...UGLY, Number.NaN));
    const shape = fc.tuple(fc.integer({ min: 0, max: 6 }), fc.integer({ min: 0, max: 6 }));
    const matrix = shape.chain(([rows, cols]) =>
      fc.array(value, { minLength: rows * cols, maxLength: rows * cols }).map((data) => ({
        rows,
        cols,
        data: Float64Array.from(data),
      })),
    );
    fc.assert(
      fc.property(
        matrix,
        fc.constantFrom('array', 'coordinate', undefined),
        fc.string(),
        (M, format, comment) => {
          const back = readMatrixMarket(writeMatrixMarket(M, [comment], format));
          expect([back.rows, back.cols]).toEqual([M.rows, M.cols]);
          expect(Array.from(back.data, bitsOf)).toEqual(Array.from(M.data, bitsOf));
        },
      ),
      { numRuns: 300 },
    );
  });

  it('the shorter format is chosen, −0 is stored, and no line is longer than 1024 (published form: NISTIR 5935)', () => {
    expect(writeMatrixMarket(fromRows([[1, 0, 2]]), [])).toContain('array');
    const thin = zeros(5, 5);
    thin.data[7] = -0;
    const text = writeMatrixMarket(thin, ['x'.repeat(3000), 'a\nb']);
    expect(text).toContain('coordinate');
    expect(text).toContain('\n5 5 1\n2 3 -0\n');
    expect(text).toContain('\n% a\n% b\n');
    expect(Math.max(...text.split('\n').map((line) => line.length))).toBeLessThanOrEqual(1024);
  });

  it.each([
    ['a text of another kind', 'A 1 2', 'line 1: must be %%MatrixMarket'],
    ['complex entries', '%%MatrixMarket matrix array complex general\n1 1\n1 0', 'line 1'],
    [
      'a missing entry',
      '%%MatrixMarket matrix array real general\n2 1\n1\n',
      'line 4: must be a real number, got nothing',
    ],
    [
      'an entry too many',
      '%%MatrixMarket matrix array real general\n1 1\n1\n2\n',
      'line 4: must be the end, got 2',
    ],
    [
      'a word for a number',
      '%%MatrixMarket matrix array real general\n1 1\none\n',
      'line 3: must be a real number, got one',
    ],
    [
      'an index of zero',
      '%%MatrixMarket matrix coordinate real general\n2 2 1\n0 1 5\n',
      'line 3: must be an integer from 1 to 2, got 0',
    ],
    [
      'an index too large',
      '%%MatrixMarket matrix coordinate real general\n2 2 1\n1 3 5\n',
      'line 3: must be an integer from 1 to 2, got 3',
    ],
    [
      'a size that is no integer',
      '%%MatrixMarket matrix array real general\n1.5 2\n',
      'line 2: must be an integer',
    ],
    [
      'a symmetric matrix that is not square',
      '%%MatrixMarket matrix array real symmetric\n1 2\n1\n',
      'must be square',
    ],
  ])('%s is refused with its line', (_, text, message) => {
    expect(() => readMatrixMarket(text)).toThrow(UnusableMatrixError);
    expect(() => readMatrixMarket(text)).toThrow(message);
  });
});

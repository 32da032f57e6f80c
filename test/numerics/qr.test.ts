import { Matrix as Dense, solve } from 'ml-matrix';
import { describe, expect, it } from 'vitest';
import { foldRows } from '../../src/numerics/householder.ts';
import { createRandom } from '../../src/numerics/random.ts';
import { createRowBlock } from '../../src/numerics/rowBlock.ts';

const plainArray = (length: number) => new Float64Array(length);

/** Factors the rows `[W | Y]` in blocks of `size` rows; `rows[k]` has p + q entries. */
function factor(rows: readonly number[][], p: number, q: number, size: number) {
  const block = createRowBlock(size, p, q, plainArray);
  const R = plainArray(block.targets * block.stride);
  const left = plainArray(q);
  for (let from = 0; from < rows.length; from += size) {
    const part = rows.slice(from, from + size);
    part.forEach((row, r) => {
      block.data.set(row.slice(0, p), r * block.stride);
      block.data.set(row.slice(p), r * block.stride + block.targets);
    });
    foldRows(R, block, part.length, left);
  }
  const at = (i: number, j: number) => R[i * block.stride + (j < p ? j : block.targets + j - p)];
  return { at, left };
}

const draw = (m: number, n: number, seed: number, scale = 1) => {
  const random = createRandom(seed);
  return Array.from({ length: m }, () => Array.from({ length: n }, () => scale * (2 * random() - 1)));
};

const inner = (rows: readonly number[][], i: number, j: number) =>
  rows.reduce((sum, row) => sum + row[i] * row[j], 0);

/** Rounding of m products added up, relative to the lengths of the columns. */
const tolerance = (m: number) => 4 * m * Number.EPSILON;

describe('the accumulated orthogonal factorisation', () => {
  const shapes = [
    [1, 1, 1, 4],
    [7, 3, 2, 4],
    [50, 5, 5, 16],
    [3, 9, 4, 2],
    [300, 17, 6, 128],
  ];
  for (const [m, p, q, size] of shapes) {
    for (const scale of [1, 1e9, 1e-9]) {
      it(`satisfies its defining equations RᵀR = WᵀW, RᵀQ = WᵀY: ${m} rows, ${p} + ${q} columns, times ${scale}`, () => {
        const rows = draw(m, p + q, 3, scale);
        const { at, left } = factor(rows, p, q, size);
        for (let j = 0; j < p + q; j++) {
          for (let i = 0; i < Math.min(p, j + 1); i++) {
            let sum = 0;
            for (let k = 0; k < p; k++) sum += at(k, i) * at(k, j);
            const lengths = Math.sqrt(inner(rows, i, i) * inner(rows, j, j));
            expect(Math.abs(sum - inner(rows, i, j))).toBeLessThanOrEqual(tolerance(m + p) * lengths);
          }
        }
        for (let i = 0; i < p; i++) for (let j = 0; j < i; j++) expect(at(i, j)).toBe(0);
        // ‖y‖² = ‖Q column‖² + what is left over.
        for (let c = 0; c < q; c++) {
          let sum = left[c];
          for (let k = 0; k < p; k++) sum += at(k, p + c) ** 2;
          const square = inner(rows, p + c, p + c);
          expect(Math.abs(sum - square)).toBeLessThanOrEqual(tolerance(m + p) * square);
        }
      });
    }
  }

  it('solves least squares as the decomposition of an independent package does', () => {
    const rows = draw(200, 9, 5);
    const { at } = factor(rows, 6, 3, 64);
    const expected = solve(
      new Dense(rows.map((row) => row.slice(0, 6))),
      new Dense(rows.map((row) => row.slice(6))),
    );
    for (let c = 0; c < 3; c++) {
      const theta = new Array<number>(6).fill(0);
      for (let i = 5; i >= 0; i--) {
        let sum = at(i, 6 + c);
        for (let j = i + 1; j < 6; j++) sum -= at(i, j) * theta[j];
        theta[i] = sum / at(i, i);
        expect(Math.abs(theta[i] - expected.get(i, c))).toBeLessThan(1e-13);
      }
    }
  });

  it('keeps the digits of a residual ten orders below the target: it is y less its projection', () => {
    const residual = 1e-10;
    // y = w + residual · e with e orthogonal to w.
    const rows = [
      [1, 1 + residual],
      [1, 1 - residual],
    ];
    const { left } = factor(rows, 1, 1, 2);
    expect(Math.abs(left[0] / (2 * residual ** 2) - 1)).toBeLessThan(1e-5);
  });

  it('leaves zero columns zero and lets NaN be seen', () => {
    const zero = factor(
      [
        [0, 2],
        [0, 3],
      ].map(([a, b]) => [a, b, 1]),
      2,
      1,
      2,
    );
    expect(zero.at(0, 0)).toBe(0);
    expect(Math.abs(zero.at(1, 1))).toBeCloseTo(Math.sqrt(13), 14);
    const spoilt = factor(
      [
        [1, Number.NaN, 1],
        [1, 2, 3],
      ],
      2,
      1,
      2,
    );
    expect([spoilt.at(1, 1), spoilt.left[0]].some(Number.isNaN)).toBe(true);
  });
});

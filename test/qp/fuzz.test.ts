import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { createExactSolver } from '../../src/qp/exact.ts';
import { dataOf, judge, type Program, proves, structureOf } from '../helpers/qpJudge.ts';

const INF = Number.POSITIVE_INFINITY;

/** Small programs with entries that meet, cancel and vanish: integers, so that ties and dependent rows are the rule. */
const entry = fc.integer({ min: -3, max: 3 });
const program = fc
  .record({ n: fc.integer({ min: 1, max: 4 }), m: fc.integer({ min: 0, max: 7 }) })
  .chain(({ n, m }) =>
    fc.record({
      root: fc.array(fc.array(entry, { minLength: n, maxLength: n }), { minLength: n, maxLength: n }),
      ridge: fc.constantFrom(1, 1e-3, 1e-6),
      q: fc.array(entry, { minLength: n, maxLength: n }),
      rows: fc.array(
        fc.record({
          g: fc.array(entry, { minLength: n, maxLength: n }),
          low: fc.oneof(entry, fc.constant(-INF)),
          room: fc.oneof(fc.constantFrom(0, 1, 2), fc.constant(INF)),
          softness: fc.constantFrom(0, 0, 0, 1, 1e-4),
        }),
        { minLength: m, maxLength: m },
      ),
    }),
  )
  .map(
    ({ root, ridge, q, rows }): Program => ({
      H: q.map((_, i) => q.map((__, j) => root.reduce((sum, r) => sum + r[i] * r[j], i === j ? ridge : 0))),
      q,
      G: rows.map(({ g }) => g),
      lower: rows.map(({ low }) => low),
      upper: rows.map(({ low, room }) => (low === -INF ? (room === INF ? INF : room) : low + room)),
      softness: rows.map(({ softness }) => softness),
    }),
  );

/** What must hold of any answer: optimal means the conditions, infeasible means a proof; there is no third verdict. */
function check(candidate: Program): void {
  const solver = createExactSolver(structureOf(candidate));
  for (let pass = 0; pass < 2; pass++) {
    const result = solver.solve(...dataOf(candidate));
    if (result.status === 'optimal') {
      expect(judge(candidate, result.x, result.multipliers)).toBeLessThan(1e-11);
    } else {
      expect(result.status).toBe('infeasible');
      const empty = candidate.G.some(
        (g, i) =>
          candidate.softness![i] === 0 &&
          g.every((value) => value === 0) &&
          !(candidate.lower[i] <= 0 && candidate.upper[i] >= 0),
      );
      if (!empty) expect(proves(candidate, result.certificate)).toBe(true);
    }
  }
}

/** Cases that fuzzing found and shrank, with what was wrong. */
const FOUND: readonly (readonly [string, Program])[] = [
  [
    'the optimum at x = 0 with bounds of 0: rounding of 1e-17 was measured against itself, and the verdict was failed',
    {
      H: [
        [1, 0],
        [0, 1],
      ],
      q: [0, 1],
      G: [
        [2, 0],
        [-1, -1],
      ],
      lower: [-INF, -INF],
      upper: [0, 0],
      softness: [0, 0],
    },
  ],
  [
    'a soft row beside the proof: the certificate was right to 3e-11 only',
    {
      H: [
        [1e-6, 0],
        [0, 1e-6],
      ],
      q: [1, 0],
      G: [
        [1, 0],
        [0, 1],
        [1, -1],
        [0, -1],
      ],
      lower: [0, 0, -INF, 1],
      upper: [0, 0, 0, INF],
      softness: [0, 1, 0, 0],
    },
  ],
  [
    'a soft equality against a hard bound, forces of 1e4 that cancel at x = 0',
    { H: [[1]], q: [0], G: [[-1], [3]], lower: [-INF, -1], upper: [0, -1], softness: [0, 1e-4] },
  ],
  [
    'a soft and a hard row that are parallel for a weak H: was called infeasible, the proof good only near x = 0',
    { H: [[1e-6]], q: [0], G: [[-1], [1]], lower: [0, 1], upper: [0, 1], softness: [1e-4, 0] },
  ],
  [
    'a row whose multiplier is rounding beside others of 1e5: joined and left without end',
    {
      H: [
        [18 + 1e-6, 3],
        [3, 1 + 1e-6],
      ],
      q: [0, -2],
      G: [
        [-2, -3],
        [-1, 0],
        [-1, 2],
        [1, 3],
      ],
      lower: [1, 2, -INF, 1],
      upper: [INF, INF, 0, 3],
      softness: [1, 0, 1e-4, 0],
    },
  ],
];

describe('small integer programs, where ties and dependent rows are the rule', () => {
  it('are optimal with the conditions met, or infeasible with a proof: 10,000 draws', () => {
    fc.assert(fc.property(program, check), { numRuns: 10_000, seed: 31 });
  });

  for (const [name, found] of FOUND) it(`found: ${name}; now the conditions or a proof`, () => check(found));
});

import { describe, expect, it } from 'vitest';
import { createExactSolver } from '../../src/qp/exact.ts';
import { costOf, dataOf, judge, type Program, structureOf } from '../helpers/qpJudge.ts';

const INF = Number.POSITIVE_INFINITY;

interface Published {
  readonly name: string;
  readonly program: Program;
  /** Constant of the cost. */
  readonly c0: number;
  readonly cost: number;
  readonly x: readonly number[];
  /** Multiplier of each row, positive at an upper bound; null where the source gives none. */
  readonly multipliers: readonly (number | null)[] | null;
}

/** Rows `G`, then the box `low ≤ x ≤ high` as rows. */
function withBox(
  H: number[][],
  q: number[],
  rows: readonly (readonly [number[], number, number])[],
  low: readonly number[] = [],
  high: readonly number[] = [],
): Program {
  const box = low.map((_, i) => q.map((__, j) => (i === j ? 1 : 0)));
  return {
    H,
    q,
    G: [...rows.map(([row]) => row), ...box],
    lower: [...rows.map(([, lower]) => lower), ...low],
    upper: [...rows.map(([, , upper]) => upper), ...high],
  };
}

const HS35_H = [
  [4, 2, 2],
  [2, 4, 0],
  [2, 0, 2],
];
const HS51_H = [
  [2, -2, 0, 0, 0],
  [-2, 4, 2, 0, 0],
  [0, 2, 2, 0, 0],
  [0, 0, 0, 2, 0],
  [0, 0, 0, 0, 2],
];

/**
 * `½ xᵀHx + qᵀx + ½ Σ (a x − b)²` over the first `count` rows, all equalities `a x = b`: the same optimum, multipliers and
 * (with c0 + ½ Σ b²) cost, and strictly convex where H alone is singular, as that of HS51 and HS53 is along (1, 1, −1, 0, 0).
 */
function convexified(program: Program, count: number): Program {
  const rows = program.G.slice(0, count);
  return {
    ...program,
    H: program.H.map((row, i) => row.map((h, j) => h + rows.reduce((sum, a) => sum + a[i] * a[j], 0))),
    q: program.q.map((value, j) => value - rows.reduce((sum, a, i) => sum + a[j] * program.lower[i], 0)),
  };
}

const CASES: readonly Published[] = [
  /*
   * W. Hock, K. Schittkowski, "Test examples for nonlinear programming codes", LNEMS 187 (1981); I. Maros, C. Mészáros,
   * "A repository of convex quadratic programming problems", Optim. Meth. Softw. 11:671–681 (1999). Read; optimum and multipliers
   * solved in exact rationals.
   */
  {
    name: 'HS21',
    program: withBox(
      [
        [0.02, 0],
        [0, 2],
      ],
      [0, 0],
      [[[10, -1], 10, INF]],
      [2, -50],
      [50, 50],
    ),
    c0: -100,
    cost: -2499 / 25,
    x: [2, 0],
    multipliers: [0, -1 / 25, 0],
  },
  {
    name: 'HS35',
    program: withBox(HS35_H, [-8, -6, -4], [[[1, 1, 2], -INF, 3]], [0, 0, 0], [INF, INF, INF]),
    c0: 9,
    cost: 1 / 9,
    x: [4 / 3, 7 / 9, 4 / 9],
    multipliers: [2 / 9, 0, 0, 0],
  },
  {
    name: 'HS35MOD',
    program: withBox(HS35_H, [-8, -6, -4], [[[1, 1, 2], -INF, 3]], [0, 0.5, 0], [INF, 0.5, INF]),
    c0: 9,
    cost: 1 / 4,
    x: [3 / 2, 1 / 2, 1 / 2],
    multipliers: [0, 0, 1, 0],
  },
  {
    name: 'HS51',
    program: convexified(
      withBox(
        HS51_H,
        [0, -4, -4, -2, -2],
        [
          [[1, 3, 0, 0, 0], 4, 4],
          [[0, 0, 1, 1, -2], 0, 0],
          [[0, 1, 0, 0, -1], 0, 0],
        ],
      ),
      3,
    ),
    c0: 6 + 8,
    cost: 0,
    x: [1, 1, 1, 1, 1],
    multipliers: [0, 0, 0],
  },
  {
    name: 'HS53',
    program: convexified(
      withBox(
        HS51_H,
        [0, -4, -4, -2, -2],
        [
          [[1, 3, 0, 0, 0], 0, 0],
          [[0, 0, 1, 1, -2], 0, 0],
          [[0, 1, 0, 0, -1], 0, 0],
        ],
        [-10, -10, -10, -10, -10],
        [10, 10, 10, 10, 10],
      ),
      3,
    ),
    c0: 6,
    cost: 176 / 43,
    x: [-33 / 43, 11 / 43, 27 / 43, -5 / 43, 11 / 43],
    multipliers: null,
  },
  {
    name: 'HS76',
    program: withBox(
      [
        [2, 0, -1, 0],
        [0, 1, 0, 0],
        [-1, 0, 2, 1],
        [0, 0, 1, 1],
      ],
      [-1, -3, 1, -1],
      [
        [[1, 2, 1, 1], -INF, 5],
        [[3, 1, 2, -1], -INF, 4],
        [[0, 1, 4, 0], 1.5, INF],
      ],
      [0, 0, 0, 0],
      [INF, INF, INF, INF],
    ),
    c0: 0,
    cost: -103 / 22,
    x: [3 / 11, 23 / 11, 0, 6 / 11],
    multipliers: [5 / 11, 0, 0, 0, 0, -19 / 11, 0],
  },
  {
    name: 'HS268, whose fifth row is active with multiplier 0',
    program: withBox(
      [
        [20394, -24908, -2026, 3896, 658],
        [-24908, 41818, -3466, -9828, -372],
        [-2026, -3466, 3510, 2178, -348],
        [3896, -9828, 2178, 3030, -44],
        [658, -372, -348, -44, 54],
      ],
      [18340, -34198, 4542, 8672, 86],
      [
        [[-1, -1, -1, -1, -1], -5, INF],
        [[10, 10, -3, 5, 4], 20, INF],
        [[-8, 1, -2, -5, 3], -40, INF],
        [[8, -1, 2, 5, -3], 11, INF],
        [[-4, -2, 3, -5, 1], -30, INF],
      ],
    ),
    c0: 14463,
    cost: 0,
    x: [1, 2, -1, 3, -4],
    multipliers: [0, 0, 0, 0, 0],
  },
  /* D. Goldfarb, A. Idnani, Math. Prog. 27:1–33 (1983), the worked example. From memory, recomputed. */
  {
    name: "Goldfarb and Idnani's example",
    program: withBox(
      [
        [4, -2],
        [-2, 4],
      ],
      [6, 0],
      [[[1, 1], 2, INF]],
      [0, 0],
      [INF, INF],
    ),
    c0: 0,
    cost: 6.5,
    x: [1 / 2, 3 / 2],
    multipliers: [-5, 0, 0],
  },
  {
    name: "Goldfarb and Idnani's example with the row as an equality at 3",
    program: withBox(
      [
        [4, -2],
        [-2, 4],
      ],
      [6, 0],
      [[[1, 1], 3, 3]],
      [0, 0],
      [INF, INF],
    ),
    c0: 0,
    cost: 12,
    x: [1, 2],
    multipliers: [-6, 0, 0],
  },
  /* J. Nocedal, S. J. Wright, "Numerical Optimization", 2nd ed., Springer (2006), Ex. 16.2 and 16.4. From memory, recomputed. */
  {
    name: 'Nocedal and Wright, Example 16.2',
    program: withBox(
      [
        [6, 2, 1],
        [2, 5, 2],
        [1, 2, 4],
      ],
      [-8, -3, -3],
      [
        [[1, 0, 1], 3, 3],
        [[0, 1, 1], 0, 0],
      ],
    ),
    c0: 0,
    cost: -3.5,
    x: [2, -1, 1],
    multipliers: [-3, 2],
  },
  {
    name: 'Nocedal and Wright, Example 16.4',
    program: withBox(
      [
        [2, 0],
        [0, 2],
      ],
      [-2, -5],
      [
        [[1, -2], -2, INF],
        [[-1, -2], -6, INF],
        [[-1, 2], -2, INF],
      ],
      [0, 0],
      [INF, INF],
    ),
    c0: 7.25,
    cost: 0.8,
    x: [1.4, 1.7],
    multipliers: [-0.8, 0, 0, 0, 0],
  },
];

/**
 * Digits that double precision leaves: errors of x are amplified by the condition of H, which is below 1e2 in all cases but HS268,
 * where it is 5e6; costs that sum to 0 are known to 1e-16 of their terms.
 */
const digits = (condition: number) => 1e-14 * Math.max(10, condition);

describe('the exact solver on published quadratic programs', () => {
  for (const { name, program, c0, cost, x, multipliers } of CASES) {
    it(`${name}: the published optimum and multipliers, and the optimality conditions to 1e-13`, () => {
      const solver = createExactSolver(structureOf(program));
      const result = solver.solve(...dataOf(program));
      expect(result.status).toBe('optimal');
      const tolerance = digits(solver.condition);
      for (const [i, value] of x.entries()) {
        expect(Math.abs(result.x[i] - value)).toBeLessThan(tolerance * Math.max(1, Math.abs(value)));
      }
      const terms =
        Math.abs(c0) + Math.abs(cost) + program.q.reduce((sum, q, i) => sum + Math.abs(q * x[i]), 0);
      expect(Math.abs(costOf(program, result.x, result.multipliers) + c0 - cost)).toBeLessThan(
        1e-14 * terms * 10,
      );
      for (const [i, value] of (multipliers ?? []).entries()) {
        if (value !== null) {
          const size = Math.max(1, ...program.q.map(Math.abs));
          expect(Math.abs(result.multipliers[i] - value)).toBeLessThan(1e-14 * 10 * size);
        }
      }
      expect(judge(program, result.x, result.multipliers)).toBeLessThan(1e-13);
      expect(result.residuals.relative).toBeLessThan(1e-12);
    });
  }

  it('HS268: the fifth row lies at its bound although its multiplier is 0', () => {
    const { program } = CASES.find(({ name }) => name.startsWith('HS268'))!;
    const result = createExactSolver(structureOf(program)).solve(...dataOf(program));
    const value = program.G[4].reduce((sum, g, j) => sum + g * result.x[j], 0);
    expect(Math.abs(value - -30)).toBeLessThan(1e-7);
  });
});

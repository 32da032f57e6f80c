import { describe, expect, it } from 'vitest';
import { createExactSolver } from '../../src/qp/exact.ts';
import type { QpStatus } from '../../src/qp/qp.ts';
import { UnusableQpError } from '../../src/qp/unusableQp.ts';
import { dataOf, judge, type Program, proves, structureOf } from '../helpers/qpJudge.ts';

const INF = Number.POSITIVE_INFINITY;
const I2 = [
  [1, 0],
  [0, 1],
];

/** One solve from a cold start. */
function solve(program: Program) {
  return createExactSolver(structureOf(program)).solve(...dataOf(program));
}

interface Ugly {
  readonly name: string;
  readonly program: Program;
  readonly status: QpStatus;
  readonly x?: readonly number[];
  readonly multipliers?: readonly number[];
}

/** Verdicts and points in closed form. */
const UGLY: readonly Ugly[] = [
  {
    name: 'x ≥ 1 and x ≤ 0',
    program: { H: [[1]], q: [0], G: [[1], [1]], lower: [1, -INF], upper: [INF, 0] },
    status: 'infeasible',
  },
  {
    name: 'x₁ + x₂ = 1 and = 2',
    program: {
      H: I2,
      q: [0, 0],
      G: [
        [1, 1],
        [1, 1],
      ],
      lower: [1, 2],
      upper: [1, 2],
    },
    status: 'infeasible',
  },
  {
    name: '0 ≤ x ≤ 1 and x₁ + x₂ ≥ 3',
    program: { H: I2, q: [0, 0], G: [...I2, [1, 1]], lower: [0, 0, 3], upper: [1, 1, INF] },
    status: 'infeasible',
  },
  {
    name: '2x = 2 and 3x = 3.0001, apart by 3e-5',
    program: { H: [[1]], q: [0], G: [[2], [3]], lower: [2, 3.0001], upper: [2, 3.0001] },
    status: 'infeasible',
  },
  {
    name: 'x₁ + x₂ = 1 and 2x₁ + 2x₂ = 2',
    program: {
      H: I2,
      q: [0, 0],
      G: [
        [1, 1],
        [2, 2],
      ],
      lower: [1, 2],
      upper: [1, 2],
    },
    status: 'optimal',
    x: [0.5, 0.5],
  },
  {
    name: '½ (x − 1)² with x ≤ 1: weakly active',
    program: { H: [[1]], q: [-1], G: [[1]], lower: [-INF], upper: [1] },
    status: 'optimal',
    x: [1],
    multipliers: [0],
  },
  {
    name: 'an equality as lb = ub, pulled either way',
    program: { H: I2, q: [-3, 3], G: I2, lower: [1, 1], upper: [1, 1] },
    status: 'optimal',
    x: [1, 1],
    multipliers: [2, -4],
  },
  {
    name: 'a row of zeros that holds',
    program: { H: [[2]], q: [-2], G: [[0], [1]], lower: [-1, -INF], upper: [0, 0.5] },
    status: 'optimal',
    x: [0.5],
    multipliers: [0, 1],
  },
  {
    name: 'a row of zeros that cannot hold',
    program: { H: [[2]], q: [-2], G: [[0]], lower: [1], upper: [2] },
    status: 'infeasible',
  },
  {
    name: 'a soft row of zeros: its slack is paid, x is free',
    program: { H: [[2]], q: [-2], G: [[0]], lower: [1], upper: [2], softness: [0.5] },
    status: 'optimal',
    x: [1],
    multipliers: [-2],
  },
  {
    name: 'bounds of one row that cross',
    program: { H: [[1]], q: [0], G: [[1]], lower: [1], upper: [0] },
    status: 'infeasible',
  },
  {
    name: 'no row at all',
    program: { H: [[2]], q: [-2], G: [], lower: [], upper: [] },
    status: 'optimal',
    x: [1],
  },
  {
    name: 'rows without bounds',
    program: { H: I2, q: [-1, -2], G: I2, lower: [-INF, -INF], upper: [INF, INF] },
    status: 'optimal',
    x: [1, 2],
    multipliers: [0, 0],
  },
  {
    name: 'a corner where three rows of two variables meet',
    program: {
      H: I2,
      q: [-2, -2],
      G: [...I2, [1, 1]],
      lower: [-INF, -INF, -INF],
      upper: [1, 1, 2],
    },
    status: 'optimal',
    x: [1, 1],
  },
  {
    name: 'a soft row against a hard one: ½ x² with x ≤ 1 hard and x ≥ 3 at weight 1',
    program: { H: [[1]], q: [0], G: [[1], [1]], lower: [-INF, 3], upper: [1, INF], softness: [0, 1] },
    status: 'optimal',
    x: [1],
    // e = 2, λ₂ = −e / softness = −2; x + λ₁ + λ₂ = 0.
    multipliers: [1, -2],
  },
  {
    name: 'NaN in q',
    program: { H: [[1]], q: [Number.NaN], G: [[1]], lower: [0], upper: [1] },
    status: 'failed',
  },
  {
    name: 'infinite q',
    program: { H: [[1]], q: [INF], G: [[1]], lower: [0], upper: [1] },
    status: 'failed',
  },
  {
    name: 'NaN in a bound',
    program: { H: [[1]], q: [0], G: [[1]], lower: [Number.NaN], upper: [1] },
    status: 'failed',
  },
  {
    name: 'a lower bound of +Infinity',
    program: { H: [[1]], q: [0], G: [[1]], lower: [INF], upper: [INF] },
    status: 'failed',
  },
];

describe('the exact solver on ugly programs with verdicts in closed form', () => {
  for (const { name, program, status, x, multipliers } of UGLY) {
    it(`${name}: ${status}`, () => {
      const result = solve(program);
      expect(result.status).toBe(status);
      x?.forEach((value, i) => {
        expect(Math.abs(result.x[i] - value)).toBeLessThan(1e-15 * 10);
      });
      multipliers?.forEach((value, i) => {
        expect(Math.abs(result.multipliers[i] - value)).toBeLessThan(1e-15 * 10);
      });
      if (status === 'optimal') expect(judge(program, result.x, result.multipliers)).toBeLessThan(1e-15);
    });
  }

  for (const name of ['x ≥ 1 and x ≤ 0', 'x₁ + x₂ = 1 and = 2', '0 ≤ x ≤ 1 and x₁ + x₂ ≥ 3']) {
    it(`${name}: the certificate proves it by its definition`, () => {
      const { program } = UGLY.find((ugly) => ugly.name === name)!;
      expect(proves(program, solve(program).certificate)).toBe(true);
    });
  }

  it('the program HS35 with its row twice: the same point, and multipliers that sum to 2/9 (W. Hock, K. Schittkowski, 1981, read)', () => {
    const program: Program = {
      H: [
        [4, 2, 2],
        [2, 4, 0],
        [2, 0, 2],
      ],
      q: [-8, -6, -4],
      G: [
        [1, 1, 2],
        [1, 1, 2],
        [1, 0, 0],
        [0, 1, 0],
        [0, 0, 1],
      ],
      lower: [-INF, -INF, 0, 0, 0],
      upper: [3, 3, INF, INF, INF],
    };
    const result = solve(program);
    expect(result.status).toBe('optimal');
    [4 / 3, 7 / 9, 4 / 9].forEach((value, i) => {
      expect(Math.abs(result.x[i] - value)).toBeLessThan(1e-14);
    });
    expect(Math.abs(result.multipliers[0] + result.multipliers[1] - 2 / 9)).toBeLessThan(1e-14);
    expect(judge(program, result.x, result.multipliers)).toBeLessThan(1e-14);
  });

  it('the Hilbert matrix of order 10 as Hessian: its 1-norm condition number 3.5357e13 is reported, the conditions met', () => {
    // N. J. Higham, "Accuracy and Stability of Numerical Algorithms", 2nd ed. (2002), ch. 28: condition growing as e^{3.5 n}.
    // The 1-norm number 3.5357439251992e13 is recomputed in exact rationals.
    const H = Array.from({ length: 10 }, (_, i) => Array.from({ length: 10 }, (__, j) => 1 / (i + j + 1)));
    const G = H.map((_, i) => H.map((__, j) => (i === j ? 1 : 0)));
    const ones = H.map(() => 1);
    const program: Program = { H, q: ones.map((value) => -value), G, lower: ones.map(() => -1), upper: ones };
    const solver = createExactSolver(structureOf(program));
    // The inverse of a matrix with this condition is known to 1e13 · 1e-16 of itself.
    expect(Math.abs(solver.condition / 3.5357439251992e13 - 1)).toBeLessThan(0.02);
    const result = solver.solve(...dataOf(program));
    expect(result.status).toBe('optimal');
    expect(judge(program, result.x, result.multipliers)).toBeLessThan(1e-12);
  });
});

describe('a structure that is not strictly convex or does not fit together', () => {
  const refusal = (program: Program) => {
    try {
      createExactSolver(structureOf(program));
    } catch (error) {
      if (error instanceof UnusableQpError) return error;
      throw error;
    }
    throw new Error('the structure was accepted');
  };
  const rest = { q: [0, 0], G: I2, lower: [0, 0], upper: [1, 1] };

  it('H = diag(1, −1) is refused with its eigenvalue −1 and the way out (closed form)', () => {
    const error = refusal({
      H: [
        [1, 0],
        [0, -1],
      ],
      ...rest,
    });
    expect(error.smallestEigenvalue).toBeCloseTo(-1, 14);
    expect(error.message).toMatch(/^H: must be positive definite, got .*-1.*; .*add at least 1\.01/);
  });

  it('a singular H is refused with an eigenvalue of 0 (closed form)', () => {
    const error = refusal({
      H: [
        [1, 1],
        [1, 1],
      ],
      ...rest,
    });
    expect(Math.abs(error.smallestEigenvalue!)).toBeLessThan(1e-15);
  });

  it('the diagonal that the message asks for is enough', () => {
    const H = [
      [1, 3],
      [3, 1],
    ];
    const amount = Number(/add at least (\S+)/.exec(refusal({ H, ...rest }).message)![1]);
    const raised = H.map((row, i) => row.map((h, j) => h + (i === j ? amount : 0)));
    expect(solve({ H: raised, ...rest }).status).toBe('optimal');
  });

  it.each<[string, Program]>([
    [
      'H: must be symmetric',
      {
        H: [
          [1, 0.5],
          [0, 1],
        ],
        ...rest,
      },
    ],
    [
      'H: must be finite',
      {
        H: [
          [1, Number.NaN],
          [Number.NaN, 1],
        ],
        ...rest,
      },
    ],
    ['H: must be square', { H: [[1, 0]], ...rest }],
    ['G: must be a matrix of 1 columns', { H: [[1]], ...rest }],
    ['G[0, 1]: must be finite', { H: I2, ...rest, G: [[1, Number.NaN]], softness: [0] }],
    ['softness: must be 2 entries', { H: I2, ...rest, softness: [0] }],
    ['softness: must be finite and ≥ 0', { H: I2, ...rest, softness: [0, -1] }],
  ])('%s, it says', (message, program) => {
    expect(refusal(program).message.startsWith(message)).toBe(true);
  });
});

describe('a solver that is used again', () => {
  const program: Program = {
    H: [
      [2, 0.5],
      [0.5, 1],
    ],
    q: [-4, -1],
    G: [...I2, [1, -1]],
    lower: [-1, -1, -0.5],
    upper: [1, 1, 0.5],
  };

  it('gives the same answer again, in one round, from its own working set', () => {
    const solver = createExactSolver(structureOf(program));
    const first = solver.solve(...dataOf(program));
    const x = first.x.slice();
    expect(first.iterations).toBeGreaterThan(1);
    const again = solver.solve(...dataOf(program));
    expect(again.iterations).toBe(1);
    expect(Array.from(again.x)).toEqual(Array.from(x));
  });

  it('gives the same answer from every start that can be asked for, right or wrong', () => {
    const solver = createExactSolver(structureOf(program));
    const wanted = Array.from(solver.solve(...dataOf(program)).x);
    for (let code = 0; code < 27; code++) {
      solver.setWorkingSet(
        Int8Array.from([code % 3, Math.floor(code / 3) % 3, Math.floor(code / 9)], (s) => s - 1),
      );
      const result = solver.solve(...dataOf(program));
      expect(result.status).toBe('optimal');
      wanted.forEach((value, i) => {
        expect(Math.abs(result.x[i] - value)).toBeLessThan(1e-14);
      });
    }
  });

  it('recovers from NaN, infeasible and crossed data at the next solve', () => {
    const solver = createExactSolver(structureOf(program));
    const wanted = Array.from(solver.solve(...dataOf(program)).x);
    const broken: Partial<Program>[] = [
      { q: [Number.NaN, 0] },
      { lower: [1, -1, -0.5], upper: [1, -1, 0.5] },
      { lower: [2, -1, -0.5] },
    ];
    const verdicts = broken.map((part) => {
      const { status } = solver.solve(...dataOf({ ...program, ...part }));
      const next = solver.solve(...dataOf(program));
      wanted.forEach((value, i) => {
        expect(Math.abs(next.x[i] - value)).toBeLessThan(1e-14);
      });
      return status;
    });
    expect(verdicts).toEqual(['failed', 'infeasible', 'infeasible']);
  });

  it('stops at the iteration limit with that status, and never says optimal', () => {
    const solver = createExactSolver(structureOf(program), { iterationLimit: 1 });
    const result = solver.solve(...dataOf(program));
    expect(result.status).toBe('iteration-limit');
    expect(result.iterations).toBe(1);
  });

  it('leaves q, lower and upper as they were', () => {
    const data = dataOf(program);
    createExactSolver(structureOf(program)).solve(...data);
    expect(data.map((array) => Array.from(array))).toEqual([program.q, program.lower, program.upper]);
  });

  it('does not see a later change of the matrices it was made from', () => {
    const structure = structureOf(program);
    const solver = createExactSolver(structure);
    const wanted = Array.from(solver.solve(...dataOf(program)).x);
    structure.H.data.fill(7);
    structure.G.data.fill(7);
    structure.softness.fill(7);
    expect(Array.from(solver.solve(...dataOf(program)).x)).toEqual(wanted);
  });
});

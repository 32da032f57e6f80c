import { describe, expect, it } from 'vitest';
import { createRandom, deriveSeed, drawNormal } from '../../src/numerics/random.ts';
import { equilibrate } from '../../src/qp/equilibrate.ts';
import { createExactSolver } from '../../src/qp/exact.ts';
import { createSplitState, iterateDouble, type iterateSingle } from '../../src/qp/splitIterations.ts';
import { createSplittingSolver, type SplittingSettings } from '../../src/qp/splitting.ts';
import { UnusableQpError } from '../../src/qp/unusableQp.ts';
import { dataOf, judge, type Program, proves, structureOf } from '../helpers/qpJudge.ts';
import { drawProgram, drawSize, KINDS, type Kind } from '../helpers/qpRandom.ts';

const INF = Number.POSITIVE_INFINITY;

const solve = (program: Program, settings: SplittingSettings = {}) =>
  createSplittingSolver(structureOf(program), settings).solve(...dataOf(program));

/** Largest difference relative to the largest entry of `b`. */
function differ(a: ArrayLike<number>, b: ArrayLike<number>): number {
  let size = 0;
  let most = 0;
  for (let i = 0; i < b.length; i++) {
    size = Math.max(size, Math.abs(b[i]));
    most = Math.max(most, Math.abs(a[i] - b[i]));
  }
  return most === 0 ? 0 : most / size;
}

describe('the splitting solver with iterations until the accuracy is met', () => {
  for (const kind of KINDS) {
    it(`60 ${kind} programs, condition to 1e4, data scaled by 1e±9: the conditions to its 1e-8, the point of the exact solver`, () => {
      let worst = 0;
      let apart = 0;
      for (let i = 0; i < 60; i++) {
        const random = createRandom(deriveSeed(51, kind, i));
        const n = drawSize(random, 30);
        const scale = random() < 0.5 ? 1 : 10 ** (18 * random() - 9);
        const { program } = drawProgram(random, kind, n, 10 ** (4 * random() ** 2), scale);
        const result = solve(program, { accuracy: 1e-8 });
        expect(result.status).toBe('optimal');
        worst = Math.max(worst, judge(program, result.x, result.multipliers));
        const exact = createExactSolver(structureOf(program)).solve(...dataOf(program));
        apart = Math.max(apart, differ(result.x, exact.x));
      }
      // The judge's own measure of the terms is a little finer than the solver's.
      expect(worst).toBeLessThan(1e-7);
      // The point is known to the accuracy times the condition.
      expect(apart).toBeLessThan(1e-4);
    });
  }

  it('the published program HS35 (W. Hock, K. Schittkowski, 1981, read): (4/3, 7/9, 4/9), multiplier 2/9', () => {
    const result = solve(
      {
        H: [
          [4, 2, 2],
          [2, 4, 0],
          [2, 0, 2],
        ],
        q: [-8, -6, -4],
        G: [
          [1, 1, 2],
          [1, 0, 0],
          [0, 1, 0],
          [0, 0, 1],
        ],
        lower: [-INF, 0, 0, 0],
        upper: [3, INF, INF, INF],
      },
      { accuracy: 1e-10 },
    );
    expect(differ(result.x, [4 / 3, 7 / 9, 4 / 9])).toBeLessThan(1e-8);
    expect(differ(result.multipliers, [2 / 9, 0, 0, 0])).toBeLessThan(1e-8);
    // A multiplier is exactly 0 where the row is inside its bounds.
    expect(Array.from(result.workingSet)).toEqual([1, 0, 0, 0]);
  });

  it.each<[string, Program]>([
    ['x ≥ 1 and x ≤ 0', { H: [[1]], q: [0], G: [[1], [1]], lower: [1, -INF], upper: [INF, 0] }],
    [
      '0 ≤ x ≤ 1 and x₁ + x₂ ≥ 3',
      {
        H: [
          [1, 0],
          [0, 1],
        ],
        q: [0, 0],
        G: [
          [1, 0],
          [0, 1],
          [1, 1],
        ],
        lower: [0, 0, 3],
        upper: [1, 1, INF],
      },
    ],
  ])('%s: infeasible, with a direction that proves it to the method’s accuracy', (_, program) => {
    const result = solve(program);
    expect(result.status).toBe('infeasible');
    const v = result.certificate;
    const size = Math.max(...v.map(Math.abs));
    for (let j = 0; j < program.q.length; j++) {
      const sum = program.G.reduce((s, row, i) => s + row[j] * v[i], 0);
      expect(Math.abs(sum)).toBeLessThan(1e-4 * size);
    }
    const margin = v.reduce(
      (s, value, i) => s + (value === 0 ? 0 : value * (value > 0 ? program.upper[i] : program.lower[i])),
      0,
    );
    expect(margin).toBeLessThan(-0.1 * size);
    expect(
      proves(program, createExactSolver(structureOf(program)).solve(...dataOf(program)).certificate),
    ).toBe(true);
  });

  it('NaN gives failed, crossed bounds infeasible, too few iterations iteration-limit, and the next solve is sound', () => {
    const program: Program = { H: [[2]], q: [-8], G: [[1]], lower: [-1], upper: [1] };
    const solver = createSplittingSolver(structureOf(program), { iterationLimit: 10, accuracy: 1e-14 });
    expect(solver.solve(...dataOf({ ...program, q: [Number.NaN] })).status).toBe('failed');
    expect(solver.solve(...dataOf({ ...program, lower: [2] })).status).toBe('infeasible');
    expect(solver.solve(...dataOf(program)).status).toBe('iteration-limit');
    for (let i = 0; i < 20; i++) solver.solve(...dataOf(program));
    expect(Math.abs(solver.solve(...dataOf(program)).x[0] - 1)).toBeLessThan(1e-12);
  });

  it('from the exact point and multipliers it stays there: the optimum is a fixed point of the iteration', () => {
    for (const kind of KINDS) {
      const { program } = drawProgram(createRandom(deriveSeed(52, kind)), kind, 12, 100, 1);
      const exact = createExactSolver(structureOf(program)).solve(...dataOf(program));
      const solver = createSplittingSolver(structureOf(program), { iterations: 3 });
      // A soft row's z is where its slack puts it: G x, as for a hard row.
      solver.setPoint(exact.x, exact.multipliers);
      const result = solver.solve(...dataOf(program));
      expect(differ(result.x, exact.x)).toBeLessThan(1e-9);
    }
  });
});

describe('the proximal step of a soft row', () => {
  it('minimises ½ dist²(z, [l, u]) / softness + ½ rho (z − p)², by search on a grid', () => {
    const random = createRandom(53);
    for (let i = 0; i < 50; i++) {
      const rho = 10 ** (2 * random() - 1);
      const softness = 10 ** (2 * random() - 1);
      const [low, high] = [-random(), random()];
      const p = 4 * drawNormal(random);
      const state = createSplitState(1, 1, (length) => new Float64Array(length));
      // x stays 0 (K = 0); alpha = 1 makes z's next value the step from p = y / rho.
      state.constants.set([1e-6, 1, 0]);
      state.rho[0] = rho;
      state.inverseRho[0] = 1 / rho;
      state.give[0] = (softness * rho) / (1 + softness * rho);
      state.hold[0] = rho * (1 - state.give[0]);
      state.lower[0] = low;
      state.upper[0] = high;
      state.y[0] = rho * p;
      iterateDouble(state, 1);
      const cost = (z: number) =>
        (0.5 * Math.max(0, low - z, z - high) ** 2) / softness + 0.5 * rho * (z - p) ** 2;
      const here = cost(state.z[0]);
      for (let g = -1000; g <= 1000; g++)
        expect(here).toBeLessThanOrEqual(cost(state.z[0] + g * 1e-3) + 1e-15);
      // The multiplier is the slope of the distance term, by its definition.
      const slope = Math.max(0, state.z[0] - high) - Math.max(0, low - state.z[0]);
      expect(Math.abs(state.y[0] - slope / softness)).toBeLessThan(1e-12 * (1 + Math.abs(state.y[0])));
    }
  });
});

describe('the equilibration', () => {
  it('makes P = c D H D, A = E G D with rows of [P/c Aᵀ; A 0] of largest entry 1 to 2 %, for data over 1e±6', () => {
    const random = createRandom(60);
    const { program } = drawProgram(random, 'plain', 12, 1e3, 1);
    const size = program.q.map(() => 10 ** (6 * random() - 3));
    const H = program.H.map((row, i) => row.map((h, j) => h * size[i] * size[j]));
    const G = program.G.map((row) => {
      const factor = 10 ** (6 * random() - 3);
      return row.map((g) => g * factor);
    });
    const structure = structureOf({ ...program, H, G });
    const { P, A, D, E, c } = equilibrate(structure);
    const n = H.length;
    const largest = (values: readonly number[]) => Math.max(...values.map(Math.abs));
    const P1 = H.map((row, i) => row.map((h, j) => D[i] * h * D[j]));
    const A1 = G.map((row, i) => row.map((g, j) => E[i] * g * D[j]));
    P1.flat().forEach((value, k) => {
      expect(Math.abs(P[k] - c * value)).toBeLessThan(1e-14 * largest(P1.flat()) * c);
    });
    A1.flat().forEach((value, k) => {
      expect(Math.abs(A[k] - value)).toBeLessThan(1e-14);
    });
    for (const row of A1) expect(Math.abs(largest(row) - 1)).toBeLessThan(0.02);
    for (let j = 0; j < n; j++) {
      expect(Math.abs(largest([...P1[j], ...A1.map((row) => row[j])]) - 1)).toBeLessThan(0.02);
    }
    const mean = P1.reduce((sum, row) => sum + largest(row) / n, 0);
    expect(Math.abs(c * mean - 1)).toBeLessThan(1e-12);
  });
});

describe('the fixed mode', () => {
  const drawn = (seed: number, kind: Kind = 'condensed') =>
    drawProgram(createRandom(seed), kind, 10, 50, 1).program;

  it('in single precision gives, bit by bit, what the formulas give with every operation stored in a Float32Array (twin)', () => {
    for (const kind of ['condensed', 'soft'] as const) checkSingle(drawn(54, kind));
  });

  const checkSingle = (program: Program) => {
    const solver = createSplittingSolver(structureOf(program), { iterations: 40, precision: 'single' });
    const { state } = solver.arithmetic;
    const result = solver.solve(...dataOf(program));
    const twin = emulateSingle(state as Parameters<typeof iterateSingle>[0], 40);
    expect(Array.from(state.x)).toEqual(Array.from(twin.x));
    expect(Array.from(state.y)).toEqual(Array.from(twin.y));
    expect(result.iterations).toBe(40);
  };

  it('in double gives, bit by bit, what the formulas give operation by operation (twin)', () => {
    const program = drawn(55, 'soft');
    const solver = createSplittingSolver(structureOf(program), { iterations: 25 });
    const { state } = solver.arithmetic;
    solver.solve(...dataOf(program));
    const twin = emulate(
      state as Parameters<typeof iterateDouble>[0],
      25,
      (length) => new Float64Array(length),
    );
    expect(Array.from(state.x)).toEqual(Array.from(twin.x));
    expect(Array.from(state.z)).toEqual(Array.from(twin.z));
  });

  it('runs the same number of iterations for any data, and warm-started ends nearer with each solve', () => {
    const program = drawn(56);
    const exact = createExactSolver(structureOf(program)).solve(...dataOf(program));
    const solver = createSplittingSolver(structureOf(program), { iterations: 10 });
    const errors = Array.from({ length: 12 }, () => {
      const result = solver.solve(...dataOf(program));
      expect(result.iterations).toBe(10);
      return differ(result.x, exact.x);
    });
    expect(errors[11]).toBeLessThan(1e-2 * errors[0]);
  });

  it('float32 comes within 1e-5 of the optimum of 20 condensed programs of condition 50: 2⁻²⁴ = 6e-8, times that condition', () => {
    for (let i = 0; i < 20; i++) {
      const program = drawn(deriveSeed(57, i));
      const exact = createExactSolver(structureOf(program)).solve(...dataOf(program));
      const result = solve(program, { iterations: 5000, precision: 'single' });
      expect(differ(result.x, exact.x)).toBeLessThan(1e-5);
    }
  });

  it('a working set of zeros is a cold start: the same bits as a new solver', () => {
    const program = drawn(58);
    const solver = createSplittingSolver(structureOf(program), { iterations: 10 });
    const first = Array.from(solver.solve(...dataOf(program)).x);
    expect(Array.from(solver.solve(...dataOf(program)).x)).not.toEqual(first);
    solver.setWorkingSet(new Int8Array(solver.m));
    expect(Array.from(solver.solve(...dataOf(program)).x)).toEqual(first);
  });

  it.each<[string, SplittingSettings]>([
    ['precision', { precision: 'single' }],
    ['iterations', { iterations: 0 }],
    ['iterations', { iterations: 1.5 }],
    ['alpha', { alpha: 2 }],
    ['sigma', { sigma: 0 }],
    ['rho', { rho: Number.NaN }],
  ])('%s is refused when it makes no sense: %o', (key, settings) => {
    const attempt = () => createSplittingSolver(structureOf(drawn(59)), settings);
    expect(attempt).toThrow(UnusableQpError);
    expect(attempt).toThrow(new RegExp(`^${key}: must be `));
  });
});

/** The iteration from its formulas, from a cold start; every result goes through an array of the given kind, which rounds it. */
function emulate<A extends Float64Array | Float32Array>(
  given: {
    readonly [key in
      | 'K'
      | 'A'
      | 'rho'
      | 'inverseRho'
      | 'give'
      | 'hold'
      | 'constants'
      | 'q'
      | 'lower'
      | 'upper']: A;
  } & {
    readonly n: number;
    readonly m: number;
  },
  iterations: number,
  array: (length: number) => A,
) {
  const { n, m, K, A, rho, inverseRho, give, hold, constants, q, lower, upper } = given;
  const [x, z, y, cell] = [array(n), array(m), array(m), array(1)];
  const round = (value: number) => {
    cell[0] = value;
    return cell[0];
  };
  const times = (a: number, b: number) => round(a * b);
  const plus = (a: number, b: number) => round(a + b);
  const columns = (j: number) => Array.from({ length: m }, (_, i) => A[i * n + j]);
  for (let iteration = 0; iteration < iterations; iteration++) {
    const t = Array.from({ length: m }, (_, i) => plus(times(rho[i], z[i]), -y[i]));
    const r = Array.from({ length: n }, (_, j) =>
      columns(j).reduce((sum, a, i) => plus(sum, times(a, t[i])), plus(times(constants[0], x[j]), -q[j])),
    );
    const s = Array.from({ length: n }, (_, j) =>
      r.reduce((sum, value, k) => plus(sum, times(K[j * n + k], value)), 0),
    );
    for (let j = 0; j < n; j++) x[j] = plus(times(constants[1], s[j]), times(constants[2], x[j]));
    for (let i = 0; i < m; i++) {
      const a = s.reduce((sum, value, j) => plus(sum, times(A[i * n + j], value)), 0);
      const p = plus(plus(times(constants[1], a), times(constants[2], z[i])), times(y[i], inverseRho[i]));
      const b = p < lower[i] ? lower[i] : Math.min(p, upper[i]);
      const d = plus(p, -b);
      z[i] = plus(b, times(give[i], d));
      y[i] = times(hold[i], d);
    }
  }
  return { x, z, y };
}

const emulateSingle = (given: Parameters<typeof iterateSingle>[0], iterations: number) =>
  emulate(given, iterations, (length) => new Float32Array(length));

import { describe, expect, it } from 'vitest';
import { createRandom, deriveSeed, drawNormal } from '../../src/numerics/random.ts';
import { createExactSolver } from '../../src/qp/exact.ts';
import { dataOf, judge, type Program, proves, structureOf } from '../helpers/qpJudge.ts';
import { drawProgram, drawSize, KINDS, type Kind } from '../helpers/qpRandom.ts';

/** Condition numbers and data scales of a hostile draw, the worst less often. */
function drawHostile(seed: number, kind: Kind, mostSize: number) {
  const random = createRandom(seed);
  const n = drawSize(random, mostSize);
  const condition = 10 ** (12 * random() ** 2);
  const scale = random() < 0.5 ? 1 : 10 ** (18 * random() - 9);
  return drawProgram(random, kind, n, condition, scale);
}

const solve = (program: Program) => createExactSolver(structureOf(program)).solve(...dataOf(program));

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

describe('the exact solver on random programs', () => {
  for (const kind of KINDS) {
    it(`300 ${kind} programs, n up to 100, condition to 1e12, data scaled by 1e±9: all optimal, the conditions met to 2e-12`, () => {
      let worst = 0;
      const statuses = new Set<string>();
      for (let i = 0; i < 300; i++) {
        const { program } = drawHostile(deriveSeed(21, kind, i), kind, 100);
        const result = solve(program);
        statuses.add(result.status);
        worst = Math.max(worst, judge(program, result.x, result.multipliers));
      }
      expect([...statuses]).toEqual(['optimal']);
      expect(worst).toBeLessThan(2e-12);
    });
  }

  it('finds the optimum that 300 programs were built about: q = −H x − Gᵀ λ for drawn x, active rows and multipliers', () => {
    let worst = 0;
    for (let i = 0; i < 300; i++) {
      const random = createRandom(deriveSeed(22, i));
      const n = drawSize(random, 60);
      const { program: drawn } = drawProgram(random, 'plain', n, 10 ** (3 * random()), 1);
      const x = Array.from({ length: n }, () => drawNormal(random));
      const values = drawn.G.map((row) => row.reduce((sum, g, j) => sum + g * x[j], 0));
      const active = new Set(
        values
          .map((_, row) => row)
          .filter(() => random() < 0.4)
          .slice(0, n),
      );
      const lambda = values.map((_, row) => (active.has(row) ? drawNormal(random) : 0));
      const program: Program = {
        ...drawn,
        lower: values.map((v, row) => (active.has(row) && lambda[row] < 0 ? v : v - 0.1 - random())),
        upper: values.map((v, row) => (active.has(row) && lambda[row] > 0 ? v : v + 0.1 + random())),
        q: drawn.H.map(
          (row, j) =>
            -row.reduce((sum, h, k) => sum + h * x[k], 0) -
            drawn.G.reduce((sum, g, r) => sum + g[j] * lambda[r], 0),
        ),
      };
      const result = solve(program);
      expect(result.status).toBe('optimal');
      worst = Math.max(worst, differ(result.x, x));
    }
    // q is rounded: 1e-16 of its terms, times the condition 1e3.
    expect(worst).toBeLessThan(1e-11);
  });

  it('a chain of 40 programs, q and bounds moving: warm and cold starts end at the same point', () => {
    for (const kind of KINDS) {
      const { program } = drawProgram(createRandom(deriveSeed(23, kind)), kind, 20, 1e3, 1);
      const random = createRandom(deriveSeed(24, kind));
      const warm = createExactSolver(structureOf(program));
      const cold = createExactSolver(structureOf(program));
      let worst = 0;
      for (let t = 0; t < 40; t++) {
        const q = program.q.map((value) => value + 0.3 * t * 0.1 * drawNormal(random));
        // Bounds only widen, so that no program of the chain is infeasible.
        const wide = random() < 0.5 ? 0 : 0.05 * random();
        const now: Program = {
          ...program,
          q,
          lower: program.lower.map((l, i) => (l === program.upper[i] ? l : l - wide)),
          upper: program.upper.map((u, i) => (u === program.lower[i] ? u : u + wide)),
        };
        const a = warm.solve(...dataOf(now));
        cold.setWorkingSet(new Int8Array(now.G.length));
        const b = cold.solve(...dataOf(now));
        expect([a.status, b.status]).toEqual(['optimal', 'optimal']);
        worst = Math.max(worst, differ(a.x, b.x));
      }
      expect(worst).toBeLessThan(1e-11);
    }
  });

  it('data times 2^±30: the point times the same, to the last bit (powers of two are exact)', () => {
    for (const kind of KINDS) {
      const { program } = drawProgram(createRandom(deriveSeed(25, kind)), kind, 15, 1e4, 1);
      const base = Array.from(solve(program).x);
      for (const factor of [2 ** 30, 2 ** -30]) {
        const times = (values: readonly number[]) => values.map((value) => value * factor);
        const scaled = {
          ...program,
          q: times(program.q),
          lower: times(program.lower),
          upper: times(program.upper),
        };
        expect(Array.from(solve(scaled).x)).toEqual(times(base));
      }
    }
  });

  it('rows in reverse order, or with their signs changed: the same point', () => {
    for (const kind of KINDS) {
      const { program } = drawProgram(createRandom(deriveSeed(26, kind)), kind, 15, 1e3, 1);
      const base = Array.from(solve(program).x);
      const reversed: Program = {
        ...program,
        G: program.G.toReversed(),
        lower: program.lower.toReversed(),
        upper: program.upper.toReversed(),
        softness: program.softness?.toReversed(),
      };
      const negated: Program = {
        ...program,
        G: program.G.map((row) => row.map((g) => -g)),
        lower: program.upper.map((u) => -u),
        upper: program.lower.map((l) => -l),
      };
      expect(differ(solve(reversed).x, base)).toBeLessThan(1e-11);
      expect(differ(solve(negated).x, base)).toBeLessThan(1e-11);
    }
  });
});

describe('soft rows', () => {
  it('give the point, the multipliers and the slacks of the program with explicit slack variables (twin)', () => {
    let worst = 0;
    for (let i = 0; i < 60; i++) {
      const random = createRandom(deriveSeed(27, i));
      const n = drawSize(random, 30);
      const { program } = drawProgram(random, 'soft', n, 10 ** (3 * random()), 1);
      const soft = program.softness!.flatMap((s, row) => (s > 0 ? [row] : []));
      const explicit: Program = {
        H: [
          ...program.H.map((row) => [...row, ...soft.map(() => 0)]),
          ...soft.map((row, k) => [
            ...program.q.map(() => 0),
            ...soft.map((_, l) => (k === l ? 1 / program.softness![row] : 0)),
          ]),
        ],
        q: [...program.q, ...soft.map(() => 0)],
        G: program.G.map((row, r) => [...row, ...soft.map((s) => (s === r ? 1 : 0))]),
        lower: program.lower,
        upper: program.upper,
      };
      const implicit = solve(program);
      const twin = solve(explicit);
      expect([implicit.status, twin.status]).toEqual(['optimal', 'optimal']);
      worst = Math.max(worst, differ(implicit.x, twin.x.subarray(0, n)));
      worst = Math.max(worst, differ(implicit.multipliers, twin.multipliers));
      const slacks = soft.map((row) => -program.softness![row] * implicit.multipliers[row]);
      worst = Math.max(worst, differ(slacks, twin.x.subarray(n)));
    }
    // The twin's H has a condition of up to 1e3 · 1e4.
    expect(worst).toBeLessThan(1e-8);
  });

  it('that grow hard approach the hard program, the slack falling in proportion to the softness', () => {
    const base: Program = { H: [[2]], q: [-8], G: [[1]], lower: [-1], upper: [1] };
    for (const softness of [1e-2, 1e-5, 1e-8, 1e-12]) {
      const { x } = solve({ ...base, softness: [softness] });
      // min x² − 8x + (x − 1)² / (2 softness): x = (8 softness + 1) / (2 softness + 1).
      expect(Math.abs(x[0] - (8 * softness + 1) / (2 * softness + 1))).toBeLessThan(1e-15 * 4);
    }
  });
});

describe('infeasible programs', () => {
  it('built about a certificate are called so, and what is handed back proves it by the definition, 200 times', () => {
    for (let i = 0; i < 200; i++) {
      const random = createRandom(deriveSeed(28, i));
      const n = drawSize(random, 40);
      const { program } = drawProgram(random, 'plain', n, 10 ** (6 * random() ** 2), 1);
      // One more row, the sum of some others with drawn weights, is asked to exceed what these others allow.
      const weights = program.G.map(() => (random() < 0.5 ? random() : 0));
      weights[0] += 1;
      const upper = program.upper.map((u, row) =>
        Number.isFinite(u) ? u : program.lower[row] > Number.NEGATIVE_INFINITY ? program.lower[row] + 1 : 1,
      );
      const most = weights.reduce((sum, w, row) => sum + w * upper[row], 0);
      const impossible: Program = {
        ...program,
        G: [
          ...program.G,
          program.q.map((_, j) => program.G.reduce((sum, g, row) => sum + weights[row] * g[j], 0)),
        ],
        lower: [...program.lower, most + 0.01 + random()],
        upper: [...upper, Number.POSITIVE_INFINITY],
        softness: program.G.concat([[]]).map(() => 0),
      };
      const result = solve(impossible);
      expect(result.status).toBe('infeasible');
      expect(proves(impossible, result.certificate)).toBe(true);
    }
  });

  it('and feasible ones, as shifted bounds make them at random: 900 programs, each optimal with the conditions met or infeasible with a proof', () => {
    const count = { optimal: 0, infeasible: 0 };
    for (const kind of KINDS) {
      for (let i = 0; i < 100; i++) {
        const { program } = drawHostile(deriveSeed(29, kind, i), kind, 40);
        const random = createRandom(deriveSeed(30, kind, i));
        const spread = 10 ** (-3 * random());
        const shifts = program.G.map((_, row) => {
          const bound = Number.isFinite(program.upper[row]) ? program.upper[row] : program.lower[row];
          return Number.isFinite(bound) ? spread * bound * drawNormal(random) : 0;
        });
        const shifted: Program = {
          ...program,
          lower: program.lower.map((l, row) => l + shifts[row]),
          upper: program.upper.map((u, row) => u + shifts[row]),
        };
        const result = solve(shifted);
        if (result.status === 'optimal') {
          count.optimal++;
          expect(judge(shifted, result.x, result.multipliers)).toBeLessThan(1e-10);
        } else {
          expect(result.status).toBe('infeasible');
          count.infeasible++;
          expect(proves(shifted, result.certificate)).toBe(true);
        }
      }
    }
    // Both verdicts must really be met with.
    expect(Math.min(count.optimal, count.infeasible)).toBeGreaterThan(100);
  });

  it('become feasible when the row that does not fit is made soft', () => {
    const program: Program = {
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
      upper: [1, 1, Number.POSITIVE_INFINITY],
    };
    expect(solve(program).status).toBe('infeasible');
    const result = solve({ ...program, softness: [0, 0, 1e-3] });
    expect(result.status).toBe('optimal');
    expect(differ(result.x, [1, 1])).toBeLessThan(1e-12);
  });
});

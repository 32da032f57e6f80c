import fc from 'fast-check';
import quadprog from 'quadprog';
import { describe, expect, it } from 'vitest';
import { condenseQp } from '../../src/mpc/condense.ts';
import { designController } from '../../src/mpc/design.ts';
import type { ControllerDesign, ControlProblem } from '../../src/mpc/problem.ts';
import { findTarget } from '../../src/mpc/target.ts';
import { apply, diagonal, fromRows, type Matrix, zeros } from '../../src/numerics/matrix.ts';
import { createRandom } from '../../src/numerics/random.ts';
import { createExactSolver } from '../../src/qp/exact.ts';
import { linearProblem } from './linearProblem.ts';

/** A random tracking problem in three states, two inputs, two outputs, with every kind of limit. */
function randomProblem(seed: number): ControlProblem {
  const random = createRandom(seed);
  const draw = (rows: number, cols: number, size: number) =>
    Array.from({ length: rows }, () => Array.from({ length: cols }, () => size * (2 * random() - 1)));
  return linearProblem(
    { A: draw(3, 3, 0.6), B: draw(3, 2, 1), C: draw(2, 3, 1) },
    {
      horizon: 6,
      blocks: [1, 2, 3],
      Q: fromRows([
        [1, 0.2],
        [0.2, 0.7],
      ]),
      S: fromRows([
        [0, 0],
        [0, 0],
      ]),
      R: fromRows([
        [0.1, 0],
        [0, 0.3],
      ]),
      inputLimits: { min: [-0.5, -0.4], max: [0.5, 0.6] },
      rateLimits: [0.3, 0.7],
      outputLimits: [
        { output: 0, min: -0.4, max: 0.3, weight: 5, fromStep: 2 },
        { output: 1, min: -30, max: 30, weight: Number.POSITIVE_INFINITY, fromStep: 1 },
      ],
    },
  );
}

interface Given {
  readonly z: number[];
  readonly uPrev: number[];
  readonly r: number[];
  readonly d: number[];
}

function drawGiven(seed: number): Given {
  const random = createRandom(seed + 77);
  const draw = (n: number, size: number) => Array.from({ length: n }, () => size * (2 * random() - 1));
  return { z: draw(3, 1), uPrev: draw(2, 0.4), r: draw(12, 1), d: draw(3, 0.1) };
}

/** The first moves by the condensed QP. */
function solveCondensed(problem: ControlProblem, { z, uPrev, r, d }: Given): number[] {
  const qp = condenseQp(problem, null, findTarget(problem.predictor, [true, true]));
  const theta = [...z, ...uPrev, ...r, ...d, 1];
  const times = (M: { rows: number; cols: number; data: Float64Array }, add?: Float64Array) =>
    Float64Array.from({ length: M.rows }, (_, i) =>
      theta.reduce((sum, t, j) => sum + M.data[i * M.cols + j] * t, add?.[i] ?? 0),
    );
  const result = createExactSolver(qp).solve(times(qp.F), times(qp.E, qp.Wl), times(qp.E, qp.Wu));
  expect(result.status).toBe('optimal');
  return Array.from(result.x);
}

/**
 * The same problem written out with every state, input and slack as a variable and the dynamics as equations, solved by the
 * npm package quadprog (Goldfarb–Idnani), an independent program.
 */
function solveWrittenOut(problem: ControlProblem, { z, uPrev, r, d }: Given): number[] {
  const { A, B, C } = problem.predictor;
  const N = 6;
  const blockOf = [0, 1, 1, 2, 2, 2];
  const [atZ, atU, atS] = [0, 3 * N, 3 * N + 6];
  const size = atS + N;
  const tiny = 1e-9;
  const H = Array.from({ length: size }, (_, i) =>
    Array.from({ length: size }, (_u, j) => (i === j ? tiny : 0)),
  );
  const q = new Array(size).fill(0);
  const c = (o: number, j: number) => C.data[o * 3 + j];
  for (let k = 1; k <= N; k++) {
    for (let a = 0; a < 2; a++) {
      for (let b = 0; b < 2; b++) {
        const w = 2 * problem.Q.data[a * 2 + b];
        for (let i = 0; i < 3; i++) {
          for (let j = 0; j < 3; j++)
            H[atZ + 3 * (k - 1) + i][atZ + 3 * (k - 1) + j] += w * c(a, i) * c(b, j);
          q[atZ + 3 * (k - 1) + i] -= w * c(a, i) * r[2 * (k - 1) + b];
        }
      }
    }
    H[atS + k - 1][atS + k - 1] += 2 * problem.outputLimits[0].weight;
  }
  for (let b = 0; b < 3; b++) {
    for (let i = 0; i < 2; i++) {
      const w = 2 * problem.R.data[i * 2 + i];
      const at = atU + 2 * b + i;
      H[at][at] += w;
      if (b === 0) {
        q[at] -= w * uPrev[i];
        continue;
      }
      H[at - 2][at - 2] += w;
      H[at][at - 2] -= w;
      H[at - 2][at] -= w;
    }
  }
  const rows: number[][] = [];
  const right: number[] = [];
  const atLeast = (row: number[], value: number) => {
    rows.push(row);
    right.push(value);
  };
  const blank = () => new Array(size).fill(0);
  for (let k = 0; k < N; k++) {
    for (let i = 0; i < 3; i++) {
      const row = blank();
      row[atZ + 3 * k + i] = 1;
      let value = d[i];
      for (let j = 0; j < 3; j++) {
        if (k > 0) row[atZ + 3 * (k - 1) + j] -= A.data[i * 3 + j];
        else value += A.data[i * 3 + j] * z[j];
      }
      for (let j = 0; j < 2; j++) row[atU + 2 * blockOf[k] + j] -= B.data[i * 2 + j];
      atLeast(row, value);
    }
  }
  const equations = rows.length;
  for (let b = 0; b < 3; b++) {
    for (let i = 0; i < 2; i++) {
      const row = blank();
      row[atU + 2 * b + i] = 1;
      atLeast(row, problem.inputLimits.min[i]);
      atLeast(
        row.map((v) => -v),
        -problem.inputLimits.max[i],
      );
      const rate = row.slice();
      if (b > 0) rate[atU + 2 * (b - 1) + i] = -1;
      const from = b > 0 ? 0 : uPrev[i];
      atLeast(rate, from - problem.rateLimits[i]);
      atLeast(
        rate.map((v) => -v),
        -from - problem.rateLimits[i],
      );
    }
  }
  for (let k = 2; k <= N; k++) {
    const row = blank();
    for (let j = 0; j < 3; j++) row[atZ + 3 * (k - 1) + j] = c(0, j);
    const low = row.slice();
    low[atS + k - 1] = 1;
    atLeast(low, problem.outputLimits[0].min);
    const high = row.map((v) => -v);
    high[atS + k - 1] = 1;
    atLeast(high, -problem.outputLimits[0].max);
  }
  const oneBased = (v: number[]) => [0, ...v];
  const Amat = [[], ...Array.from({ length: size }, (_, j) => oneBased(rows.map((row) => row[j])))];
  const answer = quadprog.solveQP(
    [[], ...H.map(oneBased)],
    oneBased(q.map((v) => -v)),
    Amat,
    oneBased(right),
    equations,
  );
  expect(answer.message).toBe('');
  return answer.solution.slice(1 + atU, 1 + atU + 6);
}

/** The cost of moves `V`, three blocks of two inputs, by the formula of the problem along the predicted trajectory. */
function rolledOutCost(
  { predictor, Q, S, R, blocks }: ControlProblem,
  { P, Tz, Tu }: ControllerDesign,
  { z: z0, uPrev, r, d }: Given,
  V: Float64Array,
): number {
  const form = (M: Matrix, v: ArrayLike<number>) =>
    apply(M, v).reduce((sum, value, i) => sum + value * v[i], 0);
  const target = [r[10], r[11], ...d, 1];
  const [zs, us] = [apply(Tz, target), apply(Tu, target)];
  const inputs = blocks.flatMap((length, b) => new Array(length).fill([V[2 * b], V[2 * b + 1]]));
  let z: ArrayLike<number> = z0;
  let before: number[] = uPrev;
  let cost = 0;
  inputs.forEach((u: number[], k) => {
    cost += form(
      S,
      u.map((value, j) => value - us[j]),
    );
    cost += form(
      R,
      u.map((value, j) => value - before[j]),
    );
    const [free, forced] = [apply(predictor.A, z), apply(predictor.B, u)];
    z = free.map((value, i) => value + forced[i] + d[i]);
    before = u;
    if (k === inputs.length - 1) return;
    const y = apply(predictor.C, z);
    cost += form(
      Q,
      y.map((value, i) => value - r[2 * k + i]),
    );
  });
  const final = Array.from(z, (value, i) => value - zs[i]);
  return cost + form(P, [...final, ...before.map((value, j) => value - us[j])]);
}

describe('the condensed quadratic program', () => {
  it('has the optimum of the problem written out in all variables, solved by npm quadprog', () => {
    fc.assert(
      fc.property(fc.integer({ min: 0, max: 1e9 }), (seed) => {
        const problem = randomProblem(seed);
        const given = drawGiven(seed);
        const ours = solveCondensed(problem, given);
        const theirs = solveWrittenOut(problem, given);
        for (let i = 0; i < 6; i++) expect(Math.abs(ours[i] - theirs[i])).toBeLessThan(2e-6);
      }),
      { numRuns: 60 },
    );
  });

  it('has the cost of the trajectory rolled out step by step, less that of no move, for any moves: all weights, twin', () => {
    fc.assert(
      fc.property(fc.integer({ min: 0, max: 1e9 }), fc.boolean(), (seed, moved) => {
        const problem: ControlProblem = {
          ...randomProblem(seed),
          terminal: 'riccati',
          S: diagonal([0.4, 0.1]),
          R: moved ? diagonal([0.1, 0.3]) : zeros(2, 2),
        };
        const design = designController(problem);
        const given = drawGiven(seed);
        const theta = Float64Array.from([...given.z, ...given.uPrev, ...given.r, ...given.d, 1]);
        const random = createRandom(seed + 5);
        const U = Float64Array.from({ length: 6 }, () => 2 * random() - 1);
        const cost = (V: Float64Array) => rolledOutCost(problem, design, given, V);
        const gradient = apply(design.qp.F, theta);
        const curved = apply(design.qp.H, U);
        const condensed = U.reduce((sum, u, i) => sum + u * (0.5 * curved[i] + gradient[i]), 0);
        const rolledOut = cost(U) - cost(new Float64Array(6));
        // Cancellation: both costs may be large against their difference.
        expect(Math.abs(condensed - rolledOut)).toBeLessThan(1e-12 * (cost(U) + cost(new Float64Array(6))));
      }),
      { numRuns: 60 },
    );
  });

  it('has a symmetric H, bit for bit', () => {
    const { H } = condenseQp(randomProblem(5), null, findTarget(randomProblem(5).predictor, [true, true]));
    for (let i = 0; i < H.rows; i++) {
      for (let j = 0; j < i; j++) expect(H.data[i * H.cols + j]).toBe(H.data[j * H.cols + i]);
    }
  });

  it('labels each row with its limit, and softens only the soft ones', () => {
    const problem = randomProblem(3);
    const { rows, softness, Wl, Wu } = condenseQp(problem, null, findTarget(problem.predictor, [true, true]));
    const kinds = rows.map(({ kind }) => kind);
    expect(kinds.filter((kind) => kind === 'input')).toHaveLength(6);
    expect(kinds.filter((kind) => kind === 'rate')).toHaveLength(6);
    expect(rows.filter(({ kind, channel }) => kind === 'output' && channel === 0)).toHaveLength(5);
    expect(rows.filter(({ kind, channel }) => kind === 'output' && channel === 1)).toHaveLength(6);
    rows.forEach(({ kind, channel }, i) => {
      expect(softness[i]).toBe(kind === 'output' && channel === 0 ? 0.1 : 0);
      expect(Wl[i]).toBeLessThan(Wu[i]);
    });
  });

  it('leaves at a soft limit the excess of the closed form, multiplier over twice the weight', () => {
    // y_1 = u, want 1, limit 0.5: minimise (u − 1)² + w e², e = u − 0.5 beyond it: u = (1 + 0.5 w) / (1 + w).
    const w = 9;
    const problem = linearProblem(
      { A: [[0]], B: [[1]] },
      {
        horizon: 1,
        R: fromRows([[0]]),
        outputLimits: [{ output: 0, min: -1, max: 0.5, weight: w, fromStep: 1 }],
      },
    );
    const qp = condenseQp(problem, null, findTarget(problem.predictor, [true]));
    const solver = createExactSolver(qp);
    const theta = [0, 0, 1, 0, 1];
    const q = Float64Array.of(theta.reduce((sum, t, j) => sum + qp.F.data[j] * t, 0));
    expect(solver.solve(q, qp.Wl, qp.Wu).x[0]).toBeCloseTo((1 + 0.5 * w) / (1 + w), 13);
  });
});

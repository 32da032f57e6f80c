import { describe, expect, it } from 'vitest';
import { designController } from '../../src/mpc/design.ts';
import { createController } from '../../src/mpc/online.ts';
import type { ControlProblem } from '../../src/mpc/problem.ts';
import { diagonal, fromRows } from '../../src/numerics/matrix.ts';
import { createExactSolver } from '../../src/qp/exact.ts';
import type { QpSolver } from '../../src/qp/qp.ts';
import { bindIdentity, linearProblem } from './linearProblem.ts';

const A = [
  [0.9, 0.2],
  [-0.1, 0.8],
];
const B = [[0.1], [0.5]];

function trackFirst(change: Partial<ControlProblem> = {}): ControlProblem {
  return linearProblem(
    { A, B, C: [[1, 0]] },
    {
      horizon: 12,
      Q: diagonal([1]),
      R: fromRows([[0.05]]),
      inputLimits: { min: [-1], max: [1] },
      rateLimits: [0.4],
      disturbanceGain: 0.3,
      ...change,
    },
  );
}

function controllerFor(problem: ControlProblem, wrap: (solver: QpSolver) => QpSolver = (s) => s) {
  const design = designController(problem);
  return createController(design, bindIdentity(2), wrap(createExactSolver(design.qp)), [0]);
}

/** Runs the linear plant with an input delay and a disturbance on the input; returns states and inputs. */
function run(problem: ControlProblem, steps: number, reference: (k: number) => number, push = 0) {
  const controller = controllerFor(problem);
  const ahead = problem.delay + problem.horizon;
  let x = [0, 0];
  const xs = [x];
  const us: number[] = [];
  const decisions = [];
  for (let k = 0; k < steps; k++) {
    const window = Float64Array.from({ length: ahead }, (_, i) => reference(k + 1 + i));
    const decision = controller.step(x, window);
    decisions.push(decision);
    us.push(decision.u[0]);
    const acting = (k >= problem.delay ? us[k - problem.delay] : 0) + push;
    x = A.map((row, i) => row[0] * x[0] + row[1] * x[1] + B[i][0] * acting);
    xs.push(x);
  }
  return { xs, us, decisions };
}

describe('the controller sample by sample', () => {
  it('removes the offset of a constant input disturbance on a linear plant to 1e-9, closed form of the steady state', () => {
    const { xs } = run(trackFirst(), 300, () => 0.3, 0.2);
    expect(Math.abs(xs[300][0] - 0.3)).toBeLessThan(1e-9);
  });

  it('leaves that offset without a disturbance estimate', () => {
    const { xs } = run(trackFirst({ disturbanceGain: 0 }), 300, () => 0.3, 0.2);
    expect(Math.abs(xs[300][0] - 0.3)).toBeGreaterThan(1e-3);
  });

  it('removes it with level and terminal weights too, since both pull towards the target', () => {
    const problem = trackFirst({ S: fromRows([[0.3]]), terminal: 'riccati' });
    const { xs } = run(problem, 400, () => 0.3, 0.2);
    expect(Math.abs(xs[400][0] - 0.3)).toBeLessThan(1e-9);
  });

  it('with a delay that it compensates is the undelayed response, so many samples later, relation', () => {
    const delay = 3;
    const step = (k: number) => (k >= 20 ? 0.4 : 0);
    const prompt = run(trackFirst({ preview: false }), 80, step);
    const late = run(trackFirst({ preview: false, delay }), 80, step);
    for (let k = 0; k + delay <= 80; k++) expect(late.xs[k + delay][0]).toBeCloseTo(prompt.xs[k][0], 10);
  });

  it('with preview and a delay reads the reference that much further ahead: the same response at the same time, relation', () => {
    const step = (k: number) => (k >= 40 ? 0.4 : 0);
    const prompt = run(trackFirst(), 80, step);
    const late = run(trackFirst({ delay: 3 }), 80, step);
    for (let k = 0; k <= 80; k++) expect(late.xs[k][0]).toBeCloseTo(prompt.xs[k][0], 10);
  });

  it('with preview moves before the reference does, without it never', () => {
    const step = (k: number) => (k >= 20 ? 0.4 : 0);
    expect(Math.abs(run(trackFirst(), 20, step).xs[18][0])).toBeGreaterThan(1e-3);
    expect(
      run(trackFirst({ preview: false }), 20, step)
        .us.slice(0, 18)
        .every((u) => Math.abs(u) < 1e-12),
    ).toBe(true);
  });

  it('keeps the input and rate limits at every sample', () => {
    const { us } = run(trackFirst(), 200, (k) => 3 * Math.sign(Math.sin(k / 15)));
    us.forEach((u, k) => {
      expect(Math.abs(u)).toBeLessThanOrEqual(1);
      expect(Math.abs(u - (us[k - 1] ?? 0))).toBeLessThanOrEqual(0.4 + 1e-12);
    });
    expect(us.some((u) => Math.abs(u) > 1 - 1e-9)).toBe(true);
  });

  it('plans what the plant then does, when nothing disturbs it, twin', () => {
    const { xs, decisions } = run(trackFirst({ horizon: 4, blocks: [1, 3] }), 30, () => 0.2);
    decisions.forEach((decision, k) => {
      expect(decision.plannedOutputs[0]).toBeCloseTo(xs[k + 1][0], 12);
    });
  });

  it('sends the last plan on, shifted, while the solver fails, then holds the last input', () => {
    let failing = false;
    const problem = trackFirst({ horizon: 4, blocks: [1, 1, 1, 1], R: fromRows([[0.5]]) });
    const controller = controllerFor(problem, (solver) => ({
      ...solver,
      solve: (q, lower, upper) => {
        const result = solver.solve(q, lower, upper);
        if (failing) result.status = 'infeasible';
        return result;
      },
    }));
    const window = new Float64Array(4).fill(0.9);
    const first = controller.step([0, 0], window);
    expect(first.fallback).toBe('none');
    const plan = Array.from(first.plannedInputs);
    failing = true;
    for (let age = 1; age < 4; age++) {
      const next = controller.step([0, 0], window);
      expect([next.status, next.fallback]).toEqual(['infeasible', 'shifted-plan']);
      expect(next.u[0]).toBeCloseTo(plan[age], 12);
    }
    const held = controller.step([0, 0], window);
    expect(held.fallback).toBe('held');
    expect(held.u[0]).toBeCloseTo(plan[3], 12);
  });

  it('survives a measurement that is not a number: the plan goes on and the next sample is as good as ever', () => {
    const controller = controllerFor(trackFirst());
    const window = new Float64Array(12).fill(0.3);
    controller.step([0, 0], window);
    const blind = controller.step([Number.NaN, 0], window);
    expect([blind.status, blind.fallback]).toEqual(['failed', 'shifted-plan']);
    expect(Number.isFinite(blind.u[0])).toBe(true);
    const after = controller.step([0.05, 0.1], window);
    expect(after.status).toBe('optimal');
    expect(Number.isFinite(after.u[0])).toBe(true);
  });

  it('starts anew after reset', () => {
    const controller = controllerFor(trackFirst());
    const window = new Float64Array(12).fill(0.3);
    const first = controller.step([0.1, 0], window).u[0];
    controller.step([0.2, 0.3], window);
    controller.reset();
    expect(controller.step([0.1, 0], window).u[0]).toBe(first);
  });
});

import type { BoundLifting } from '../lift/lifting.ts';
import { applyInto } from '../numerics/matrix.ts';
import type { QpSolver, QpStatus } from '../qp/qp.ts';
import type { Controller, ControlStep, Fallback } from './controller.ts';
import { createDelayRoll } from './delay.ts';
import { createObserver } from './observer.ts';
import { stackPrediction } from './prediction.ts';
import type { ControllerDesign } from './problem.ts';
import { createWarmStart } from './warmStart.ts';

/**
 * The controller that runs sample by sample:
 * 1. lift the measurement, filter the lifted one-step residual into `d`;
 * 2. roll the lifted state through the inputs still under way: `z ← A z + B u + d` and lifted anew, `delay` times;
 * 3. with `θ = (z, u_prev, r, d, 1)` solve the QP, from the last working set or that one shifted by a stage;
 * 4. send the first move, clamped to the rate and input limits. When the solve is not optimal the last plan is sent on,
 *    shifted; without one the last input is held. A measurement that is not finite is such a case, status `failed`.
 *
 * @param bound the predictor's lifting. @param solver prepared for `H`, `G` and `softness` of the design.
 * @param initialInput nu, physical: the input that acts before the first decision takes effect.
 */
export function createController(
  design: ControllerDesign,
  bound: BoundLifting,
  solver: QpSolver,
  initialInput: readonly number[],
): Controller {
  const { problem, qp } = design;
  const { predictor, delay } = problem;
  const { scaling } = predictor;
  const { N, nu, ny, nz, theta: at } = qp;
  const observer = createObserver(predictor, bound, problem.disturbanceGain);
  const roll = createDelayRoll(predictor, bound);
  const warm = createWarmStart(qp, solver);
  const stacked = stackPrediction(predictor.A, predictor.B, predictor.C, qp.blocks);
  const blockOf = qp.blocks.flatMap((length, b) => new Array<number>(length).fill(b));

  const theta = new Float64Array(qp.ntheta);
  theta[at.one] = 1;
  const z = theta.subarray(at.z, at.z + nz);
  const uPrev = theta.subarray(at.uPrev, at.uPrev + nu);
  const q = new Float64Array(qp.n);
  const shared = new Float64Array(qp.m);
  const lower = new Float64Array(qp.m);
  const upper = new Float64Array(qp.m);
  const plan = new Float64Array(qp.n);
  /** Scaled inputs under way, oldest first: queue[0] acts from now to the next sample. */
  let queue: Float64Array[] = [];
  /** Samples since the plan was made; −1 when there is none. */
  let planAge = -1;

  const reset = () => {
    for (let j = 0; j < nu; j++) uPrev[j] = (initialInput[j] - scaling.u.centre[j]) / scaling.u.half[j];
    queue = Array.from({ length: delay }, () => uPrev.slice());
    planAge = -1;
    observer.reset();
    warm.reset();
  };
  reset();

  const readReference = (reference: Float64Array) => {
    for (let k = 0; k < N; k++) {
      const row = problem.preview ? delay + k : 0;
      for (let j = 0; j < ny; j++) {
        theta[at.r + k * ny + j] = (reference[row * ny + j] - scaling.y.centre[j]) / scaling.y.half[j];
      }
    }
  };

  const solve = (reference: Float64Array) => {
    z.set(observer.z);
    roll(z, queue, observer.d);
    readReference(reference);
    theta.set(observer.d, at.d);
    applyInto(q, qp.F, theta);
    applyInto(shared, qp.E, theta);
    for (let i = 0; i < qp.m; i++) {
      lower[i] = qp.Wl[i] + shared[i];
      upper[i] = qp.Wu[i] + shared[i];
    }
    warm.prepare();
    return solver.solve(q, lower, upper);
  };

  /** The scaled input for now from a plan `planAge` samples old, clamped to the limits, into `out` and in physical units. */
  const clampMove = (out: Float64Array, held: boolean): Float64Array => {
    const physical = new Float64Array(nu);
    for (let j = 0; j < nu; j++) {
      const wanted = held ? uPrev[j] : plan[blockOf[planAge] * nu + j];
      const { centre, half } = { centre: scaling.u.centre[j], half: scaling.u.half[j] };
      const before = centre + half * uPrev[j];
      const most = problem.rateLimits[j] * predictor.sampleTime;
      const rated = clamp(centre + half * wanted, before - most, before + most);
      physical[j] = clamp(rated, problem.inputLimits.min[j], problem.inputLimits.max[j]);
      out[j] = (physical[j] - centre) / half;
    }
    return physical;
  };

  const step = (x: ArrayLike<number>, reference: Float64Array): ControlStep => {
    let status: QpStatus = 'failed';
    let iterations = 0;
    if (observer.measure(x)) {
      const result = solve(reference);
      ({ status, iterations } = result);
      if (status === 'optimal') {
        plan.set(result.x);
        warm.learn(result.workingSet);
      }
    }
    let fallback: Fallback = 'none';
    if (status === 'optimal') {
      planAge = 0;
    } else {
      if (planAge >= 0) planAge++;
      if (planAge >= N) planAge = -1;
      fallback = planAge >= 0 ? 'shifted-plan' : 'held';
    }
    const sent = new Float64Array(nu);
    const u = clampMove(sent, fallback === 'held');
    const plannedOutputs = predictOutputs();
    const plannedInputs = spreadPlan(fallback);
    uPrev.set(sent);
    queue.push(sent);
    const acting = queue.shift();
    if (acting) observer.act(acting);
    return { u, status, fallback, iterations, plannedOutputs, plannedInputs };
  };

  /** y_1 … y_N under the plan, physical. */
  const predictOutputs = (): Float64Array => {
    const y = new Float64Array(N * ny);
    const { Phi, Gamma, Psi } = stacked;
    for (let i = 0; i < y.length; i++) {
      let sum = 0;
      for (let j = 0; j < nz; j++) {
        sum += Phi.data[i * nz + j] * z[j] + Psi.data[i * nz + j] * theta[at.d + j];
      }
      for (let j = 0; j < qp.n; j++) sum += Gamma.data[i * qp.n + j] * plan[j];
      y[i] = scaling.y.centre[i % ny] + scaling.y.half[i % ny] * sum;
    }
    return y;
  };

  /** u_0 … u_{N−1} of the plan from now on, physical; past its end the last input stays. */
  const spreadPlan = (fallback: Fallback): Float64Array => {
    const inputs = new Float64Array(N * nu);
    for (let k = 0; k < N; k++) {
      for (let j = 0; j < nu; j++) {
        const block = blockOf[Math.min(N - 1, Math.max(0, planAge) + k)];
        const scaled = fallback === 'held' ? uPrev[j] : plan[block * nu + j];
        inputs[k * nu + j] = scaling.u.centre[j] + scaling.u.half[j] * scaled;
      }
    }
    return inputs;
  };

  return { step, reset };
}

function clamp(value: number, min: number, max: number): number {
  return Math.min(max, Math.max(min, value));
}

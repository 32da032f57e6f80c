import type { StudyResult } from '../findings/studyResult.ts';
import { bindLifting } from '../lift/bind.ts';
import { createEvaluationContext } from '../lift/context.ts';
import { createDelayRoll } from '../mpc/delay.ts';
import type { CondensedQp } from '../mpc/problem.ts';
import { apply } from '../numerics/matrix.ts';
import { nominalParameters, type Plant, readOutputs } from '../plant/plant.ts';
import { createExactSolver } from '../qp/exact.ts';
import type { QpStatus } from '../qp/qp.ts';

/** One decision of the controller with everything in between, so that a reviewer can check his own reading of the matrices. */
export interface WorkedExample {
  readonly about: string;
  /** Coordinates: physical, scaled, lifted, and lifted after the delay. */
  readonly x: readonly number[];
  readonly xScaled: readonly number[];
  readonly zMeasured: readonly number[];
  readonly z: readonly number[];
  /** Input that acted before: physical and scaled. */
  readonly uPrev: readonly number[];
  readonly uPrevScaled: readonly number[];
  /** N·ny: reference after the delay, physical, stage by stage. */
  readonly reference: readonly number[];
  readonly theta: readonly number[];
  /** `q = F theta`; bounds `Wl + E theta` and `Wu + E theta`. */
  readonly q: readonly number[];
  readonly lower: readonly number[];
  readonly upper: readonly number[];
  readonly status: QpStatus;
  /** The optimum, its multipliers (H U + q + G' multipliers = 0), and the input to send, physical. */
  readonly U: readonly number[];
  readonly multipliers: readonly number[];
  readonly u: readonly number[];
  /** First move where no limit would be active, `-K theta`, scaled. */
  readonly unconstrained: readonly number[];
}

/**
 * The first decision of the lifted controller in the study's scenario, without measurement noise and with the disturbance
 * estimate at zero, as it starts. Where no loop was run: from the operating point, the reference resting there.
 */
export function computeExample(result: StudyResult): WorkedExample {
  const { plant, design } = result;
  const { problem, qp, K } = design;
  const { predictor, delay, preview } = problem;
  const { scaling, coordinates, outputs } = predictor;
  const { theta: at, N, ny, nz } = qp;
  const record = result.runs[0]?.record;
  const state = Array.from(record ? record.x.subarray(0, record.nx) : plant.operatingPoint.x);
  const uPrev = [...plant.operatingPoint.u];
  const isState = coordinates.map(({ name }) => name).join() === plant.states.map(({ name }) => name).join();
  const x = isState ? state : delayCoordinates(plant, state, uPrev, coordinates);
  const context = createEvaluationContext(plant, isState ? 'state' : 'delays', scaling.x);
  const bound = bindLifting(predictor.lifting, context);

  const toScaled = (values: readonly number[], { centre, half }: typeof scaling.x) =>
    values.map((value, i) => (value - centre[i]) / half[i]);
  const xScaled = toScaled(x, scaling.x);
  const uPrevScaled = toScaled(uPrev, scaling.u);
  const zMeasured = new Float64Array(nz);
  bound.liftInto(zMeasured, xScaled);
  const z = zMeasured.slice();
  const underWay = Array.from({ length: delay }, () => Float64Array.from(uPrevScaled));
  createDelayRoll(predictor, bound)(z, underWay, new Float64Array(nz));

  const rest = readOutputs(plant, plant.operatingPoint.x, nominalParameters(plant));
  const columns = outputs.map(({ name }) => plant.outputs.findIndex((output) => output.name === name));
  const lastRow = record ? record.reference.length / record.ny - 1 : 0;
  const reference = Array.from({ length: N }, (_, k) => {
    const row = Math.min(lastRow, preview ? delay + k + 1 : 1);
    return columns.map((column) => (record ? record.reference[row * record.ny + column] : rest[column]));
  }).flat();
  const theta = new Float64Array(qp.ntheta);
  theta.set(z, at.z);
  theta.set(uPrevScaled, at.uPrev);
  reference.forEach((value, i) => {
    theta[at.r + i] = (value - scaling.y.centre[i % ny]) / scaling.y.half[i % ny];
  });
  theta[at.one] = 1;

  const q = apply(qp.F, theta);
  const shift = apply(qp.E, theta);
  const lower = qp.Wl.map((value, i) => value + shift[i]);
  const upper = qp.Wu.map((value, i) => value + shift[i]);
  const { status, U, multipliers } = solveOnce(qp, q, lower, upper);
  return {
    about:
      'The first decision of the loop, measured without noise, disturbance estimate zero. Physical: x, uPrev, reference, u; all else scaled.',
    x,
    xScaled,
    zMeasured: Array.from(zMeasured),
    z: Array.from(z),
    uPrev,
    uPrevScaled,
    reference,
    theta: Array.from(theta),
    q: Array.from(q),
    lower: Array.from(lower),
    upper: Array.from(upper),
    status,
    U,
    multipliers,
    u: sendable(U, uPrev, result),
    unconstrained: Array.from(apply(K, theta), (value) => -value),
  };
}

/** The optimum, or the status `failed` and NaN where H is singular and no solver can be prepared. */
function solveOnce(qp: CondensedQp, q: Float64Array, lower: Float64Array, upper: Float64Array) {
  if (!Number.isFinite(qp.condition)) {
    const lost = (length: number) => new Array<number>(length).fill(Number.NaN);
    return { status: 'failed' as const, U: lost(qp.n), multipliers: lost(qp.m) };
  }
  const { status, x, multipliers } = createExactSolver(qp).solve(q, lower, upper);
  return { status, U: Array.from(x), multipliers: Array.from(multipliers) };
}

/** The first move in physical units, clamped to rate and input limits, as the controller sends it. */
function sendable(U: readonly number[], uPrev: readonly number[], { design }: StudyResult): number[] {
  const { rateLimits, inputLimits, predictor } = design.problem;
  const { centre, half } = predictor.scaling.u;
  return uPrev.map((before, j) => {
    const most = rateLimits[j] * predictor.sampleTime;
    const rated = Math.min(before + most, Math.max(before - most, centre[j] + half[j] * U[j]));
    return Math.min(inputLimits.max[j], Math.max(inputLimits.min[j], rated));
  });
}

/** Delay coordinates of a plant that has rested at this state: each `name[-k]` is that output or input now. */
function delayCoordinates(
  plant: Plant,
  state: readonly number[],
  input: readonly number[],
  coordinates: readonly { readonly name: string }[],
): number[] {
  const y = readOutputs(plant, state, nominalParameters(plant));
  const now = new Map([
    ...plant.inputs.map(({ name }, j) => [name, input[j]] as const),
    ...plant.outputs.map(({ name }, i) => [name, y[i]] as const),
  ]);
  return coordinates.map(({ name }) => now.get(name.replace(/\[-\d+\]$/, '')) ?? Number.NaN);
}

import { type CoordinateSettings, createCoordinateTracker } from '../data/coordinates.ts';
import type { Controller } from '../mpc/controller.ts';
import type { ControlProblem } from '../mpc/problem.ts';
import { createRandom, deriveSeed, drawNormal, type Random } from '../numerics/random.ts';
import { integrateFine } from '../plant/integrate.ts';
import { type Channel, nominalParameters, type Plant, readOutputs } from '../plant/plant.ts';
import { costOf } from './cost.ts';
import type { LoopRecord } from './record.ts';
import { sampleReferences } from './reference.ts';
import type { ScenarioSettings } from './scenario.ts';

/** What a closed loop is run from. */
export interface LoopRequest {
  /** Name of the controller, for the record. */
  readonly name: string;
  readonly plant: Plant;
  readonly controller: Controller;
  /** The controller's own outputs by name: its reference has a column for each of them. */
  readonly outputsSeen: readonly string[];
  /** Weights and limits by which the run is judged; its horizon and delay set how far the reference is shown ahead. */
  readonly problem: ControlProblem;
  readonly scenario: ScenarioSettings;
  readonly coordinates: CoordinateSettings;
  readonly substeps: number;
  readonly seed: number;
  /** Is a coordinate vector (nx, physical) outside the region of the fitting data? */
  readonly isOutside?: (x: ArrayLike<number>) => boolean;
  readonly onProgress?: (done: number, planned: number) => void;
  /** Milliseconds; only for `solveTimes`, so that the record itself never depends on the machine. */
  readonly clock?: () => number;
}

export interface LoopOutcome {
  readonly record: LoopRecord;
  /** Milliseconds of each decision; empty without a clock. */
  readonly solveTimes: readonly number[];
}

/** Points kept between samples. */
const FINE = 4;
/** A state this many times its range away from the middle is beyond any use of the model: the run ends. */
const RUNAWAY = 50;

/**
 * Runs the controller against the true plant: measure (with noise), decide, delay, limit to the actuator's rate and range, add
 * the disturbance, integrate over the sample with parameters off nominal. Delayed inputs among the coordinates are those of the
 * actuator, without the disturbance. The run ends early when the state leaves all bounds.
 *
 * @throws whatever the plant's functions throw.
 */
export function simulateLoop(request: LoopRequest): LoopOutcome {
  const { plant, controller, problem, scenario, clock, isOutside } = request;
  const { sampleTime } = problem.predictor;
  const [nx, nu, ny] = [plant.states.length, plant.inputs.length, plant.outputs.length];
  const planned = Math.max(1, Math.round(scenario.duration / sampleTime));
  const ahead = problem.delay + problem.horizon;
  const p = trueParameters(plant, scenario);
  const rest = readOutputs(plant, plant.operatingPoint.x, p);
  const reference = sampleReferences(
    scenario.references,
    plant.outputs,
    rest,
    sampleTime,
    planned + ahead + 1,
  );
  const random = createRandom(deriveSeed(request.seed, 'loop'));
  const { read: reads } = request.coordinates;
  const measured = reads === 'state' ? plant.states : plant.outputs;
  const tracker = createCoordinateTracker(request.coordinates, plant);
  const seen = request.outputsSeen.map((name) => plant.outputs.findIndex((output) => output.name === name));
  const resting = Float64Array.from(plant.operatingPoint.u);
  const actuated = resting.slice();

  const x = new Float64Array((planned + 1) * nx);
  const y = new Float64Array((planned + 1) * ny);
  const yFine = new Float64Array((planned * FINE + 1) * ny);
  const u = new Float64Array(planned * nu);
  const applied = new Float64Array(planned * nu);
  const status: LoopRecord['status'][number][] = [];
  const fallback: LoopRecord['fallback'][number][] = [];
  const iterations: number[] = [];
  const solveTimes: number[] = [];
  const between = new Float64Array(FINE * nx);
  let outside = 0;
  let diverged = false;
  let steps = 0;

  plant.states.forEach(({ name }, i) => {
    x[i] = scenario.start[name] ?? plant.operatingPoint.x[i];
  });
  y.set(readOutputs(plant, x.subarray(0, nx), p));
  yFine.set(y.subarray(0, ny));
  controller.reset();

  for (let k = 0; k < planned && !diverged; k++) {
    const now = x.subarray(k * nx, (k + 1) * nx);
    const truth = reads === 'state' ? now : y.subarray(k * ny, (k + 1) * ny);
    const { x: coordinates } = tracker.measure(addNoise(truth, measured, scenario.noise, random));
    if (isOutside?.(coordinates)) outside++;
    const start = clock?.() ?? 0;
    const decision = controller.step(coordinates, windowOf(reference, k, ahead, ny, seen));
    if (clock) solveTimes.push(clock() - start);
    u.set(decision.u, k * nu);
    status.push(decision.status);
    fallback.push(decision.fallback);
    iterations.push(decision.iterations);
    const arriving =
      k >= scenario.delay ? u.subarray((k - scenario.delay) * nu, (k - scenario.delay + 1) * nu) : resting;
    actuate(actuated, arriving, plant, sampleTime);
    tracker.apply(actuated);
    const acting = applied.subarray(k * nu, (k + 1) * nu);
    acting.set(actuated);
    addDisturbances(acting, plant, scenario, k * sampleTime);
    const outcome = integrateFine(plant, p, now, acting, sampleTime, request.substeps, FINE, between);
    if (outcome === 'diverged' || ranAway(plant, between.subarray((FINE - 1) * nx))) {
      diverged = true;
      break;
    }
    for (let i = 0; i < FINE; i++) {
      yFine.set(readOutputs(plant, between.subarray(i * nx, (i + 1) * nx), p), (k * FINE + i + 1) * ny);
    }
    x.set(between.subarray((FINE - 1) * nx), (k + 1) * nx);
    y.set(yFine.subarray((k + 1) * FINE * ny, ((k + 1) * FINE + 1) * ny), (k + 1) * ny);
    steps = k + 1;
    request.onProgress?.(steps, planned);
  }

  const signals = {
    steps,
    x: x.slice(0, (steps + 1) * nx),
    y: y.slice(0, (steps + 1) * ny),
    reference: reference.slice(0, (steps + 1) * ny),
    u: u.slice(0, steps * nu),
    applied: applied.slice(0, steps * nu),
  };
  const record: LoopRecord = {
    controller: request.name,
    sampleTime,
    diverged,
    nx,
    nu,
    ny,
    ...signals,
    fine: FINE,
    yFine: yFine.slice(0, (steps * FINE + 1) * ny),
    status: status.slice(0, steps),
    fallback: fallback.slice(0, steps),
    iterations: iterations.slice(0, steps),
    outsideData: steps > 0 ? outside / steps : 0,
    cost: costOf(signals, problem, plant),
  };
  return { record, solveTimes };
}

function trueParameters(plant: Plant, { parameterFactors }: ScenarioSettings): Record<string, number> {
  return Object.fromEntries(
    Object.entries(nominalParameters(plant)).map(([name, value]) => [
      name,
      value * (parameterFactors[name] ?? 1),
    ]),
  );
}

/** Rows k + 1 … k + ahead of the reference, in the columns that the controller sees. */
function windowOf(
  reference: Float64Array,
  k: number,
  ahead: number,
  ny: number,
  seen: readonly number[],
): Float64Array {
  const rows = new Float64Array(ahead * seen.length);
  for (let i = 0; i < ahead; i++) {
    for (let j = 0; j < seen.length; j++) rows[i * seen.length + j] = reference[(k + 1 + i) * ny + seen[j]];
  }
  return rows;
}

/** The measurement: each channel with normal noise of standard deviation `noise` times its half range. */
function addNoise(
  truth: Float64Array,
  channels: readonly Channel[],
  noise: number,
  random: Random,
): Float64Array {
  if (noise === 0) return truth;
  return truth.map(
    (value, i) => value + ((noise * (channels[i].max - channels[i].min)) / 2) * drawNormal(random),
  );
}

/**
 * The actuator: follows the command as fast as its rate lets it and as far as its range. `actuated` holds what it did over the
 * sample before, and is overwritten.
 */
function actuate(actuated: Float64Array, command: ArrayLike<number>, plant: Plant, sampleTime: number): void {
  plant.inputs.forEach(({ min, max, rate }, j) => {
    const most = rate === undefined ? Number.POSITIVE_INFINITY : rate * sampleTime;
    const reached = Math.min(actuated[j] + most, Math.max(actuated[j] - most, command[j]));
    actuated[j] = Math.min(max, Math.max(min, reached));
  });
}

/** Adds the disturbances that are switched on: they act behind the actuator, and no one measures them. */
function addDisturbances(
  acting: Float64Array,
  plant: Plant,
  { disturbances }: ScenarioSettings,
  time: number,
): void {
  plant.inputs.forEach(({ name }, j) => {
    for (const { input, value, from } of disturbances) if (input === name && time >= from) acting[j] += value;
  });
}

function ranAway(plant: Plant, x: ArrayLike<number>): boolean {
  return plant.states.some(
    ({ min, max }, i) => !(Math.abs(x[i] - (min + max) / 2) <= (RUNAWAY * (max - min)) / 2),
  );
}

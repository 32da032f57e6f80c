import { createRandom, deriveSeed, type Random } from '../numerics/random.ts';
import { drawWithin } from '../plant/draw.ts';
import { excite, type SignalShape } from '../plant/excitation/excite.ts';
import { shapeInput } from '../plant/excitation/shapeInput.ts';
import { integrateSample } from '../plant/integrate.ts';
import { nominalParameters, type Plant } from '../plant/plant.ts';
import type { Dataset, Trajectory } from './dataset.ts';
import { dealRoles } from './split.ts';

export type { SignalShape };

export interface ExperimentSettings {
  /** At least one; the trajectories take them in turn. */
  readonly signals: readonly SignalShape[];
  readonly trajectories: number;
  /** Seconds, one trajectory. */
  readonly duration: number;
  /** Share of the input range used, (0, 1]. */
  readonly amplitude: number;
  /** Seconds that a random step or a bit of the sequence is held. */
  readonly hold: number;
  /** Hz: highest frequency of multisine and chirp. */
  readonly highest: number;
  /** Initial states are drawn from the state ranges times this factor; a trajectory that leaves `cutAt` times the ranges is cut. */
  readonly startRegion: number;
  readonly cutAt: number;
  /** Shares of the trajectories; the rest is held out. */
  readonly fitShare: number;
  readonly chooseShare: number;
}

/** How an experiment is run, besides its settings. */
export interface ExperimentOptions {
  /** Seconds. */
  readonly sampleTime: number;
  /** RK4 sub-steps in one sample, from `chooseSubsteps`. */
  readonly substeps: number;
  readonly seed: number;
  /** Called after each trajectory with the number done and the number planned. */
  readonly onProgress?: (done: number, planned: number) => void;
}

/** A cut trajectory with fewer samples than this is counted among the cuts and left out. */
export const FEWEST_STEPS = 5;

/**
 * Excites the nominal plant along many trajectories from drawn initial states and splits them, whole, into roles.
 *
 * Trajectory `i` draws from its own seed `deriveSeed(seed, 'experiment', i)`, so that its numbers depend neither on the
 * others nor on their order. Inputs keep the range and the rate limit of the plant. A trajectory ends early when the
 * state is no longer finite or leaves `cutAt` times the ranges at a sample; the samples before that are kept.
 * `datasetProblem` says whether the result can be used.
 *
 * @throws whatever the plant's derivative throws.
 */
export function runExperiment(
  plant: Plant,
  settings: ExperimentSettings,
  options: ExperimentOptions,
): Dataset {
  const { sampleTime, seed, onProgress } = options;
  const kept: Omit<Trajectory, 'role'>[] = [];
  const cuts = { diverged: 0, leftRange: 0 };
  for (let i = 0; i < settings.trajectories; i++) {
    const shape = settings.signals[i % settings.signals.length];
    const random = createRandom(deriveSeed(seed, 'experiment', i));
    const trajectory = runTrajectory(plant, settings, options, shape, random);
    if (trajectory.cut === 'diverged') cuts.diverged++;
    if (trajectory.cut === 'left-range') cuts.leftRange++;
    if (trajectory.steps >= FEWEST_STEPS) kept.push({ signal: shape, ...trajectory });
    onProgress?.(i + 1, settings.trajectories);
  }
  const random = createRandom(deriveSeed(seed, 'split'));
  const roles = dealRoles(kept.length, settings.fitShare, settings.chooseShare, random);
  return {
    sampleTime,
    coordinates: plant.states,
    inputs: plant.inputs,
    trajectories: kept.map((trajectory, i) => ({ role: roles[i], ...trajectory })),
    cuts,
  };
}

function runTrajectory(
  plant: Plant,
  settings: ExperimentSettings,
  { sampleTime, substeps }: ExperimentOptions,
  shape: SignalShape,
  random: Random,
): Omit<Trajectory, 'role'> {
  const p = nominalParameters(plant);
  const nx = plant.states.length;
  const nu = plant.inputs.length;
  const count = Math.max(FEWEST_STEPS, Math.round(settings.duration / sampleTime));
  const start = drawWithin(plant.states, settings.startRegion, random);
  const u = new Float64Array(count * nu);
  for (const [j, input] of plant.inputs.entries()) {
    const { hold, highest } = settings;
    const signal = excite(shape, { count, sampleTime, hold, highest, input: j, inputs: nu }, random);
    const shaped = shapeInput(signal, input, settings.amplitude, plant.operatingPoint.u[j], sampleTime);
    for (let k = 0; k < count; k++) u[k * nu + j] = shaped[k];
  }

  const x = new Float64Array((count + 1) * nx);
  x.set(start);
  const next = new Float64Array(nx);
  let cut: Trajectory['cut'];
  let steps = 0;
  while (steps < count && !cut) {
    const from = x.subarray(steps * nx, (steps + 1) * nx);
    const held = u.subarray(steps * nu, (steps + 1) * nu);
    if (integrateSample(plant, p, from, held, sampleTime, substeps, next) === 'diverged') cut = 'diverged';
    else if (!insideRanges(plant, next, settings.cutAt)) cut = 'left-range';
    else x.set(next, ++steps * nx);
  }
  if (!cut) return { steps, x, u };
  return { steps, x: x.slice(0, (steps + 1) * nx), u: u.slice(0, steps * nu), cut };
}

function insideRanges(plant: Plant, x: ArrayLike<number>, factor: number): boolean {
  return plant.states.every(({ min, max }, i) => {
    const distance = Math.abs(x[i] - (min + max) / 2);
    return distance <= (factor * (max - min)) / 2;
  });
}

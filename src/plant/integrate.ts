import { createRk4Work, type Rk4Work, rk4Step } from '../numerics/rk4.ts';
import type { ParameterValues, Plant } from './plant.ts';

/** How an integration ended: `diverged` when a state is no longer a finite number. */
export type IntegrationOutcome = 'finished' | 'diverged';

function advance(
  plant: Plant,
  p: ParameterValues,
  x: Float64Array,
  u: ArrayLike<number>,
  time: number,
  substeps: number,
  work: Rk4Work,
): void {
  const h = time / substeps;
  const f = (state: Float64Array) => plant.derivative(state, u, p);
  for (let i = 0; i < substeps; i++) rk4Step(f, x, h, work);
}

function outcomeOf(x: ArrayLike<number>, from: number, to: number): IntegrationOutcome {
  for (let i = from; i < to; i++) if (!Number.isFinite(x[i])) return 'diverged';
  return 'finished';
}

/**
 * The state one sample later, the input held: `ẋ = f(x, u, p)` over `sampleTime`, by RK4 in equal sub-steps.
 *
 * @param x nx entries, not modified unless `xOut` is the same array, which is allowed.
 * @param u nu entries, held over the sample.
 * @param sampleTime seconds.
 * @param substeps integer ≥ 1, see `chooseSubsteps`.
 * @param xOut nx entries, overwritten; not to be used when the outcome is `diverged`.
 * @throws whatever the plant's derivative throws.
 */
export function integrateSample(
  plant: Plant,
  p: ParameterValues,
  x: ArrayLike<number>,
  u: ArrayLike<number>,
  sampleTime: number,
  substeps: number,
  xOut: Float64Array,
): IntegrationOutcome {
  const nx = plant.states.length;
  for (let i = 0; i < nx; i++) xOut[i] = x[i];
  advance(plant, p, xOut, u, sampleTime, substeps, createRk4Work(nx));
  return outcomeOf(xOut, 0, nx);
}

/**
 * The same, with the points between the samples: row `j` of `xOut` is the state at `(j + 1) · sampleTime / fine`, so that
 * the last row is the state one sample later. Each part takes `⌈substeps / fine⌉` sub-steps: never fewer in all than
 * `integrateSample` takes, and exactly its numbers when `fine` divides `substeps`.
 *
 * @param fine integer ≥ 1: points kept in a sample.
 * @param xOut fine × nx, row-major, overwritten. When diverged, the rows from the first non-finite one on are of no use.
 */
export function integrateFine(
  plant: Plant,
  p: ParameterValues,
  x: ArrayLike<number>,
  u: ArrayLike<number>,
  sampleTime: number,
  substeps: number,
  fine: number,
  xOut: Float64Array,
): IntegrationOutcome {
  const nx = plant.states.length;
  const work = createRk4Work(nx);
  const state = Float64Array.from(x);
  const perPart = Math.ceil(substeps / fine);
  for (let j = 0; j < fine; j++) {
    advance(plant, p, state, u, sampleTime / fine, perPart, work);
    xOut.set(state, j * nx);
  }
  return outcomeOf(xOut, 0, fine * nx);
}

import { createRandom } from '../numerics/random.ts';
import { describeValue } from './describeValue.ts';
import { drawWithin } from './draw.ts';
import { fieldProblems, type PlantProblem } from './fields.ts';
import { nominalParameters, type Plant } from './plant.ts';

export type { PlantProblem };

/** States and inputs at which the functions are tried, besides the operating point. */
const TRIALS = 200;

/** What is wrong with a module's export as a plant; `thrown` is what one of its functions threw, for its line. */
export interface PlantCheck {
  readonly problems: readonly PlantProblem[];
  readonly thrown?: unknown;
}

/**
 * Checks what a plant module exports: every field and its type, ranges, names, the operating point; then its functions at
 * the operating point and at 200 states and inputs drawn over the ranges (always the same ones): numbers, as many as there are
 * states, arguments unchanged. The functions are tried only when the fields are right.
 *
 * @param exported the module's default export, of any kind.
 * @returns no problems when it is a `Plant`.
 */
export function checkPlant(exported: unknown): PlantCheck {
  const problems = fieldProblems(exported);
  return problems.length > 0 ? { problems } : tryFunctions(exported as Plant);
}

function tryFunctions(plant: Plant): PlantCheck {
  const random = createRandom(1);
  const points = [
    { place: 'at the operating point', x: plant.operatingPoint.x, u: plant.operatingPoint.u },
    ...Array.from({ length: TRIALS }, () => ({
      place: 'inside the ranges',
      x: Array.from(drawWithin(plant.states, 1, random)),
      u: Array.from(drawWithin(plant.inputs, 1, random)),
    })),
  ];
  for (const point of points) {
    const check = tryPoint(plant, point);
    if (check) return check;
  }
  return { problems: [] };
}

interface TrialPoint {
  readonly place: string;
  readonly x: readonly number[];
  readonly u: readonly number[];
}

/** The first problem at one point, or null. */
function tryPoint(plant: Plant, point: TrialPoint): PlantCheck | null {
  const p = nominalParameters(plant);
  const where = describePoint(plant, point);
  const x = Float64Array.from(point.x);
  const u = Float64Array.from(point.u);
  const given = { ...p };
  const changed = () =>
    x.some((value, i) => value !== point.x[i]) ||
    u.some((value, i) => value !== point.u[i]) ||
    Object.keys({ ...p, ...given }).some((name) => given[name] !== p[name]);

  /** Runs one function of the plant; its value or the problem that it threw. */
  const attempt = <T>(key: string, run: () => T): { value: T } | PlantCheck => {
    try {
      return { value: run() };
    } catch (thrown) {
      const got = `an exception ${where}: ${thrown instanceof Error ? thrown.message : String(thrown)}`;
      const wayOut = 'mend the function at the line shown';
      return { problems: [{ key, must: 'a function that returns for every state', got, wayOut }], thrown };
    }
  };
  const unchanged = (key: string): PlantCheck | null =>
    changed()
      ? problem(
          key,
          'a function that leaves its arguments as they are',
          `changed arguments ${where}`,
          'compute into new variables',
        )
      : null;

  const derivative = attempt('derivative', () => plant.derivative(x, u, given));
  if (!('value' in derivative)) return derivative;
  const bad = derivativeProblem(plant, derivative.value, where) ?? unchanged('derivative');
  if (bad) return bad;

  const readings = [
    ...plant.outputs.flatMap(({ name, of }) =>
      typeof of === 'function' ? [{ key: `outputs.${name}.of`, of }] : [],
    ),
    ...(plant.physics ?? []).map(({ name, of }) => ({ key: `physics.${name}.of`, of })),
  ];
  for (const { key, of } of readings) {
    const reading = attempt(key, () => of(x, given));
    if (!('value' in reading)) return reading;
    if (!Number.isFinite(reading.value)) {
      const wayOut = 'mend the formula there, or narrow the ranges of the states';
      return problem(key, 'a finite number', `${describeValue(reading.value)} ${where}`, wayOut);
    }
    const mutated = unchanged(key);
    if (mutated) return mutated;
  }
  return null;
}

function derivativeProblem(plant: Plant, value: unknown, where: string): PlantCheck | null {
  const nx = plant.states.length;
  const must = `a function that returns ${nx} number${nx === 1 ? '' : 's'}, one for each state`;
  if (!Array.isArray(value) && !ArrayBuffer.isView(value)) {
    const wayOut = 'return an array, one derivative for each state in their order';
    return problem('derivative', must, `${describeValue(value)} ${where}`, wayOut);
  }
  const dx = value as ArrayLike<unknown>;
  if (dx.length !== nx) {
    const names = plant.states.map(({ name }) => name).join(', ');
    const wayOut = `return the derivatives of ${names}, in this order`;
    return problem('derivative', must, `${dx.length} ${where}`, wayOut);
  }
  for (const [i, state] of plant.states.entries()) {
    if (Number.isFinite(dx[i])) continue;
    const got = `${describeValue(dx[i])} for ${state.name} ${where}`;
    const wayOut = 'mend the formula there, or narrow the ranges of states and inputs';
    return problem('derivative', 'finite for every state and input inside the ranges', got, wayOut);
  }
  return null;
}

function problem(key: string, must: string, got: string, wayOut: string): PlantCheck {
  return { problems: [{ key, must, got, wayOut }] };
}

/** `at the operating point (gap = 0.003, command = 0.99)`. */
function describePoint(plant: Plant, { place, x, u }: TrialPoint): string {
  const values = [...plant.states, ...plant.inputs].map(
    ({ name }, i) => `${name} = ${Number((i < x.length ? x[i] : u[i - x.length]).toPrecision(6))}`,
  );
  return `${place} (${values.join(', ')})`;
}

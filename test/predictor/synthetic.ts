import type { Dataset, Role, Scaling, Trajectory } from '../../src/data/dataset.ts';
import type { BoundLifting, Lifting } from '../../src/lift/lifting.ts';
import { createRandom, type Random } from '../../src/numerics/random.ts';

/** Scaling that changes nothing. */
export function unitScaling(nx: number, nu: number, ny = 1): Scaling {
  const unit = (n: number) => ({ centre: new Array(n).fill(0), half: new Array(n).fill(1) });
  return { x: unit(nx), u: unit(nu), y: unit(ny) };
}

/** Channels `x1 …`, `u1 …` on [−1, 1]. */
export function channels(letter: string, n: number) {
  return Array.from({ length: n }, (_, i) => ({ name: `${letter}${i + 1}`, unit: '1', min: -1, max: 1 }));
}

/** A trajectory from its rows of states and inputs. */
export function trajectoryOf(x: readonly number[][], u: readonly number[][], role: Role = 'fit'): Trajectory {
  return { role, steps: u.length, x: Float64Array.from(x.flat()), u: Float64Array.from(u.flat()) };
}

export function datasetOf(
  trajectories: readonly Trajectory[],
  nx: number,
  nu: number,
  sampleTime = 0.1,
): Dataset {
  return {
    sampleTime,
    coordinates: channels('x', nx),
    inputs: channels('u', nu),
    trajectories,
    cuts: { diverged: 0, leftRange: 0 },
  };
}

/** Trajectories of `x⁺ = step(x, u)` from random starts under random inputs, all uniform on [−1, 1]. */
export function simulate(options: {
  readonly step: (x: readonly number[], u: readonly number[]) => readonly number[];
  readonly nx: number;
  readonly nu: number;
  readonly trajectories: number;
  readonly steps: number;
  readonly seed: number;
  readonly sampleTime?: number;
  readonly role?: (index: number) => Role;
}): Dataset {
  const random = createRandom(options.seed);
  const { nx, nu, steps } = options;
  const trajectories = Array.from({ length: options.trajectories }, (_, t): Trajectory => {
    const x = new Float64Array((steps + 1) * nx);
    const u = Float64Array.from({ length: steps * nu }, () => 2 * random() - 1);
    let state: readonly number[] = Array.from({ length: nx }, () => 2 * random() - 1);
    x.set(state);
    for (let k = 0; k < steps; k++) {
      state = options.step(state, Array.from(u.subarray(k * nu, (k + 1) * nu)));
      x.set(state, (k + 1) * nx);
    }
    return { role: options.role?.(t) ?? 'fit', steps, x, u };
  });
  return datasetOf(trajectories, nx, nu, options.sampleTime);
}

/** A lifting from functions of the state, after the state itself; a function named `constant` is that. */
export function liftBy(
  nx: number,
  functions: Readonly<Record<string, (x: ArrayLike<number>) => number>>,
): { lifting: Lifting; bound: BoundLifting } {
  const names = [...channels('x', nx).map((c) => c.name), ...Object.keys(functions)];
  const list = Object.values(functions);
  return {
    lifting: {
      nx,
      nz: names.length,
      names,
      parts: [],
      dropped: [],
      constantIndex: names.indexOf('constant'),
    },
    bound: {
      nx,
      nz: names.length,
      liftInto: (z, x) => {
        for (let i = 0; i < nx; i++) z[i] = x[i];
        for (let i = 0; i < list.length; i++) z[nx + i] = list[i](x);
      },
      jacobianInto: () => {
        throw new Error('not needed here');
      },
    },
  };
}

/** The state of the plane and thin-plate functions r² log r about centres drawn from the square [−1, 1]². */
export function thinPlates(count: number, random: Random, constant = false) {
  const centres = Array.from({ length: count }, () => [2 * random() - 1, 2 * random() - 1]);
  const functions = centres.map(([a, b], i) => [
    `plate${i + 1}`,
    (x: ArrayLike<number>) => {
      const square = (x[0] - a) ** 2 + (x[1] - b) ** 2;
      return square > 0 ? 0.5 * square * Math.log(square) : 0;
    },
  ]);
  return liftBy(2, Object.fromEntries(constant ? [...functions, ['constant', () => 1]] : functions));
}

/** One step of the classical fourth-order Runge–Kutta method with the input held. */
export function rk4(
  f: (x: readonly number[], u: readonly number[]) => readonly number[],
  x: readonly number[],
  u: readonly number[],
  h: number,
): number[] {
  const along = (k: readonly number[], by: number) => x.map((value, i) => value + by * k[i]);
  const a = f(x, u);
  const b = f(along(a, h / 2), u);
  const c = f(along(b, h / 2), u);
  const d = f(along(c, h), u);
  return x.map((value, i) => value + (h / 6) * (a[i] + 2 * b[i] + 2 * c[i] + d[i]));
}

/** Largest |a − b| over all entries; NaN shows. */
export function largestDifference(a: ArrayLike<number>, b: ArrayLike<number>): number {
  if (a.length !== b.length) return Number.NaN;
  let worst = 0;
  for (let i = 0; i < a.length; i++) {
    const difference = Math.abs(a[i] - b[i]);
    if (!(difference <= worst)) worst = difference;
  }
  return worst;
}

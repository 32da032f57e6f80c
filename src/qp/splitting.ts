import { plainKernels } from '../numerics/kernels/plain.ts';
import { equilibrate } from './equilibrate.ts';
import { prepareQp } from './prepare.ts';
import { allFinite } from './products.ts';
import type { QpResult, QpSolver, QpStatus, QpStructure } from './qp.ts';
import { measureConditions } from './residuals.ts';
import { createSplitState, iterateDouble, iterateSingle, type SplitState } from './splitIterations.ts';
import { chooseRho } from './splitRho.ts';
import { UnusableQpError } from './unusableQp.ts';

/** Settings of the splitting solver. */
export interface SplittingSettings {
  /**
   * Fixed mode: exactly so many iterations a solve, no test, no change of the step size. Absent: iterations until `accuracy`, the
   * step size adapted.
   */
  readonly iterations?: number;
  /** `single` rounds every operation to float32, as a target without doubles does; fixed mode only. */
  readonly precision?: 'double' | 'single';
  /** A solve counts as optimal when the conditions hold to this, relative to the size of their terms; 1e-6, in fixed mode 1e-3. */
  readonly accuracy?: number;
  /** Most iterations outside fixed mode; 20,000. */
  readonly iterationLimit?: number;
  /** Factor on the step sizes that `chooseRho` takes from the spectrum of the dual matrix; 1. */
  readonly rho?: number;
  /** Regularisation, 1e-6, and over-relaxation in (0, 2), 1.8. */
  readonly sigma?: number;
  readonly alpha?: number;
}

/** A structure in scaled coordinates: `x = D x̂`, row i times `E[i]`, cost times c. */
export interface PreparedSplit {
  readonly P: Float64Array;
  readonly A: Float64Array;
  readonly D: Float64Array;
  readonly E: Float64Array;
  readonly c: number;
}

/** All that exported code needs to repeat the fixed mode bit by bit; see `SplitState` for the iteration. */
export interface SplitArithmetic {
  readonly scaling: PreparedSplit;
  readonly state: SplitState<Float64Array> | SplitState<Float32Array>;
}

export interface SplittingSolver extends QpSolver {
  /** Replaces the warm start by a point and multipliers, user's units. */
  readonly setPoint: (x: ArrayLike<number>, multipliers: ArrayLike<number>) => void;
  readonly arithmetic: SplitArithmetic;
}

/** Iterations between two tests outside fixed mode. */
const CHECK = 10;
/** Tests between two looks at the step size. */
const LOOK = 5;
/** The step size changes only by more than this factor. */
const CHANGE = 5;
/** … and by this at most. */
const MOST_CHANGE = 20;
/** Equality rows get this times the step size of the others. */
const EQUALITY = 10;
const INFEASIBLE = 1e-5;

/**
 * Operator splitting: B. Stellato, G. Banjac, P. Goulart, A. Bemporad, S. Boyd, "OSQP: an operator splitting solver for quadratic
 * programs", Math. Prog. Comp. 12:637–672 (2020), on dense condensed matrices with the inverse of `P + σI + AᵀRA` kept. A soft row
 * takes the proximal step of half the squared distance to its bounds in place of the projection: no slack variable.
 * In fixed mode a solve is `iterations` times the same operations in the same order: the arithmetic of exported code.
 *
 * The warm start is the last point and its multipliers; `setWorkingSet` with all zero is a cold start, any other has no effect.
 * @throws UnusableQpError as the exact solver, and for settings that contradict each other.
 */
export function createSplittingSolver(
  structure: QpStructure,
  settings: SplittingSettings = {},
): SplittingSolver {
  const fixed = settings.iterations;
  const single = settings.precision === 'single';
  checkSettings(settings);
  const { condition } = prepareQp(structure);
  const n = structure.H.rows;
  const m = structure.G.rows;
  const scaling = equilibrate(structure);
  const { P, A, D, E, c } = scaling;
  const sigma = settings.sigma ?? 1e-6;
  const alpha = settings.alpha ?? 1.8;
  const accuracy = settings.accuracy ?? (fixed === undefined ? 1e-6 : 1e-3);
  const limit = fixed ?? settings.iterationLimit ?? 20_000;
  const softness = structure.softness.map((s, i) => (s * E[i] * E[i]) / c);
  const weights = chooseRho(P, A, softness, n, m);

  const state = createSplitState(n, m, (length) => new Float64Array(length));
  const rounded = single ? createSplitState(n, m, (length) => new Float32Array(length)) : null;
  const factor = new Float64Array(n * n);
  const column = new Float64Array(n);
  const gradient = new Float64Array(n);
  const before = new Float64Array(m);
  const equal = new Uint8Array(m);
  let step = settings.rho ?? 1;
  state.A.set(A);
  state.constants.set([sigma, alpha, 1 - alpha]);

  /** `rho` of every row and `K`, for the present step size. Cost `n³ + m n²`. */
  const refactor = () => {
    for (let i = 0; i < m; i++) {
      const rho = step * weights[i] * (equal[i] === 1 ? EQUALITY : 1);
      state.rho[i] = rho;
      state.inverseRho[i] = 1 / rho;
      state.give[i] = (softness[i] * rho) / (1 + softness[i] * rho);
      state.hold[i] = rho * (1 - state.give[i]);
    }
    factor.set(P);
    for (let j = 0; j < n; j++) factor[j * n + j] += sigma;
    for (let i = 0; i < m; i++) {
      for (let j = 0; j < n; j++) {
        const value = state.rho[i] * A[i * n + j];
        if (value !== 0) for (let k = 0; k <= j; k++) factor[j * n + k] += value * A[i * n + k];
      }
    }
    plainKernels.factorCholesky(factor, n);
    for (let j = 0; j < n; j++) {
      column.fill(0);
      column[j] = 1;
      plainKernels.solveLower(factor, n, n, column);
      plainKernels.solveLowerTransposed(factor, n, n, column);
      for (let k = 0; k <= j; k++) {
        state.K[j * n + k] = column[k];
        state.K[k * n + j] = column[k];
      }
    }
  };
  refactor();
  if (rounded) {
    for (const key of ['K', 'A', 'rho', 'inverseRho', 'give', 'hold', 'constants'] as const) {
      rounded[key].set(state[key]);
    }
  }
  const active: SplitState<Float64Array> | SplitState<Float32Array> = rounded ?? state;

  const result: QpResult = {
    status: 'failed',
    x: new Float64Array(n),
    multipliers: new Float64Array(m),
    residuals: { stationarity: 0, primal: 0, dual: 0, complementarity: 0, relative: 0 },
    iterations: 0,
    workingSet: new Int8Array(m),
    certificate: new Float64Array(m),
  };

  const restart = () => {
    active.x.fill(0);
    active.z.fill(0);
    active.y.fill(0);
  };

  const measure = (q: Float64Array, lower: Float64Array, upper: Float64Array) => {
    for (let j = 0; j < n; j++) result.x[j] = D[j] * active.x[j];
    for (let i = 0; i < m; i++) result.multipliers[i] = (E[i] * active.y[i]) / c;
    measureConditions(result.residuals, structure, q, lower, upper, result.x, result.multipliers, gradient);
  };

  /** Iterations with tests, the step size and the equality rows minded. */
  const adapt = (q: Float64Array, lower: Float64Array, upper: Float64Array): QpStatus => {
    let changed = false;
    let changes = 0;
    for (let i = 0; i < m; i++) {
      const is = lower[i] === upper[i] ? 1 : 0;
      if (is !== equal[i]) changed = true;
      equal[i] = is;
    }
    if (changed) refactor();
    for (let check = 1; result.iterations < limit; check++) {
      before.set(state.y);
      iterateDouble(state, CHECK);
      result.iterations += CHECK;
      measure(q, lower, upper);
      if (!allFinite(result.x)) return 'failed';
      if (result.residuals.relative <= accuracy) return 'optimal';
      if (provesInfeasible(structure, E, state.y, before, lower, upper, result.certificate, gradient)) {
        return 'infeasible';
      }
      if (check % LOOK === 0) {
        // Ever smaller changes, so that the step size cannot swing between two values for ever.
        const most = MOST_CHANGE ** (1 / (1 + changes));
        const factor = Math.min(most, Math.max(1 / most, balance(state, P)));
        const least = Math.min(CHANGE, Math.sqrt(most));
        if (factor > least || factor < 1 / least) {
          changes++;
          step = Math.min(1e6, Math.max(1e-6, step * factor));
          refactor();
        }
      }
    }
    return 'iteration-limit';
  };

  const solve = (q: Float64Array, lower: Float64Array, upper: Float64Array): QpResult => {
    result.iterations = 0;
    result.certificate.fill(0);
    const settled = inspect(structure, q, lower, upper);
    if (settled !== null) {
      result.status = settled;
      restart();
      measure(q, lower, upper);
      return result;
    }
    for (let j = 0; j < n; j++) active.q[j] = c * D[j] * q[j];
    for (let i = 0; i < m; i++) {
      active.lower[i] = E[i] * lower[i];
      active.upper[i] = E[i] * upper[i];
    }
    if (fixed === undefined) result.status = adapt(q, lower, upper);
    else {
      if (rounded) iterateSingle(rounded, fixed);
      else iterateDouble(state, fixed);
      result.iterations = fixed;
      measure(q, lower, upper);
      result.status = allFinite(result.x)
        ? result.residuals.relative <= accuracy
          ? 'optimal'
          : 'iteration-limit'
        : 'failed';
    }
    for (let i = 0; i < m; i++) result.workingSet[i] = Math.sign(result.multipliers[i]);
    if (result.status === 'failed') restart();
    return result;
  };

  return {
    n,
    m,
    condition,
    solve,
    setWorkingSet(workingSet) {
      for (let i = 0; i < m; i++) if (workingSet[i] !== 0) return;
      restart();
    },
    setPoint(x, multipliers) {
      for (let j = 0; j < n; j++) active.x[j] = x[j] / D[j];
      for (let i = 0; i < m; i++) {
        let value = 0;
        for (let j = 0; j < n; j++) value += structure.G.data[i * n + j] * x[j];
        active.z[i] = E[i] * value;
        active.y[i] = (c * multipliers[i]) / E[i];
      }
    },
    arithmetic: { scaling, state: active },
  };
}

function checkSettings({ iterations, precision, alpha, sigma, rho }: SplittingSettings): void {
  const refuse = (key: string, must: string, got: unknown, wayOut: string): never => {
    throw new UnusableQpError({ key, must, got: String(got), wayOut });
  };
  if (precision === 'single' && iterations === undefined) {
    refuse('precision', 'double outside fixed mode', 'single', 'give the number of iterations');
  }
  if (iterations !== undefined && !(Number.isInteger(iterations) && iterations > 0)) {
    refuse(
      'iterations',
      'an integer ≥ 1',
      iterations,
      'leave it out for iterations until the accuracy is met',
    );
  }
  if (alpha !== undefined && !(alpha > 0 && alpha < 2))
    refuse('alpha', 'between 0 and 2', alpha, '1.8 serves');
  if (sigma !== undefined && !(sigma > 0)) refuse('sigma', '> 0', sigma, '1e-6 serves');
  if (rho !== undefined && !(rho > 0)) refuse('rho', '> 0', rho, 'leave it out to have it chosen');
}

/** A status when the data themselves settle the outcome, else null. */
function inspect(
  { G, softness }: QpStructure,
  q: Float64Array,
  lower: Float64Array,
  upper: Float64Array,
): QpStatus | null {
  if (!allFinite(q)) return 'failed';
  let crossed = false;
  for (let i = 0; i < G.rows; i++) {
    if (Number.isNaN(lower[i]) || Number.isNaN(upper[i])) return 'failed';
    if (lower[i] === Number.POSITIVE_INFINITY || upper[i] === Number.NEGATIVE_INFINITY) return 'failed';
    if (lower[i] > upper[i]) crossed = true;
    if (softness[i] === 0 && (lower[i] > 0 || upper[i] < 0)) {
      let empty = true;
      for (let j = 0; j < G.cols; j++) if (G.data[i * G.cols + j] !== 0) empty = false;
      if (empty) crossed = true;
    }
  }
  return crossed ? 'infeasible' : null;
}

/**
 * Do the multipliers run away in a direction `v` with `Gᵀ v = 0` and `Σ (v⁺ upper − v⁻ lower) < 0` (Stellato et al., section 3.4)? Soft
 * rows and open sides take no part.
 */
function provesInfeasible(
  { G, softness }: QpStructure,
  E: Float64Array,
  y: Float64Array,
  before: Float64Array,
  lower: Float64Array,
  upper: Float64Array,
  v: Float64Array,
  sum: Float64Array,
): boolean {
  const { rows, cols, data } = G;
  let size = 0;
  let margin = 0;
  sum.fill(0);
  for (let i = 0; i < rows; i++) {
    const change = E[i] * (y[i] - before[i]);
    const bound = change > 0 ? upper[i] : lower[i];
    const usable = change !== 0 && softness[i] === 0 && Number.isFinite(bound);
    v[i] = usable ? change : 0;
    if (!usable) continue;
    let most = 0;
    for (let j = 0; j < cols; j++) {
      sum[j] += data[i * cols + j] * change;
      most = Math.max(most, Math.abs(data[i * cols + j] * change));
    }
    size = Math.max(size, most);
    margin -= change * bound;
  }
  let left = 0;
  for (let j = 0; j < cols; j++) left = Math.max(left, Math.abs(sum[j]));
  let reach = 0;
  for (let i = 0; i < rows; i++)
    if (v[i] !== 0) reach = Math.max(reach, Math.abs(v[i] * (v[i] > 0 ? upper[i] : lower[i])));
  return size > 0 && left <= INFEASIBLE * size && margin > INFEASIBLE * reach && margin > 0;
}

/** `√(primal / dual)` residual, each relative to its terms, in scaled units: the factor by which the step size should change. */
function balance({ n, m, A, q, x, z, y, r, t }: SplitState<Float64Array>, P: Float64Array): number {
  let primal = 0;
  let primalTerms = Number.MIN_VALUE;
  for (let i = 0; i < m; i++) {
    let sum = 0;
    for (let j = 0; j < n; j++) sum += A[i * n + j] * x[j];
    t[i] = sum - z[i];
    primal = Math.max(primal, Math.abs(t[i]));
    primalTerms = Math.max(primalTerms, Math.abs(sum), Math.abs(z[i]));
  }
  let dual = 0;
  let dualTerms = Number.MIN_VALUE;
  r.fill(0);
  for (let i = 0; i < m; i++) for (let j = 0; j < n; j++) r[j] += A[i * n + j] * y[i];
  for (let j = 0; j < n; j++) {
    let sum = 0;
    for (let k = 0; k < n; k++) sum += P[j * n + k] * x[k];
    dual = Math.max(dual, Math.abs(sum + q[j] + r[j]));
    dualTerms = Math.max(dualTerms, Math.abs(sum), Math.abs(q[j]), Math.abs(r[j]));
  }
  return Math.sqrt(Math.max(primal / primalTerms, 1e-12) / Math.max(dual / dualTerms, 1e-12));
}

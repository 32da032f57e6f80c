import type { PreparedQp } from './prepare.ts';
import { addRow, copyInto, dot, largest, multiplyRows, subtractRows } from './products.ts';
import type { QpResiduals } from './qp.ts';
import type { WorkingFactor } from './workingFactor.ts';

/** The state of the exact solver: data of the present solve, point, multipliers and room to work in. */
export interface Iterate {
  readonly qp: PreparedQp;
  readonly factor: WorkingFactor;
  q: Float64Array;
  lower: Float64Array;
  upper: Float64Array;
  /** Minimum without rows. */
  readonly x0: Float64Array;
  readonly x: Float64Array;
  /** `G x`. */
  readonly values: Float64Array;
  readonly multipliers: Float64Array;
  /** For each row of the working set the bound it is held to: 1 upper, −1 lower; 0 outside. */
  readonly side: Int8Array;
  /** 1 where both bounds are equal. */
  readonly equal: Uint8Array;
  /** 1 for dependent rows that are consistent to within rounding. */
  readonly exempt: Uint8Array;
  /** Violated rows and their signed excess times `scale`. */
  readonly candidates: Int32Array;
  readonly gaps: Float64Array;
  /** Marks, one a place of the working set. */
  readonly leave: Uint8Array;
  /** `Q[W, W]⁻¹ Q[W, row]` of the row that was to join last. */
  readonly direction: Float64Array;
  /** Multipliers tried on the way from `factor.held` to `factor.mu`. */
  readonly trial: Float64Array;
  /** Dual objective at `factor.held`; −Infinity when that is not known. */
  heldObjective: number;
  /** The row that was to join last, or the worst of the block. */
  entering: number;
  enteringSide: number;
  /** max|q|. */
  sizeQ: number;
  /** max of |q| and |λᵢ Gᵢ| at the last measurement. */
  force: number;
  /** What rounding of a row's value is relative to: see `sizeOf`. */
  size: number;
  /** Relative residual of the equations that the working set makes: what refinement can mend. */
  unsolved: number;
  readonly residuals: QpResiduals;
  /** `H x + q + Gᵀ λ`. */
  readonly gradient: Float64Array;
  readonly step: Float64Array;
  readonly right: Float64Array;
}

export function createIterate(qp: PreparedQp, factor: WorkingFactor): Iterate {
  const { n, m } = qp;
  const none = new Float64Array(0);
  const room = factor.rows.length;
  return {
    qp,
    factor,
    q: none,
    lower: none,
    upper: none,
    x0: new Float64Array(n),
    x: new Float64Array(n),
    values: new Float64Array(m),
    multipliers: new Float64Array(m),
    side: new Int8Array(m),
    equal: new Uint8Array(m),
    exempt: new Uint8Array(m),
    candidates: new Int32Array(m),
    gaps: new Float64Array(m),
    leave: new Uint8Array(room),
    direction: new Float64Array(room),
    trial: new Float64Array(room),
    heldObjective: Number.NEGATIVE_INFINITY,
    entering: -1,
    enteringSide: 0,
    sizeQ: 0,
    force: 0,
    size: 0,
    unsolved: 0,
    residuals: { stationarity: 0, primal: 0, dual: 0, complementarity: 0, relative: 0 },
    gradient: new Float64Array(n),
    step: new Float64Array(n),
    right: new Float64Array(room),
  };
}

/** Points below this share of where the data live count as 0. */
const NOUGHT = 1e-3;

/**
 * max|x|, or a thousandth of `reach` if that is more, `reach` being the largest of max|q| / max|H| and |bound| / max|Gᵢ| over the
 * active rows: where forces cancel at x = 0, a bound of 0 would else be asked for to 1e-13 of a rounding error.
 */
export function sizeOf(x: Float64Array, reach: number): number {
  return Math.max(largest(x), NOUGHT * reach);
}

/** `reach` of the present working set. */
function reachOf({ qp, factor, side, lower, upper, sizeQ }: Iterate): number {
  let reach = qp.sizeH > 0 ? sizeQ / qp.sizeH : 0;
  for (let j = 0; j < factor.k; j++) {
    const i = factor.rows[j];
    if (qp.rowSize[i] > 0) {
      reach = Math.max(reach, Math.abs(side[i] > 0 ? upper[i] : lower[i]) / qp.rowSize[i]);
    }
  }
  return reach;
}

/** `x = x0 − (H⁻¹ Gᵀ) λ` from the multipliers of the working set, and the values of all rows. Cost `k n` and the product with G. */
export function updatePrimal(it: Iterate): void {
  const { qp, factor, x, x0 } = it;
  const { n, m, scale, Y } = qp;
  const { k, rows, mu } = factor;
  copyInto(x, x0);
  subtractRows(x, Y, n, rows, k, scale, mu);
  it.size = sizeOf(x, reachOf(it));
  multiplyRows(it.values, qp.G, m, n, qp.groupFrom, qp.groupTo, x);
}

/** A wrong-signed multiplier of less than this share of `force` is rounding about 0, and counts as 0. */
const SIGN = 1e-13;

/** Is the multiplier at place j wrong in sign, by no more than rounding? */
function isNought({ qp, factor, side, equal, force }: Iterate, j: number): boolean {
  const i = factor.rows[j];
  const wrong = -side[i] * factor.mu[j];
  return wrong > 0 && equal[i] === 0 && wrong * qp.scale[i] * qp.rowSize[i] <= SIGN * force;
}

/** Place of the multiplier that is most wrong in sign, beyond rounding, in scaled rows; −1 when none is. After `measure`. */
export function findWrongSign(it: Iterate): number {
  const { factor, side, equal } = it;
  let worst = -1;
  let most = 0;
  for (let j = 0; j < factor.k; j++) {
    const i = factor.rows[j];
    const wrong = -side[i] * factor.mu[j];
    if (wrong > most && equal[i] === 0 && !isNought(it, j)) {
      most = wrong;
      worst = j;
    }
  }
  return worst;
}

/**
 * Multipliers and the residuals of all optimality conditions at `x` and `values`, against H and G themselves.
 * @param fresh whether `values` are those of `x`; else they are computed.
 */
export function measure(it: Iterate, fresh: boolean): void {
  const { qp, factor, x, q, lower, upper, multipliers, gradient, values, residuals } = it;
  const { n, m, scale, softness, rowSize } = qp;
  const { k, rows, mu, place } = factor;
  for (let i = 0; i < m; i++) multipliers[i] = 0;
  let force = it.sizeQ;
  for (let j = 0; j < k; j++) force = Math.max(force, scale[rows[j]] * Math.abs(mu[j]) * rowSize[rows[j]]);
  it.force = force;
  multiplyRows(gradient, qp.H, n, n, qp.fullFrom, qp.fullTo, x);
  for (let i = 0; i < n; i++) gradient[i] += q[i];
  for (let j = 0; j < k; j++) {
    const i = rows[j];
    const lambda = isNought(it, j) ? 0 : scale[i] * mu[j];
    multipliers[i] = lambda;
    addRow(gradient, lambda, qp.G, i * n, qp.from[i], qp.to[i]);
  }
  const size = sizeOf(x, reachOf(it));
  it.size = size;
  const stationarity = largest(gradient);
  const terms = Math.max(qp.sizeH * size, force);

  if (!fresh) multiplyRows(values, qp.G, m, n, qp.groupFrom, qp.groupTo, x);
  let primal = 0;
  let dual = 0;
  let complementarity = 0;
  let unsolved = stationarity === 0 ? 0 : stationarity / terms;
  let relative = unsolved;
  let largestMultiplier = 0;
  for (let i = 0; i < m; i++) {
    const inside = place[i] < 0;
    const lambda = multipliers[i];
    const value = inside ? values[i] : values[i] - softness[i] * lambda;
    const over = value - upper[i];
    const under = lower[i] - value;
    const excess = Math.max(over, under);
    if (!(inside && excess <= 0)) {
      const bound = over > under ? upper[i] : lower[i];
      const rowTerms = Math.abs(bound) + rowSize[i] * size + softness[i] * Math.abs(lambda);
      const distance = inside ? excess : Math.abs(it.side[i] > 0 ? over : under);
      const violation = Math.max(excess, 0);
      if (!(violation <= primal)) primal = violation;
      if (lambda !== 0 && !(Math.abs(lambda) * distance <= complementarity)) {
        complementarity = Math.abs(lambda) * distance;
      }
      if (!inside && !(distance === 0) && !(distance / rowTerms <= unsolved)) unsolved = distance / rowTerms;
      const worst = lambda === 0 ? violation : Math.max(violation, distance);
      if (!(worst === 0) && !(worst / rowTerms <= relative)) relative = worst / rowTerms;
      if (Math.abs(lambda) > largestMultiplier) largestMultiplier = Math.abs(lambda);
      if (it.equal[i] === 0 && lambda * it.side[i] < 0 && Math.abs(lambda) > dual) dual = Math.abs(lambda);
    }
  }
  if (dual > 0 && !(dual / largestMultiplier <= relative)) relative = dual / largestMultiplier;
  residuals.stationarity = stationarity;
  residuals.primal = primal;
  residuals.dual = dual;
  residuals.complementarity = complementarity;
  residuals.relative = relative;
  it.unsolved = unsolved;
}

/**
 * Iterative refinement of point and multipliers on the working set against H and G themselves, after `measure`: with
 * residuals `r = H x + q + Gᵀ λ` and `p = G_W x − Σ λ − b`, solves `[H G_Wᵀ; G_W −Σ] (dx, dλ) = −(r, p)` by the factors
 * at hand, until nothing is above `goal` or a step no longer halves the worst.
 */
export function refine(it: Iterate, goal: number): void {
  const { qp, factor, x, lower, upper, multipliers, gradient, step, right, side } = it;
  const { n, scale, softness, Y } = qp;
  const { rows, mu } = factor;
  for (let pass = 0; pass < 5; pass++) {
    const before = it.unsolved;
    if (before <= goal) return;
    multiplyRows(step, qp.Hinv, n, n, qp.fullFrom, qp.fullTo, gradient);
    for (let i = 0; i < n; i++) x[i] -= step[i];
    for (let j = 0; j < factor.k; j++) {
      const i = rows[j];
      const from = qp.from[i];
      const value = dot(qp.G, i * n + from, x, from, qp.to[i] - from) - softness[i] * multipliers[i];
      right[j] = scale[i] * (value - (side[i] > 0 ? upper[i] : lower[i]));
    }
    factor.solveOther(right, right);
    for (let j = 0; j < factor.k; j++) {
      mu[j] += right[j];
      addRow(x, -scale[rows[j]] * right[j], Y, rows[j] * n, 0, n);
    }
    measure(it, false);
    if (!(it.unsolved <= 0.5 * before)) return;
  }
}

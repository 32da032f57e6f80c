import { findCertificate } from './certificate.ts';
import { findWrongSign, type Iterate, measure, refine, updatePrimal } from './iterate.ts';
import { dot } from './products.ts';
import type { QpResult, QpStatus } from './qp.ts';

/** A solve is called optimal when every condition holds to this, relative to the size of its own terms. */
export const ACCEPTED = 1e-10;
/** Residuals above this are refined before a solve ends. */
const POLISHED = 2e-13;
/** The fast route's answer is taken when it is as good as this, else the careful route has the last word. */
const GOOD = 5e-13;
/** A row counts as violated beyond this share of the size of its terms. */
const FEASIBLE = 3e-13;
/** Violated rows above this share of the worst join the working set together. */
const BLOCK_SHARE = 0.3;
/** Of the warm start's rows with wrong signs, those above this share of the worst leave together. */
const DROP_SHARE = 0.3;
/** Least pivot with which a row joins in a block. */
export const BLOCK_PIVOT = 1e-7;
/** Below this pivot a row counts as dependent on the working set until the certificate says otherwise. */
const DEPENDENT = 1e-9;
/** A dependent row violated by less than this share of its terms is consistent to within rounding. */
export const CONSISTENT = 1e-9;
/** A round that raises the dual objective by less than this share of it is a stall. */
const RAISE = 1e-14;
/** Rates of multipliers below this share of the largest are rounding. */
const LEAST_RATE = 1e-11;

/** `c = s (g x0 − bound)` of one row. */
export function rightSide({ qp, x0, lower, upper }: Iterate, row: number, side: number): number {
  const from = qp.from[row];
  const value = dot(qp.G, row * qp.n + from, x0, from, qp.to[row] - from);
  return qp.scale[row] * (value - (side > 0 ? upper[row] : lower[row]));
}

/**
 * Rounds of: the multipliers of the working set approach those of its own minimum, rows whose multiplier would change sign leave
 * on the way; then the most violated rows join. Every change raises the dual objective, so that no working set can come twice; one that
 * does not is rounding, and some of these are left to the careful route (`failed`).
 */
export function solveInBlocks(it: Iterate, limit: number, result: QpResult): QpStatus {
  const { factor } = it;
  let best = Number.NEGATIVE_INFINITY;
  let stalls = 0;
  it.heldObjective = Number.NEGATIVE_INFINITY;
  for (let round = 0; round < limit; round++) {
    result.iterations++;
    factor.solve();
    if (!approach(it)) continue;
    if (!(it.heldObjective > best + RAISE * Math.abs(best)) && ++stalls > 10) return 'failed';
    best = it.heldObjective;
    updatePrimal(it);
    const count = findViolated(it);
    if (count === 0) {
      measure(it, true);
      if (it.residuals.relative > POLISHED) {
        refine(it, POLISHED);
        if (findWrongSign(it) >= 0 || findViolated(it) > 0) return 'failed';
      }
      return it.residuals.relative <= GOOD ? 'optimal' : 'failed';
    }
    const worst = findWorst(it, count);
    if (joinBlock(it, count, worst)) continue;
    const outcome = joinOne(it, it.candidates[worst], it.gaps[worst]);
    if (outcome === 'infeasible') {
      return findCertificate(it, null, result.certificate) ? 'infeasible' : 'failed';
    }
    if (outcome === 'unsure') return 'failed';
    if (outcome === 'exempt') it.exempt[it.candidates[worst]] = 1;
  }
  return 'iteration-limit';
}

/**
 * Moves the held multipliers towards the solution `mu` of the working set as far as the dual objective allows; rows whose
 * multiplier would change sign stop at 0 and leave. True when `mu` itself is reached.
 */
function approach(it: Iterate): boolean {
  const { factor, side, equal, trial } = it;
  const { k, rows, mu, held } = factor;
  let wrong = 0;
  let unmoved = 0;
  let blocking = 1;
  for (let j = 0; j < k; j++) {
    const i = rows[j];
    if (side[i] * mu[j] >= 0 || equal[i] === 1) continue;
    wrong++;
    const from = Math.abs(held[j]);
    if (from === 0) unmoved++;
    else blocking = Math.min(blocking, from / (from + Math.abs(mu[j])));
  }
  const objective = factor.objective();
  if (wrong === 0) {
    for (let j = 0; j < k; j++) held[j] = mu[j];
    it.heldObjective = objective;
    return true;
  }
  if (it.heldObjective === Number.NEGATIVE_INFINITY) {
    leaveWhere(it, mu);
    return false;
  }
  for (let share = 1; share > 0.2; share *= 0.5) {
    clip(trial, it, share);
    const reached = objective - factor.shortfall(trial);
    if (reached > it.heldObjective) {
      for (let j = 0; j < k; j++) held[j] = trial[j];
      it.heldObjective = reached;
      leaveWhere(it, mu);
      return false;
    }
  }
  if (unmoved === 0) {
    // Up to the first row that stops, the way to the minimum of the working set only rises.
    clip(trial, it, blocking * (1 + 1e-15));
    it.heldObjective = objective - factor.shortfall(trial);
    for (let j = 0; j < k; j++) held[j] = trial[j];
    leaveWhere(it, mu);
  } else leaveUnmoved(it);
  return false;
}

/** `trial = held + share (mu − held)`, wrong signs set to 0. */
function clip(trial: Float64Array, { factor, side, equal }: Iterate, share: number): void {
  const { k, rows, mu, held } = factor;
  for (let j = 0; j < k; j++) {
    const value = held[j] + share * (mu[j] - held[j]);
    trial[j] = equal[rows[j]] === 0 && side[rows[j]] * value < 0 ? 0 : value;
  }
}

/** Rows leave that are held at 0 and whose multiplier goes the wrong way. */
function leaveWhere(it: Iterate, mu: Float64Array): void {
  const { factor, side, equal, leave } = it;
  const { k, rows, held } = factor;
  const start = it.heldObjective === Number.NEGATIVE_INFINITY;
  let worst = 0;
  for (let j = 0; j < k; j++) if (equal[rows[j]] === 0) worst = Math.max(worst, -side[rows[j]] * mu[j]);
  const least = start ? -DROP_SHARE * worst : 0;
  for (let j = 0; j < k; j++) {
    const i = rows[j];
    leave[j] =
      equal[i] === 0 && side[i] * mu[j] < 0 && side[i] * mu[j] <= least && (start || held[j] === 0) ? 1 : 0;
    if (leave[j] === 1) side[i] = 0;
  }
  factor.removeMarked(leave);
}

/**
 * Rows of the last block leave that have no multiplier yet and that the others push the wrong way; when these do so to the worst row
 * alone, all but the worst leave: alone it rises.
 */
function leaveUnmoved(it: Iterate): void {
  const { factor, side, equal, leave } = it;
  const { k, rows, mu, held } = factor;
  let count = 0;
  for (let j = 0; j < k; j++) {
    const i = rows[j];
    leave[j] = equal[i] === 0 && held[j] === 0 && side[i] * mu[j] < 0 && i !== it.entering ? 1 : 0;
    count += leave[j];
  }
  if (count === 0) {
    for (let j = 0; j < k; j++) {
      leave[j] = equal[rows[j]] === 0 && held[j] === 0 && rows[j] !== it.entering ? 1 : 0;
      count += leave[j];
    }
  }
  if (count === 0) {
    // Alone, and still pushed the wrong way: its violation is rounding, which the end of the solve judges.
    it.exempt[it.entering] = 1;
    leave[factor.place[it.entering]] = 1;
  }
  for (let j = 0; j < k; j++) if (leave[j] === 1) side[rows[j]] = 0;
  factor.removeMarked(leave);
}

/** Lists the rows outside the working set that are violated beyond rounding, with their signed, scaled excess. */
export function findViolated(it: Iterate): number {
  const { qp, factor, lower, upper, values, exempt, candidates, gaps, size } = it;
  const { m, scale, rowSize } = qp;
  const { place } = factor;
  let count = 0;
  for (let i = 0; i < m; i++) {
    const over = values[i] - upper[i];
    const under = lower[i] - values[i];
    const excess = Math.max(over, under);
    if (!(excess > 0) || place[i] >= 0 || exempt[i] === 1 || scale[i] === 0) continue;
    const bound = over > under ? upper[i] : lower[i];
    if (excess <= FEASIBLE * (Math.abs(bound) + rowSize[i] * size)) continue;
    candidates[count] = i;
    gaps[count] = (over > under ? excess : -excess) * scale[i];
    count++;
  }
  return count;
}

export function findWorst({ gaps }: Iterate, count: number): number {
  let worst = 0;
  for (let c = 1; c < count; c++) if (Math.abs(gaps[c]) > Math.abs(gaps[worst])) worst = c;
  return worst;
}

/** Adds the worst row and all that are nearly as bad; false, with nothing changed, when the worst one is dependent. */
function joinBlock(it: Iterate, count: number, worst: number): boolean {
  const { factor, candidates, gaps, side } = it;
  const least = BLOCK_SHARE * Math.abs(gaps[worst]);
  if (!joinPlain(it, candidates[worst], gaps[worst])) return false;
  it.entering = candidates[worst];
  for (let c = 0; c < count && !factor.full; c++) {
    if (c !== worst && Math.abs(gaps[c]) >= least) joinPlain(it, candidates[c], gaps[c]);
  }
  return side.length > 0;
}

function joinPlain(it: Iterate, row: number, gap: number): boolean {
  const sign = gap > 0 ? 1 : -1;
  if (!(it.factor.append(row, rightSide(it, row, sign), BLOCK_PIVOT) >= BLOCK_PIVOT)) return false;
  it.side[row] = sign;
  return true;
}

/** `unsure`: rounding decides, the careful route is needed. */
type Joined = 'joined' | 'exempt' | 'infeasible' | 'unsure';

/**
 * Goldfarb and Idnani's step: the multiplier of `row` grows until the row holds; rows whose multiplier reaches zero on the
 * way leave. From `factor.mu` with right signs. A row that the working set spans and that nothing
 * can make room for proves infeasibility; its direction is left in `it.direction`.
 */
function joinOne(it: Iterate, row: number, gapSigned: number): Joined {
  const { qp, factor, side, equal, direction } = it;
  const sign = gapSigned > 0 ? 1 : -1;
  const { mu } = factor;
  let gap = Math.abs(gapSigned);
  it.heldObjective = Number.NEGATIVE_INFINITY;
  for (;;) {
    const pivot = factor.project(direction, row);
    let most = 1;
    for (let j = 0; j < factor.k; j++) most = Math.max(most, Math.abs(direction[j]));
    let partial = Number.POSITIVE_INFINITY;
    let blocking = -1;
    for (let j = 0; j < factor.k; j++) {
      const i = factor.rows[j];
      const rate = side[i] * sign * direction[j];
      if (equal[i] === 1 || !(rate > LEAST_RATE * most)) continue;
      const step = Math.max(0, side[i] * mu[j]) / rate;
      if (step < partial || (step === partial && i < factor.rows[blocking])) {
        partial = step;
        blocking = j;
      }
    }
    const full = pivot > DEPENDENT && !factor.full ? gap / pivot : Number.POSITIVE_INFINITY;
    if (blocking < 0 && full === Number.POSITIVE_INFINITY) {
      it.entering = row;
      it.enteringSide = sign;
      const bound = sign > 0 ? it.upper[row] : it.lower[row];
      const terms = Math.abs(bound) + qp.rowSize[row] * it.size;
      return gap <= CONSISTENT * terms * qp.scale[row] ? 'exempt' : 'infeasible';
    }
    const step = Math.min(full, partial);
    for (let j = 0; j < factor.k; j++) mu[j] -= sign * step * direction[j];
    gap -= step * pivot;
    if (full <= partial) {
      side[row] = sign;
      if (!(factor.append(row, rightSide(it, row, sign), 0) > 0)) {
        side[row] = 0;
        return 'exempt';
      }
      return 'joined';
    }
    if (!(gap > 0)) return 'unsure';
    side[factor.rows[blocking]] = 0;
    for (let j = blocking; j + 1 < factor.k; j++) mu[j] = mu[j + 1];
    factor.removeAt(blocking);
  }
}

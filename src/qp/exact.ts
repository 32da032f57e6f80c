import { findCertificate } from './certificate.ts';
import { createIterate, type Iterate, measure, refine, updatePrimal } from './iterate.ts';
import { prepareQp } from './prepare.ts';
import { allFinite, dot, multiplyRows } from './products.ts';
import type { QpResult, QpSolver, QpStatus, QpStructure } from './qp.ts';
import { WorkingFactor } from './workingFactor.ts';

/** Settings of the exact solver. */
export interface ExactSettings {
  /** Rounds of the working set after which a solve gives up; by default 10 (m + n) + 100. */
  readonly iterationLimit?: number;
}

/** A solve is called optimal when every condition holds to this, relative to the size of its own terms. */
const ACCEPTED = 1e-10;
/** Residuals above this are refined before a solve ends. */
const POLISHED = 2e-13;
/** A row counts as violated beyond this share of the size of its terms. */
const FEASIBLE = 1e-13;
/** Violated rows above this share of the worst join the working set together. */
const BLOCK_SHARE = 0.1;
/** Least pivot with which a row joins in a block. */
const BLOCK_PIVOT = 1e-7;
/** Below this pivot a row counts as dependent on the working set until the certificate says otherwise. */
const DEPENDENT = 1e-9;
/** A dependent row violated by less than this share of its terms is consistent to within rounding. */
const CONSISTENT = 1e-9;
/** Rates of multipliers below this share of the largest are rounding. */
const LEAST_RATE = 1e-11;

/**
 * A solver that ends at the optimum itself: dual active set (D. Goldfarb, A. Idnani, "A numerically stable dual method for
 * solving strictly convex quadratic programs", Math. Prog. 27:1–33, 1983), on the dual matrix with an LDLᵀ factor of
 * the working set (D. Arnström, A. Bemporad, D. Axehill, "A dual active-set solver for embedded quadratic
 * programming using recursive LDLᵀ updates", IEEE TAC 67:4362–4369, 2022), with rows added in blocks.
 *
 * @throws UnusableQpError when the structure is not strictly convex or its shapes disagree.
 */
export function createExactSolver(structure: QpStructure, settings: ExactSettings = {}): QpSolver {
  const qp = prepareQp(structure);
  const { n, m } = qp;
  const softRows = qp.softness.reduce((count, value) => count + (value > 0 ? 1 : 0), 0);
  const factor = new WorkingFactor(qp.Q, m, Math.min(m, n + softRows));
  const it = createIterate(qp, factor);
  const limit = settings.iterationLimit ?? 10 * (m + n) + 100;
  const start = new Int8Array(m);
  let startGiven = false;
  const result: QpResult = {
    status: 'failed',
    x: it.x,
    multipliers: it.multipliers,
    residuals: it.residuals,
    iterations: 0,
    workingSet: it.side,
    certificate: new Float64Array(m),
  };

  const solve = (q: Float64Array, lower: Float64Array, upper: Float64Array): QpResult => {
    if (startGiven) takeStart(it, start);
    startGiven = false;
    result.iterations = 0;
    let status = begin(it, q, lower, upper);
    if (status === null) {
      status = run(it, false, limit, result);
      if (status !== 'optimal' && status !== 'infeasible') {
        factor.clear();
        it.side.fill(0);
        begin(it, q, lower, upper);
        status = run(it, true, limit, result);
      }
    }
    if (status === 'failed') factor.clear();
    finish(it, status);
    result.status = status;
    return result;
  };

  return {
    n,
    m,
    condition: qp.condition,
    solve,
    setWorkingSet(workingSet) {
      start.set(workingSet);
      startGiven = true;
    },
  };
}

/** Brings the working set to `start` with as few changes of the factor as that takes. */
function takeStart({ factor, side, leave }: Iterate, start: Int8Array): void {
  for (let j = 0; j < factor.k; j++) leave[j] = start[factor.rows[j]] === 0 ? 1 : 0;
  factor.removeMarked(leave);
  for (let i = 0; i < side.length; i++) {
    side[i] = start[i];
    if (start[i] !== 0 && factor.place[i] < 0) {
      if (!(factor.append(i, 0, BLOCK_PIVOT) >= BLOCK_PIVOT)) side[i] = 0;
    }
  }
}

/** Reads the data of a solve; a status when they settle it. */
function begin(it: Iterate, q: Float64Array, lower: Float64Array, upper: Float64Array): QpStatus | null {
  const { qp, factor, side, equal, exempt, leave } = it;
  const { n, m } = qp;
  it.q = q;
  it.lower = lower;
  it.upper = upper;
  let crossed = false;
  for (let i = 0; i < m; i++) {
    const low = lower[i];
    const high = upper[i];
    if (!(low <= high)) {
      if (Number.isNaN(low) || Number.isNaN(high)) return 'failed';
      crossed = true;
    }
    if (low === Number.POSITIVE_INFINITY || high === Number.NEGATIVE_INFINITY) return 'failed';
    equal[i] = low === high ? 1 : 0;
    exempt[i] = 0;
  }
  multiplyRows(it.x0, qp.Hinv, n, n, qp.fullFrom, qp.fullTo, q);
  for (let i = 0; i < n; i++) it.x0[i] = -it.x0[i];
  if (!allFinite(it.x0)) return 'failed';
  it.x.set(it.x0);
  if (crossed) return 'infeasible';
  for (let i = 0; i < m; i++) {
    if (qp.scale[i] === 0 && !(lower[i] <= 0 && upper[i] >= 0)) return 'infeasible';
  }

  let dropped = 0;
  for (let j = 0; j < factor.k; j++) {
    const i = factor.rows[j];
    leave[j] = Number.isFinite(side[i] > 0 ? upper[i] : lower[i]) ? 0 : 1;
    if (leave[j] === 1) {
      side[i] = 0;
      dropped++;
    }
  }
  if (dropped > 0) factor.removeMarked(leave);
  for (let i = 0; i < m; i++) {
    if (equal[i] === 1 && factor.place[i] < 0 && qp.scale[i] > 0) {
      if (factor.append(i, 0, BLOCK_PIVOT) >= BLOCK_PIVOT) side[i] = 1;
    }
  }
  for (let j = 0; j < factor.k; j++) {
    const i = factor.rows[j];
    factor.c[j] = rightSide(it, i, side[i]);
  }
  factor.forward(0);
  return null;
}

/** `c = s (g x0 − bound)` of one row. */
function rightSide({ qp, x0, lower, upper }: Iterate, row: number, side: number): number {
  const from = qp.from[row];
  const value = dot(qp.G, row * qp.n + from, x0, from, qp.to[row] - from);
  return qp.scale[row] * (value - (side > 0 ? upper[row] : lower[row]));
}

/**
 * Rounds of: multipliers on the working set; rows with a wrong sign leave; the most violated rows join. Every round that keeps
 * all signs right must raise the dual objective; once a block of rows fails to, rows join one by one with step lengths,
 * which raises it always, so that no working set can come twice.
 *
 * @param careful multipliers and point are refined in every round, and rows join one by one.
 */
function run(it: Iterate, careful: boolean, limit: number, result: QpResult): QpStatus {
  const { qp, factor } = it;
  let single = careful;
  let best = Number.NEGATIVE_INFINITY;
  let stalls = 0;
  let refined = careful;
  for (let round = 0; round < limit; round++) {
    result.iterations++;
    factor.solve();
    if (refined) {
      updatePrimal(it);
      measure(it);
      refine(it, POLISHED);
    }
    if (dropWrongSigns(it)) continue;
    const objective = factor.objective();
    if (!(objective > best)) {
      if (single && ++stalls > 2 * qp.m + 10) return 'failed';
      single = true;
    }
    best = Math.max(best, objective);
    if (!refined) {
      updatePrimal(it);
      multiplyRows(it.values, qp.G, qp.m, qp.n, qp.groupFrom, qp.groupTo, it.x);
    }
    const count = findViolated(it);
    if (count === 0) {
      if (!refined) {
        measure(it);
        if (it.residuals.relative > POLISHED) {
          refine(it, POLISHED);
          if (hasWrongSign(it) || findViolated(it) > 0) {
            refined = true;
            continue;
          }
        }
      }
      return it.residuals.relative <= ACCEPTED ? 'optimal' : 'failed';
    }
    const bland = stalls > qp.m;
    const worst = bland ? 0 : findWorst(it, count);
    if (!single && joinBlock(it, count, worst)) continue;
    const outcome = joinOne(it, it.candidates[worst], it.gaps[worst]);
    if (outcome === 'infeasible') {
      if (findCertificate(it, result.certificate)) return 'infeasible';
      return 'failed';
    }
    if (outcome === 'exempt') it.exempt[it.candidates[worst]] = 1;
  }
  return 'iteration-limit';
}

/** Takes all rows with a wrong-signed multiplier out of the working set. */
function dropWrongSigns({ factor, side, equal, leave }: Iterate): boolean {
  const { k, rows, mu } = factor;
  let count = 0;
  for (let j = 0; j < k; j++) {
    const i = rows[j];
    leave[j] = 0;
    if (equal[i] === 0 && side[i] * mu[j] < 0) {
      leave[j] = 1;
      side[i] = 0;
      count++;
    }
  }
  if (count > 0) factor.removeMarked(leave);
  return count > 0;
}

function hasWrongSign({ factor, side, equal }: Iterate): boolean {
  for (let j = 0; j < factor.k; j++) {
    const i = factor.rows[j];
    if (equal[i] === 0 && side[i] * factor.mu[j] < 0) return true;
  }
  return false;
}

/** Lists the rows outside the working set that are violated beyond rounding, with their signed, scaled excess. */
function findViolated(it: Iterate): number {
  const { qp, factor, lower, upper, values, exempt, candidates, gaps, x } = it;
  const { m, scale, rowSize } = qp;
  const { place } = factor;
  let size = -1;
  let count = 0;
  for (let i = 0; i < m; i++) {
    const over = values[i] - upper[i];
    const under = lower[i] - values[i];
    const excess = Math.max(over, under);
    if (!(excess > 0) || place[i] >= 0 || exempt[i] === 1 || scale[i] === 0) continue;
    if (size < 0) {
      size = 0;
      for (let j = 0; j < x.length; j++) size = Math.max(size, Math.abs(x[j]));
    }
    const bound = over > under ? upper[i] : lower[i];
    if (excess <= FEASIBLE * (Math.abs(bound) + rowSize[i] * size)) continue;
    candidates[count] = i;
    gaps[count] = (over > under ? excess : -excess) * scale[i];
    count++;
  }
  return count;
}

function findWorst({ gaps }: Iterate, count: number): number {
  let worst = 0;
  for (let c = 1; c < count; c++) if (Math.abs(gaps[c]) > Math.abs(gaps[worst])) worst = c;
  return worst;
}

/** Adds the worst row and all that are nearly as bad; false, with nothing changed, when the worst one is dependent. */
function joinBlock(it: Iterate, count: number, worst: number): boolean {
  const { factor, candidates, gaps, side } = it;
  const least = BLOCK_SHARE * Math.abs(gaps[worst]);
  if (!joinPlain(it, candidates[worst], gaps[worst])) return false;
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

type Joined = 'joined' | 'exempt' | 'infeasible';

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
    let full = pivot > DEPENDENT && !factor.full ? gap / pivot : Number.POSITIVE_INFINITY;
    if (blocking < 0 && full === Number.POSITIVE_INFINITY) {
      it.entering = row;
      it.enteringSide = sign;
      const bound = sign > 0 ? it.upper[row] : it.lower[row];
      const terms = Math.abs(bound) + qp.rowSize[row] * it.size;
      if (gap <= CONSISTENT * terms * qp.scale[row]) return 'exempt';
      if (!(pivot > 1e-15) || factor.full) return 'infeasible';
      if (findCertificate(it, it.scratchRows)) return 'infeasible';
      full = gap / pivot;
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
    side[factor.rows[blocking]] = 0;
    for (let j = blocking; j + 1 < factor.k; j++) mu[j] = mu[j + 1];
    factor.removeAt(blocking);
  }
}

/** Puts multipliers and residuals into the result for a solve that did not end at an optimum. */
function finish(it: Iterate, status: QpStatus): void {
  if (status === 'optimal') return;
  if (status === 'failed' && !allFinite(it.x)) it.x.fill(Number.NaN);
  measure(it);
}

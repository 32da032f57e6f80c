import { solveCarefully } from './careful.ts';
import { createIterate, type Iterate, measure, sizeOf } from './iterate.ts';
import { OrthogonalFactor } from './orthogonalFactor.ts';
import { prepareQp } from './prepare.ts';
import { allFinite, copyInto, largest, multiplyRows } from './products.ts';
import type { QpResult, QpSolver, QpStatus, QpStructure } from './qp.ts';
import { BLOCK_PIVOT, rightSide, solveInBlocks } from './rounds.ts';
import { WorkingFactor } from './workingFactor.ts';

/** Settings of the exact solver. */
export interface ExactSettings {
  /** Rounds of the working set after which a solve gives up; by default 10 (m + n) + 100. */
  readonly iterationLimit?: number;
}

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
  const orthogonal = new OrthogonalFactor(qp, factor);
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
      status = solveInBlocks(it, limit, result);
      if (status === 'failed' || (status === 'iteration-limit' && settings.iterationLimit === undefined)) {
        factor.clear();
        it.side.fill(0);
        status = solveCarefully(it, orthogonal, limit, result);
        factor.rebuild(0);
      }
    }
    if (status === 'failed') {
      factor.clear();
      it.side.fill(0);
    }
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
  copyInto(it.x, it.x0);
  it.sizeQ = largest(q);
  it.size = sizeOf(it.x, n > 0 ? it.sizeQ / qp.sizeH : 0);
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

/** Puts multipliers and residuals into the result for a solve that did not end at an optimum. */
function finish(it: Iterate, status: QpStatus): void {
  if (status === 'optimal') return;
  if (status === 'failed' && !allFinite(it.x)) it.x.fill(Number.NaN);
  measure(it, false);
}

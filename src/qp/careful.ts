import { findCertificate } from './certificate.ts';
import { findWrongSign, type Iterate, measure } from './iterate.ts';
import type { OrthogonalFactor } from './orthogonalFactor.ts';
import { dot, largest } from './products.ts';
import type { QpResult, QpStatus } from './qp.ts';
import { ACCEPTED, CONSISTENT, findViolated, findWorst } from './rounds.ts';

/** Refinement ends here, relative to the size of the terms. */
const ROUNDING = 2e-16;
/** A row is dependent when less than this, times the square root of the condition of H, is left of it. */
const DEPENDENT = 1e-14;
/**
 * When less than this is left of a row and no other can make room for it, infeasibility may be what is met; the certificate, checked by
 * its definition, tells.
 */
const SUSPECT = 1e-4;
/** Rates of multipliers below this share of the largest are rounding. */
const LEAST_RATE = 1e-12;
/** A round must raise the dual objective by more than this share of it, or it counts as a stall. */
const RAISE = 1e-13;

/**
 * The dual active set once more for the programs on which the fast route breaks down: from a cold start, one row at a time with
 * step lengths, orthogonal factors, and point and multipliers refined against H and G in every round.
 * `iterations` go on counting. Leaves the working set's factor to be rebuilt by the caller.
 */
export function solveCarefully(
  it: Iterate,
  orthogonal: OrthogonalFactor,
  limit: number,
  result: QpResult,
): QpStatus {
  const { qp, equal, exempt, side, x, x0 } = it;
  const least = Math.min(1e-3, DEPENDENT * Math.sqrt(qp.condition));
  x.set(x0);
  exempt.fill(0);
  for (let i = 0; i < qp.m; i++) {
    if (equal[i] === 1 && qp.scale[i] > 0 && orthogonal.append(i, least)) side[i] = 1;
  }
  let best = Number.NEGATIVE_INFINITY;
  let stalls = 0;
  for (let round = 0; round < limit; round++) {
    result.iterations++;
    settle(it, orthogonal);
    if (!(largest(x) < Number.POSITIVE_INFINITY)) return 'failed';
    const wrong = findWrongSign(it);
    if (wrong >= 0) {
      side[it.factor.rows[wrong]] = 0;
      orthogonal.removeAt(wrong);
      continue;
    }
    const objective = orthogonal.objective();
    if (!(objective > best * (1 + RAISE)) && ++stalls > 3 * qp.m + 30) return 'failed';
    best = Math.max(best, objective);
    const count = findViolated(it);
    if (count === 0) return it.residuals.relative <= ACCEPTED ? 'optimal' : 'failed';
    // Among stalls the smallest index goes first, so that no working set comes round again for ever.
    const worst = stalls > qp.m + 10 ? 0 : findWorst(it, count);
    const row = it.candidates[worst];
    const outcome = join(it, orthogonal, least, row, it.gaps[worst], result.certificate);
    if (outcome === 'exempt') exempt[row] = 1;
    if (outcome === 'infeasible') return 'infeasible';
  }
  return 'iteration-limit';
}

/** Point and multipliers on the working set, refined until rounding or until a pass no longer gains. */
function settle(it: Iterate, orthogonal: OrthogonalFactor): void {
  const { qp, factor, x, side, multipliers, right, step, gradient } = it;
  const { n, scale, softness } = qp;
  measure(it, false);
  for (let pass = 0; pass < 8; pass++) {
    const before = it.unsolved;
    if (before <= ROUNDING) return;
    for (let j = 0; j < n; j++) step[j] = dot(qp.Linv, j * n, gradient, 0, j + 1);
    for (let j = 0; j < factor.k; j++) {
      const i = factor.rows[j];
      const from = qp.from[i];
      const value = dot(qp.G, i * n + from, x, from, qp.to[i] - from) - softness[i] * multipliers[i];
      right[j] = scale[i] * (value - (side[i] > 0 ? it.upper[i] : it.lower[i]));
    }
    orthogonal.correct(step, right);
    for (let j = 0; j < factor.k; j++) factor.mu[j] += right[j];
    for (let j = 0; j < n; j++) {
      for (let i = 0; i <= j; i++) x[i] += qp.Linv[j * n + i] * step[j];
    }
    measure(it, false);
    if (pass > 0 && !(it.unsolved <= 0.5 * before)) return;
  }
}

type Joined = 'joined' | 'exempt' | 'infeasible';

/** Goldfarb and Idnani's step on orthogonal factors; as `joinOne` of the fast route. */
function join(
  it: Iterate,
  orthogonal: OrthogonalFactor,
  least: number,
  row: number,
  gapSigned: number,
  certificate: Float64Array,
): Joined {
  const { qp, factor, side, equal, direction } = it;
  const { mu, rows } = factor;
  const sign = gapSigned > 0 ? 1 : -1;
  const bound = sign > 0 ? it.upper[row] : it.lower[row];
  const terms = (Math.abs(bound) + qp.rowSize[row] * it.size) * qp.scale[row];
  let gap = Math.abs(gapSigned);
  for (;;) {
    const left = orthogonal.project(direction, row);
    const pivot = left * left;
    let most = 1;
    for (let j = 0; j < factor.k; j++) most = Math.max(most, Math.abs(direction[j]));
    let partial = Number.POSITIVE_INFINITY;
    let blocking = -1;
    for (let j = 0; j < factor.k; j++) {
      const i = rows[j];
      const rate = side[i] * sign * direction[j];
      if (equal[i] === 1 || !(rate > LEAST_RATE * most)) continue;
      const step = Math.max(0, side[i] * mu[j]) / rate;
      if (step < partial || (step === partial && i < rows[blocking])) {
        partial = step;
        blocking = j;
      }
    }
    let full = left > least ? gap / pivot : Number.POSITIVE_INFINITY;
    if (blocking < 0 && left < SUSPECT) {
      if (gap <= CONSISTENT * terms && full === Number.POSITIVE_INFINITY) return 'exempt';
      it.entering = row;
      it.enteringSide = sign;
      if (findCertificate(it, orthogonal, certificate)) return 'infeasible';
      // Neither dependent to rounding nor proved infeasible: taken at its word, the residuals judge in the end.
      full = gap / pivot;
    }
    const step = Math.min(full, partial);
    for (let j = 0; j < factor.k; j++) mu[j] -= sign * step * direction[j];
    gap -= step * pivot;
    if (full <= partial) {
      if (!orthogonal.append(row, 0)) return 'exempt';
      side[row] = sign;
      mu[factor.k - 1] = 0;
      return 'joined';
    }
    side[rows[blocking]] = 0;
    orthogonal.removeAt(blocking);
    if (!(gap > 0)) return 'joined';
  }
}

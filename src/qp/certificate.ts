import type { Iterate } from './iterate.ts';
import type { OrthogonalFactor } from './orthogonalFactor.ts';
import { addRow, dot } from './products.ts';

/** Corrections of `v` towards `Gᵀ v = 0`. */
const PASSES = 4;
/** The proof must exceed the rounding of its own terms by this share of them. */
const LEAST_MARGIN = 1e-11;
/** What is left of `Gᵀ v`, relative to its terms. */
const CLOSED = 1e-10;
/** The proof holds for all points up to this many times the size of the present one and of the bounds. */
const REACH = 1e3;

/**
 * Turns the direction in which `joinOne` could go on for ever into `v` with `Gᵀ v = 0` and `Σ (v⁺ upper − v⁻ lower) < 0`, and
 * checks it with G and the bounds themselves: what is left of `Gᵀ v` could be made up for only by points more than a
 * thousand times larger than the present one and the bounds. False, when that does not hold: then nothing is proved.
 *
 * @param orthogonal the factor to refine with; null: the working set's own. @param v m entries, overwritten.
 */
export function findCertificate(it: Iterate, orthogonal: OrthogonalFactor | null, v: Float64Array): boolean {
  const { qp, factor, direction, enteringSide, lower, upper, step, right } = it;
  const { n, scale } = qp;
  v.fill(0);
  v[it.entering] = enteringSide * scale[it.entering];
  for (let j = 0; j < factor.k; j++) {
    const i = factor.rows[j];
    v[i] = -enteringSide * scale[i] * direction[j];
  }
  let left = combine(step, it, v);
  for (let pass = 0; pass < PASSES && left > 0; pass++) {
    if (orthogonal) {
      for (let j = n - 1; j >= 0; j--) step[j] = dot(qp.Linv, j * n, step, 0, j + 1);
      right.fill(0);
      orthogonal.correct(step, right);
    } else {
      for (let j = 0; j < factor.k; j++) {
        const i = factor.rows[j];
        right[j] = -scale[i] * dot(qp.Y, i * n, step, 0, n);
      }
      factor.solveOther(right, right);
    }
    for (let j = 0; j < factor.k; j++) v[factor.rows[j]] += scale[factor.rows[j]] * right[j];
    left = combine(step, it, v);
  }
  let margin = 0;
  let terms = 0;
  let reach = it.size;
  let pull = 0;
  for (let i = 0; i < v.length; i++) {
    if (v[i] === 0) continue;
    const bound = v[i] > 0 ? upper[i] : lower[i];
    margin -= v[i] * bound;
    terms += Math.abs(v[i] * bound);
    if (qp.rowSize[i] > 0) reach = Math.max(reach, Math.abs(bound) / qp.rowSize[i]);
    pull = Math.max(pull, Math.abs(v[i]) * qp.rowSize[i]);
  }
  return left <= CLOSED * pull && margin > LEAST_MARGIN * terms && margin > REACH * left * reach;
}

/** `out = Gᵀ v` over the rows that can prove anything: a soft row gives way, an open side bounds nothing; they go from v. Returns ‖out‖₁. */
function combine(out: Float64Array, { qp, lower, upper }: Iterate, v: Float64Array): number {
  out.fill(0);
  for (let i = 0; i < v.length; i++) {
    if (v[i] === 0) continue;
    if (qp.softness[i] > 0 || !Number.isFinite(v[i] > 0 ? upper[i] : lower[i])) v[i] = 0;
    else addRow(out, v[i], qp.G, i * qp.n, qp.from[i], qp.to[i]);
  }
  let size = 0;
  for (let j = 0; j < out.length; j++) size += Math.abs(out[j]);
  return size;
}

import { fromRows, type Matrix } from '../../src/numerics/matrix.ts';
import type { QpStructure } from '../../src/qp/qp.ts';

/** A quadratic program as the tests write it: `½ xᵀHx + qᵀx`, `lower ≤ G x + e ≤ upper`, soft rows as in `QpStructure`. */
export interface Program {
  readonly H: readonly (readonly number[])[];
  readonly q: readonly number[];
  readonly G: readonly (readonly number[])[];
  readonly lower: readonly number[];
  readonly upper: readonly number[];
  readonly softness?: readonly number[];
}

export function structureOf({ H, G, softness }: Program): QpStructure {
  const n = H.length;
  const rows: Matrix = G.length > 0 ? fromRows(G) : { rows: 0, cols: n, data: new Float64Array(0) };
  return { H: fromRows(H), G: rows, softness: Float64Array.from(softness ?? G.map(() => 0)) };
}

export const dataOf = ({ q, lower, upper }: Program) =>
  [Float64Array.from(q), Float64Array.from(lower), Float64Array.from(upper)] as const;

/**
 * The optimality conditions of `½ xᵀHx + qᵀx + ½ Σ e²/softness`, `lower ≤ G x + e ≤ upper`, e = −softness λ, from their definition:
 * the worst of stationarity, violation, wrong-signed multiplier and complementarity, each divided by the size of its own terms:
 * the stationarity by its largest sum of absolute values; row i by |bound| + max|Gᵢ| max|x| + |e|, where
 * max|x| counts for no less than a thousandth of max|q| / max|H| and of |bound| / max|Gᵢ| of rows with a multiplier, so that 0 need not
 * be met to digits of a rounding error; multipliers by the largest.
 */
export function judge(program: Program, x: ArrayLike<number>, lambda: ArrayLike<number>): number {
  const { H, q, G, lower, upper } = program;
  let stationarity = 0;
  let force = 0;
  for (let j = 0; j < q.length; j++) {
    let sum = q[j];
    let terms = Math.abs(q[j]);
    for (let i = 0; i < q.length; i++) {
      sum += H[j][i] * x[i];
      terms += Math.abs(H[j][i] * x[i]);
    }
    for (let i = 0; i < G.length; i++) {
      sum += G[i][j] * lambda[i];
      terms += Math.abs(G[i][j] * lambda[i]);
    }
    stationarity = worse(stationarity, Math.abs(sum));
    force = worse(force, terms);
  }
  let worst = stationarity === 0 ? 0 : stationarity / force;
  let largest = 0;
  const most = (row: readonly number[]) => Math.max(0, ...row.map(Math.abs));
  let size = (1e-3 * most(q)) / most(H.flat());
  for (let i = 0; i < G.length; i++) {
    const bound = lambda[i] > 0 ? upper[i] : lower[i];
    if (lambda[i] !== 0 && most(G[i]) > 0 && Number.isFinite(bound))
      size = worse(size, (1e-3 * Math.abs(bound)) / most(G[i]));
  }
  for (let j = 0; j < q.length; j++) size = worse(size, Math.abs(x[j]));
  for (let i = 0; i < G.length; i++) largest = worse(largest, Math.abs(lambda[i]));
  for (let i = 0; i < G.length; i++) {
    let value = -(program.softness?.[i] ?? 0) * lambda[i];
    const terms = Math.abs(value) + Math.max(...G[i].map(Math.abs)) * size;
    for (let j = 0; j < q.length; j++) value += G[i][j] * x[j];
    for (const [bound, sign] of [
      [upper[i], 1],
      [lower[i], -1],
    ] as const) {
      const beyond = sign * (value - bound);
      if (beyond > 0) worst = worse(worst, beyond / (terms + Math.abs(bound)));
    }
    if (lambda[i] !== 0) {
      const bound = lambda[i] > 0 ? upper[i] : lower[i];
      if (Number.isFinite(bound)) {
        if (value !== bound) worst = worse(worst, Math.abs(value - bound) / (terms + Math.abs(bound)));
      } else worst = worse(worst, Math.abs(lambda[i]) / largest);
    }
  }
  return worst;
}

/** The larger; NaN when one is NaN. */
function worse(a: number, b: number): number {
  return Math.max(a, b);
}

/** Cost without its constant, soft rows paid for. */
export function costOf({ H, q, softness }: Program, x: ArrayLike<number>, lambda: ArrayLike<number>): number {
  let cost = 0;
  for (let i = 0; i < q.length; i++) {
    cost += q[i] * x[i];
    for (let j = 0; j < q.length; j++) cost += 0.5 * H[i][j] * x[i] * x[j];
  }
  for (let i = 0; i < (softness?.length ?? 0); i++) cost += 0.5 * softness![i] * lambda[i] ** 2;
  return cost;
}

/** Does `v` prove that no point satisfies the rows: `Gᵀv = 0` to rounding, `Σ (v⁺ upper − v⁻ lower) < 0`, no soft row used? */
export function proves({ G, lower, upper, softness, q }: Program, v: ArrayLike<number>): boolean {
  let margin = 0;
  for (let i = 0; i < G.length; i++) {
    if (v[i] === 0) continue;
    if ((softness?.[i] ?? 0) > 0) return false;
    margin -= v[i] * (v[i] > 0 ? upper[i] : lower[i]);
  }
  if (!(margin > 0)) return false;
  let left = 0;
  let terms = 0;
  for (let j = 0; j < q.length; j++) {
    let sum = 0;
    for (let i = 0; i < G.length; i++) {
      sum += G[i][j] * v[i];
      terms = worse(terms, Math.abs(G[i][j] * v[i]));
    }
    left = worse(left, Math.abs(sum));
  }
  return left <= 1e-12 * terms;
}

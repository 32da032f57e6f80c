import { decomposeSymmetric } from '../numerics/eigen.ts';
import { createKernels } from '../numerics/kernels/wasm.ts';
import { NotConvexError } from './notConvex.ts';
import type { QpResult, QpSolver, QpStructure } from './qp.ts';
import { createResidualCheck } from './residuals.ts';

/** A row is violated when it is by more than this, relative to the size of its own terms. */
const FEASIBLE = 1e-12;
/** A row whose pivot falls below this share of its own diagonal depends on the working set. */
const DEPENDENT = 1e-11;

/**
 * Dual active-set method for strictly convex QPs. Source: D. Goldfarb, A. Idnani, Math. Prog. 27:1–33, 1983; warm start and
 * dual form after D. Arnström, A. Bemporad, D. Axehill, IEEE Trans. AC 67:4362–4369, 2022.
 */
export function createExactSolver(structure: QpStructure): QpSolver {
  const { H, G, softness } = structure;
  const n = H.rows;
  const m = G.rows;
  const k = createKernels(2 * m * m + 2 * n * n + 2 * m * n + 24 * (m + n) + 4096);
  const L = k.allocate(n * n);
  L.set(H.data);
  if (k.factorCholesky(L, n) < n) {
    throw new NotConvexError(decomposeSymmetric(H).values[0]);
  }
  const { values } = decomposeSymmetric(H);
  const Gm = k.allocate(m * n);
  Gm.set(G.data);
  // T = L⁻¹ Gᵀ, then D = Tᵀ T + diag(softness): the dual Hessian.
  const T = k.allocate(n * m);
  for (let i = 0; i < m; i++) for (let j = 0; j < n; j++) T[j * m + i] = G.data[i * n + j];
  k.solveLowerMany(L, n, T, m);
  const Tt = k.allocate(m * n);
  for (let i = 0; i < m; i++) for (let j = 0; j < n; j++) Tt[i * n + j] = T[j * m + i];
  const D = k.allocate(m * m);
  k.multiplyTransposedAdd(D, Tt, Tt, m, n, m);
  for (let i = 0; i < m; i++) D[i * m + i] += softness[i];
  const scale = Float64Array.from({ length: m }, (_, i) => 1 / Math.sqrt(D[i * m + i] || 1));

  const most = Math.min(m, n + softness.reduce((count, s) => count + (s > 0 ? 1 : 0), 0));
  const ld = most + 1;
  const W = new Int32Array(most + 1);
  const R = k.allocate((most + 1) * ld);
  const y = k.allocate(most + 1);
  const r = k.allocate(most + 1);
  const lambda = k.allocate(most + 1);
  const work = k.allocate(n);
  const x0 = k.allocate(n);
  const x = k.allocate(n);
  const free = k.allocate(m);
  const value = k.allocate(m);
  const start = new Int8Array(m);
  const result: QpResult = {
    status: 'failed',
    x,
    multipliers: k.allocate(m),
    residuals: { stationarity: 0, primal: 0, dual: 0, complementarity: 0, relative: 0 },
    iterations: 0,
    workingSet: new Int8Array(m),
    certificate: new Float64Array(m),
  };
  const side = result.workingSet;
  const check = createResidualCheck(structure);
  let size = 0;

  const solveH = (v: Float64Array) => {
    k.solveLower(L, n, n, v);
    k.solveLowerTransposed(L, n, n, v);
  };

  /** y = R⁻¹ D[W, p]; returns the pivot left of D[p, p]. */
  const project = (p: number): number => {
    let pivot = D[p * m + p];
    for (let a = 0; a < size; a++) y[a] = D[W[a] * m + p];
    k.solveLower(R, ld, size, y);
    for (let a = 0; a < size; a++) pivot -= y[a] * y[a];
    return pivot;
  };

  const append = (p: number, s: number, pivot: number) => {
    R.set(y.subarray(0, size), size * ld);
    R[size * ld + size] = Math.sqrt(pivot);
    W[size] = p;
    side[p] = s;
    size++;
  };

  /** Takes the row at position `at` out of the working set; Givens rotations restore the triangle. */
  const remove = (at: number) => {
    side[W[at]] = 0;
    for (let a = at; a < size - 1; a++) {
      W[a] = W[a + 1];
      lambda[a] = lambda[a + 1];
      R.copyWithin(a * ld, (a + 1) * ld, (a + 1) * ld + a + 2);
      const [u, v] = [R[a * ld + a], R[a * ld + a + 1]];
      const h = Math.hypot(u, v);
      const [c, s] = [u / h, v / h];
      R[a * ld + a] = h;
      R[a * ld + a + 1] = 0;
      for (let b = a + 1; b < size - 1; b++) {
        const row = (b + 1) * ld;
        const [p, q] = [R[row + a], R[row + a + 1]];
        R[row + a] = c * p + s * q;
        R[row + a + 1] = c * q - s * p;
      }
    }
    size--;
  };

  const bound = (p: number, lower: Float64Array, upper: Float64Array) => (side[p] > 0 ? upper[p] : lower[p]);

  /** Multipliers of the working set from scratch: `D_WW λ = v_W − b_W`, refined once against the residual. */
  const solveMultipliers = (lower: Float64Array, upper: Float64Array) => {
    for (let a = 0; a < size; a++) lambda[a] = free[W[a]] - bound(W[a], lower, upper);
    k.solveLower(R, ld, size, lambda);
    k.solveLowerTransposed(R, ld, size, lambda);
    for (let round = 0; round < 2; round++) {
      for (let a = 0; a < size; a++) {
        let sum = free[W[a]] - bound(W[a], lower, upper);
        for (let b = 0; b < size; b++) sum -= D[W[a] * m + W[b]] * lambda[b];
        r[a] = sum;
      }
      k.solveLower(R, ld, size, r);
      k.solveLowerTransposed(R, ld, size, r);
      for (let a = 0; a < size; a++) lambda[a] += r[a];
    }
  };

  const isEquality = (p: number, lower: Float64Array, upper: Float64Array) => lower[p] === upper[p];

  /** Row values `G x + e` (slack left out of hard rows): `free − D λ`. */
  const updateValues = () => {
    value.set(free);
    for (let a = 0; a < size; a++) {
      // D is symmetric: a row serves as the column.
      const row = W[a] * m;
      const l = lambda[a];
      for (let i = 0; i < m; i++) value[i] -= l * D[row + i];
    }
  };

  /** Position in the working set of a multiplier of the wrong sign, worst first; −1 if there is none. */
  const worstSign = (lower: Float64Array, upper: Float64Array): number => {
    let worst = -1;
    let least = 0;
    for (let a = 0; a < size; a++) {
      if (isEquality(W[a], lower, upper)) continue;
      const signed = side[W[a]] * lambda[a];
      if (signed < least) {
        least = signed;
        worst = a;
      }
    }
    return worst;
  };

  const finish = (
    status: QpResult['status'],
    q: Float64Array,
    lower: Float64Array,
    upper: Float64Array,
  ): QpResult => {
    result.status = status;
    result.multipliers.fill(0);
    for (let a = 0; a < size; a++) result.multipliers[W[a]] = lambda[a];
    k.applyTransposed(work, Gm, result.multipliers, m, n);
    for (let j = 0; j < n; j++) x[j] = -q[j] - work[j];
    solveH(x);
    check(result, q, lower, upper);
    return result;
  };

  const solve = (q: Float64Array, lower: Float64Array, upper: Float64Array): QpResult => {
    result.iterations = 0;
    result.certificate.fill(0);
    start.set(side);
    side.fill(0);
    size = 0;
    for (let j = 0; j < n; j++) x0[j] = -q[j];
    solveH(x0);
    k.apply(free, Gm, x0, m, n);
    let fine = true;
    for (let i = 0; i < m; i++)
      fine = fine && !Number.isNaN(free[i]) && !Number.isNaN(lower[i]) && !Number.isNaN(upper[i]);
    for (let j = 0; j < n; j++) fine = fine && Number.isFinite(x0[j]);
    if (!fine) return finish('failed', q, lower, upper);
    for (let i = 0; i < m; i++) {
      if (lower[i] > upper[i]) {
        result.certificate[i] = 1;
        return finish('infeasible', q, lower, upper);
      }
    }
    for (let i = 0; i < m && size < most; i++) {
      const equal = lower[i] === upper[i];
      const s = equal ? 1 : start[i];
      if (s === 0 || !Number.isFinite(s > 0 ? upper[i] : lower[i])) continue;
      const pivot = project(i);
      if (pivot > 1e-9 * D[i * m + i]) append(i, s, pivot);
    }
    solveMultipliers(lower, upper);
    for (let drops = 0; drops <= m; drops++) {
      let dropped = false;
      for (let a = size - 1; a >= 0; a--) {
        if (side[W[a]] * lambda[a] < 0 && !isEquality(W[a], lower, upper)) {
          remove(a);
          dropped = true;
        }
      }
      if (!dropped) break;
      solveMultipliers(lower, upper);
    }
    const limit = 50 * (m + n) + 100;
    for (; result.iterations < limit; result.iterations++) {
      updateValues();
      let p = -1;
      let worst = 0;
      let s = 0;
      for (let i = 0; i < m; i++) {
        if (side[i] !== 0) continue;
        const tolerance = FEASIBLE * (1 + Math.abs(free[i]) + Math.abs(value[i]));
        const above = value[i] - upper[i];
        const below = lower[i] - value[i];
        if (above > tolerance && above * scale[i] > worst) {
          worst = above * scale[i];
          p = i;
          s = 1;
        }
        if (below > tolerance && below * scale[i] > worst) {
          worst = below * scale[i];
          p = i;
          s = -1;
        }
      }
      if (p < 0) {
        solveMultipliers(lower, upper);
        if (worstSign(lower, upper) >= 0) {
          const at = worstSign(lower, upper);
          const tiny =
            side[W[at]] * lambda[at] > (-1e-10 * (1 + Math.abs(free[W[at]]))) / D[W[at] * m + W[at]];
          if (!tiny) {
            remove(at);
            solveMultipliers(lower, upper);
            continue;
          }
          lambda[at] = 0;
        }
        return finish('optimal', q, lower, upper);
      }
      if (!addRow(p, s, lower, upper)) return finish('infeasible', q, lower, upper);
    }
    return finish('iteration-limit', q, lower, upper);
  };

  /** Brings row p to its bound, dropping rows that block on the way; false when no step can (infeasible, certificate set). */
  const addRow = (p: number, s: number, lower: Float64Array, upper: Float64Array): boolean => {
    let gained = 0;
    for (let guard = 0; guard <= m + 1; guard++) {
      const pivot = project(p);
      r.set(y.subarray(0, size));
      k.solveLowerTransposed(R, ld, size, r);
      let current = free[p] - gained * s * D[p * m + p];
      for (let a = 0; a < size; a++) current -= lambda[a] * D[p * m + W[a]];
      const gap = s > 0 ? current - upper[p] : lower[p] - current;
      const independent = pivot > DEPENDENT * D[p * m + p] && size < most + 1;
      const full = independent ? Math.max(0, gap) / pivot : Number.POSITIVE_INFINITY;
      let partial = Number.POSITIVE_INFINITY;
      let blocking = -1;
      for (let a = 0; a < size; a++) {
        if (isEquality(W[a], lower, upper)) continue;
        const sinks = side[W[a]] * s * r[a];
        if (!(sinks > 1e-14)) continue;
        const t = Math.max(0, side[W[a]] * lambda[a]) / sinks;
        if (t < partial) {
          partial = t;
          blocking = a;
        }
      }
      const t = Math.min(full, partial);
      if (t === Number.POSITIVE_INFINITY) {
        if (gap <= 1e-9 * (1 + Math.abs(free[p]))) return true;
        result.certificate[p] = s;
        for (let a = 0; a < size; a++) result.certificate[W[a]] = -s * r[a];
        return false;
      }
      for (let a = 0; a < size; a++) lambda[a] -= t * s * r[a];
      gained += t;
      if (full <= partial) {
        append(p, s, pivot);
        lambda[size - 1] = s * gained;
        return true;
      }
      remove(blocking);
    }
    return true;
  };

  return {
    n,
    m,
    condition: values[n - 1] / values[0],
    solve,
    setWorkingSet: (set) => side.set(set),
  };
}

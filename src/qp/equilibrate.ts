import type { QpStructure } from './qp.ts';
import type { PreparedSplit } from './splitting.ts';

/** Passes of the equilibration. */
const PASSES = 15;

/**
 * `P = c D H D`, `A = E G D` with rows of `[P Aᵀ; A 0]` near size 1: D. Ruiz, "A scaling algorithm to equilibrate both rows and
 * columns norms in matrices", RAL-TR-2001-034 (2001), then c for the mean column of P, as in Stellato et al. (2020), section 5.1.
 */
export function equilibrate({ H, G }: QpStructure): Pick<PreparedSplit, 'P' | 'A' | 'D' | 'E' | 'c'> {
  const n = H.rows;
  const m = G.rows;
  const P = H.data.slice();
  const A = G.data.slice();
  const D = new Float64Array(n).fill(1);
  const E = new Float64Array(m).fill(1);
  const columns = new Float64Array(n);
  const rows = new Float64Array(m);
  for (let pass = 0; pass < PASSES; pass++) {
    columns.fill(0);
    rows.fill(0);
    for (let i = 0; i < n; i++) {
      for (let j = 0; j < n; j++) columns[j] = Math.max(columns[j], Math.abs(P[i * n + j]));
    }
    for (let i = 0; i < m; i++) {
      for (let j = 0; j < n; j++) {
        const size = Math.abs(A[i * n + j]);
        rows[i] = Math.max(rows[i], size);
        columns[j] = Math.max(columns[j], size);
      }
    }
    for (let j = 0; j < n; j++) columns[j] = columns[j] > 0 ? 1 / Math.sqrt(columns[j]) : 1;
    for (let i = 0; i < m; i++) rows[i] = rows[i] > 0 ? 1 / Math.sqrt(rows[i]) : 1;
    for (let i = 0; i < n; i++) for (let j = 0; j < n; j++) P[i * n + j] *= columns[i] * columns[j];
    for (let i = 0; i < m; i++) for (let j = 0; j < n; j++) A[i * n + j] *= rows[i] * columns[j];
    for (let j = 0; j < n; j++) D[j] *= columns[j];
    for (let i = 0; i < m; i++) E[i] *= rows[i];
  }
  let mean = 0;
  for (let j = 0; j < n; j++) {
    let most = 0;
    for (let i = 0; i < n; i++) most = Math.max(most, Math.abs(P[i * n + j]));
    mean += most / n;
  }
  const c = mean > 0 ? 1 / mean : 1;
  for (let i = 0; i < P.length; i++) P[i] *= c;
  return { P, A, D, E, c };
}

import type { QpResult, QpStructure } from './qp.ts';

/**
 * Makes the judge of a solve: fills `result.residuals` from `x`, `multipliers` and the data alone, by the original `H` and `G`.
 * No allocation per call.
 */
export function createResidualCheck({
  H,
  G,
  softness,
}: QpStructure): (result: QpResult, q: Float64Array, lower: Float64Array, upper: Float64Array) => void {
  const n = H.rows;
  const m = G.rows;
  const gradient = new Float64Array(n);
  const size = new Float64Array(n);
  return (result, q, lower, upper) => {
    const { x, multipliers, residuals } = result;
    let relative = 0;
    let largest = 0;
    for (let i = 0; i < n; i++) {
      largest = Math.max(largest, Math.abs(x[i]));
      gradient[i] = q[i];
      size[i] = Math.abs(q[i]);
      for (let j = 0; j < n; j++) {
        const term = H.data[i * n + j] * x[j];
        gradient[i] += term;
        size[i] += Math.abs(term);
      }
    }
    residuals.primal = 0;
    residuals.dual = 0;
    residuals.complementarity = 0;
    for (let i = 0; i < m; i++) {
      const lambda = multipliers[i];
      let value = -softness[i] * lambda;
      let terms = Math.abs(value);
      for (let j = 0; j < n; j++) {
        const g = G.data[i * n + j];
        value += g * x[j];
        terms += Math.abs(g) * largest;
        if (lambda === 0) continue;
        gradient[j] += g * lambda;
        size[j] += Math.abs(g * lambda);
      }
      const scale = terms + finiteSize(lower[i]) + finiteSize(upper[i]);
      const violation = Math.max(0, lower[i] - value, value - upper[i]);
      residuals.primal = Math.max(residuals.primal, violation);
      if (violation > 0) relative = Math.max(relative, violation / scale);
      if (lambda === 0) continue;
      const bound = lambda > 0 ? upper[i] : lower[i];
      const distance = Math.abs(value - bound);
      if (!Number.isFinite(bound)) residuals.dual = Math.max(residuals.dual, Math.abs(lambda));
      else residuals.complementarity = Math.max(residuals.complementarity, Math.abs(lambda) * distance);
      relative = Math.max(relative, distance === 0 ? 0 : distance / scale);
    }
    residuals.stationarity = 0;
    for (let j = 0; j < n; j++) {
      residuals.stationarity = Math.max(residuals.stationarity, Math.abs(gradient[j]));
      if (gradient[j] !== 0) relative = Math.max(relative, Math.abs(gradient[j]) / size[j]);
    }
    residuals.relative = relative;
  };
}

function finiteSize(bound: number): number {
  return Number.isFinite(bound) ? Math.abs(bound) : 0;
}

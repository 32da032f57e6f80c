import { sizeOf } from './iterate.ts';
import type { QpResiduals, QpStructure } from './qp.ts';

/**
 * Fills `residuals` for any point and multipliers from the definition of the optimality conditions, by H and G themselves. Each is
 * relative to the size of its own terms: the stationarity to the largest of max|H| max|x|, max|q| and max|λᵢ Gᵢ|; row i to
 * |bound| + max|Gᵢ| `sizeOf` + softnessᵢ |λᵢ|; a wrong-signed multiplier to the largest one.
 *
 * @param gradient n entries of room. Allocates nothing. Cost `n² + 2 m n`.
 */
export function measureConditions(
  residuals: QpResiduals,
  { H, G, softness }: QpStructure,
  q: Float64Array,
  lower: Float64Array,
  upper: Float64Array,
  x: Float64Array,
  multipliers: Float64Array,
  gradient: Float64Array,
): void {
  const n = H.rows;
  const m = G.rows;
  let sizeH = 0;
  let force = 0;
  for (let j = 0; j < n; j++) {
    force = Math.max(force, Math.abs(q[j]));
  }
  for (let i = 0; i < n; i++) {
    let sum = q[i];
    for (let j = 0; j < n; j++) {
      sum += H.data[i * n + j] * x[j];
      sizeH = Math.max(sizeH, Math.abs(H.data[i * n + j]));
    }
    gradient[i] = sum;
  }
  let primal = 0;
  let reach = sizeH > 0 ? force / sizeH : 0;
  for (let i = 0; i < m; i++) {
    let most = 0;
    for (let j = 0; j < n; j++) most = Math.max(most, Math.abs(G.data[i * n + j]));
    force = Math.max(force, most * Math.abs(multipliers[i]));
    const bound = multipliers[i] > 0 ? upper[i] : lower[i];
    if (multipliers[i] !== 0 && most > 0 && Number.isFinite(bound))
      reach = Math.max(reach, Math.abs(bound) / most);
  }
  const size = sizeOf(x, reach);
  let dual = 0;
  let complementarity = 0;
  let relative = 0;
  let largest = 0;
  for (let i = 0; i < m; i++) {
    const lambda = multipliers[i];
    let value = 0;
    let rowSize = 0;
    for (let j = 0; j < n; j++) {
      const g = G.data[i * n + j];
      value += g * x[j];
      rowSize = Math.max(rowSize, Math.abs(g));
      gradient[j] += g * lambda;
    }
    largest = Math.max(largest, Math.abs(lambda));
    const held = value - softness[i] * lambda;
    const violation = Math.max(0, held - upper[i], lower[i] - held);
    const bound = held > upper[i] || lambda > 0 ? upper[i] : lower[i];
    const terms =
      (Number.isFinite(bound) ? Math.abs(bound) : 0) + rowSize * size + softness[i] * Math.abs(lambda);
    primal = Math.max(primal, violation);
    if (!(violation === 0)) relative = Math.max(relative, violation / terms);
    if (lambda === 0) continue;
    const distance = Math.abs(held - (lambda > 0 ? upper[i] : lower[i]));
    if (distance === Number.POSITIVE_INFINITY) {
      dual = Math.max(dual, Math.abs(lambda));
      continue;
    }
    complementarity = Math.max(complementarity, Math.abs(lambda) * distance);
    if (!(distance === 0)) relative = Math.max(relative, distance / terms);
  }
  if (!(dual === 0)) relative = Math.max(relative, dual / largest);
  let stationarity = 0;
  for (let j = 0; j < n; j++) stationarity = Math.max(stationarity, Math.abs(gradient[j]));
  if (!(stationarity === 0)) relative = Math.max(relative, stationarity / Math.max(force, sizeH * size));
  residuals.stationarity = stationarity;
  residuals.primal = primal;
  residuals.dual = dual;
  residuals.complementarity = complementarity;
  residuals.relative = relative;
}

import type { ControlProblem } from '../mpc/problem.ts';
import type { Matrix } from '../numerics/matrix.ts';
import type { Plant } from '../plant/plant.ts';
import type { LoopRecord } from './record.ts';

/** Weight of a broken hard limit in the cost of a run: as a soft one of this weight would count. */
export const HARD_LIMIT_WEIGHT = 1e4;

type Signals = Pick<LoopRecord, 'steps' | 'y' | 'reference' | 'u'>;

/**
 * The cost that a run has really had, by the weights of `problem` on true signals (outputs without noise, inputs as sent),
 * each deviation divided by the half range of its channel:
 * `Σ_{k=1}^{steps} ‖y_k − r_k‖²_Q + Σ_{k=0}^{steps−1} ‖u_k − ū‖²_S + ‖Δu_k‖²_R + Σ w e²`, `ū` the operating input, e the excess
 * over an output limit at the samples.
 */
export function costOf(signals: Signals, problem: ControlProblem, plant: Plant): LoopRecord['cost'] {
  const { steps, y, reference, u } = signals;
  const { predictor, Q, S, R, outputLimits } = problem;
  const { outputs, inputs, scaling } = predictor;
  const ny = plant.outputs.length;
  const nu = plant.inputs.length;
  const from = outputs.map(({ name }) => plant.outputs.findIndex((output) => output.name === name));
  const resting = plant.operatingPoint.u;
  const error = new Float64Array(outputs.length);
  const level = new Float64Array(nu);
  const move = new Float64Array(inputs.length);
  const cost = { tracking: 0, level: 0, move: 0, excess: 0 };
  for (let k = 0; k < steps; k++) {
    for (let i = 0; i < error.length; i++) {
      const at = (k + 1) * ny + from[i];
      error[i] = (y[at] - reference[at]) / scaling.y.half[i];
    }
    for (let j = 0; j < nu; j++) {
      const now = u[k * nu + j];
      const before = k > 0 ? u[(k - 1) * nu + j] : resting[j];
      level[j] = (now - resting[j]) / scaling.u.half[j];
      move[j] = (now - before) / scaling.u.half[j];
    }
    cost.tracking += weighted(Q, error);
    cost.level += weighted(S, level);
    cost.move += weighted(R, move);
    for (const { output, min, max, weight } of outputLimits) {
      const value = y[(k + 1) * ny + from[output]];
      const excess = Math.max(0, min - value, value - max) / scaling.y.half[output];
      cost.excess += Math.min(weight, HARD_LIMIT_WEIGHT) * excess * excess;
    }
  }
  return { ...cost, total: cost.tracking + cost.level + cost.move + cost.excess };
}

/** `vᵀ M v`. */
function weighted(M: Matrix, v: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < v.length; i++)
    for (let j = 0; j < v.length; j++) sum += v[i] * M.data[i * M.cols + j] * v[j];
  return sum;
}

import type { BoundLifting } from '../lift/lifting.ts';
import { applyInto } from '../numerics/matrix.ts';
import type { Predictor } from '../predictor/predictor.ts';

/**
 * Rolls a lifted state through inputs that are still under way.
 *
 * @param z nz, scaled; overwritten by the lifted state after the last of `inputs`.
 * @param inputs scaled inputs under way, oldest first, nu each.
 * @param d lifted disturbance, nz, scaled.
 */
export type DelayRoll = (z: Float64Array, inputs: readonly Float64Array[], d: Float64Array) => void;

/**
 * One sample at a time: `z ← A z + B u + d`, then the state in it (the first nx entries) is lifted anew, `z ← psi(x)`. Lifting anew
 * keeps z on the image of psi, where the predictor was fitted and d was learned; without it three samples of delay cost the
 * snap-through stage three to five times as much. At rest it changes nothing, so that it leaves no offset. Where the lift is not finite
 * the linear prediction stays. No allocation while it runs.
 */
export function createDelayRoll({ A, B }: Predictor, bound: BoundLifting): DelayRoll {
  const { nx, nz } = bound;
  const next = new Float64Array(nz);
  const effect = new Float64Array(nz);
  const lifted = new Float64Array(nz);
  const state = next.subarray(0, nx);
  return (z, inputs, d) => {
    for (const u of inputs) {
      applyInto(next, A, z);
      applyInto(effect, B, u);
      for (let j = 0; j < nz; j++) next[j] += effect[j] + d[j];
      bound.liftInto(lifted, state);
      z.set(lifted.every(Number.isFinite) ? lifted : next);
    }
  };
}

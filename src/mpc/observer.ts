import type { BoundLifting } from '../lift/lifting.ts';
import { applyInto } from '../numerics/matrix.ts';
import type { Predictor } from '../predictor/predictor.ts';

/** Lifts what is measured and keeps the estimate of the lifted disturbance. */
export interface LiftedObserver {
  /** Lifted measurement, nz, scaled. */
  readonly z: Float64Array;
  /** Estimate of the lifted one-step residual, nz, scaled. */
  readonly d: Float64Array;
  /** Takes a measurement (nx, physical); false, with nothing changed, when its lift is not finite. */
  readonly measure: (x: ArrayLike<number>) => boolean;
  /** Tells which input (nu, scaled) acts from this sample to the next one. */
  readonly act: (u: Float64Array) => void;
  readonly reset: () => void;
}

/**
 * `d ← d + gain (psi(x_k) − A psi(x_{k−1}) − B u_{k−1} − d)`: a first-order filter on the WHOLE lifted one-step residual, so that at
 * rest `z = A z + B u + d` holds exactly and a tracking controller without level weight leaves no offset. After a measurement
 * that was not finite there is no one-step residual: d stays until two good ones follow each other.
 *
 * @param gain in [0, 1]; 0 keeps d = 0.
 */
export function createObserver(predictor: Predictor, bound: BoundLifting, gain: number): LiftedObserver {
  const { A, B, scaling, coordinates } = predictor;
  const nx = coordinates.length;
  const nz = A.rows;
  const z = new Float64Array(nz);
  const d = new Float64Array(nz);
  const lifted = new Float64Array(nz);
  const expected = new Float64Array(nz);
  const effect = new Float64Array(nz);
  const scaled = new Float64Array(nx);
  let measured = false;
  let expecting = false;
  return {
    z,
    d,
    measure(x) {
      for (let i = 0; i < nx; i++) scaled[i] = (x[i] - scaling.x.centre[i]) / scaling.x.half[i];
      bound.liftInto(lifted, scaled);
      measured = lifted.every(Number.isFinite);
      if (measured) {
        if (expecting) for (let i = 0; i < nz; i++) d[i] += gain * (lifted[i] - expected[i] - d[i]);
        z.set(lifted);
      }
      expecting = false;
      return measured;
    },
    act(u) {
      if (!measured) return;
      applyInto(expected, A, z);
      applyInto(effect, B, u);
      for (let i = 0; i < nz; i++) expected[i] += effect[i];
      expecting = true;
    },
    reset() {
      z.fill(0);
      d.fill(0);
      measured = false;
      expecting = false;
    },
  };
}

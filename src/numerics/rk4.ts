/** Right side of `ẋ = f(x)`: `x` (n, not modified) → `ẋ` (n). It may return the same array at every call. */
export type RightSide = (x: Float64Array) => ArrayLike<number>;

/** Workspace of one integration: the stage point and the weighted sum, n entries each. */
export interface Rk4Work {
  readonly stage: Float64Array;
  readonly sum: Float64Array;
}

/** A workspace for systems of `n` equations. */
export function createRk4Work(n: number): Rk4Work {
  return { stage: new Float64Array(n), sum: new Float64Array(n) };
}

/**
 * One step of the classical fourth-order Runge–Kutta method for `ẋ = f(x)`, in place.
 *
 * `x⁺ = x + h/6 (k₁ + 2k₂ + 2k₃ + k₄)`; the error of a step is O(h⁵), of a fixed time O(h⁴).
 * Source: W. Kutta, Z. Math. Phys. 46:435–453, 1901; Hairer, Nørsett, Wanner, Solving Ordinary Differential
 * Equations I, II.1.
 *
 * @param x n entries, overwritten with the state after `h`. A non-finite result is left in `x` for the caller to see.
 * @param h step, in the unit of time of `f`.
 * @param work overwritten; nothing else is allocated here.
 */
export function rk4Step(f: RightSide, x: Float64Array, h: number, work: Rk4Work): void {
  const { stage, sum } = work;
  const n = x.length;
  let k = f(x);
  for (let i = 0; i < n; i++) {
    sum[i] = x[i] + (h / 6) * k[i];
    stage[i] = x[i] + (h / 2) * k[i];
  }
  k = f(stage);
  for (let i = 0; i < n; i++) {
    sum[i] += (h / 3) * k[i];
    stage[i] = x[i] + (h / 2) * k[i];
  }
  k = f(stage);
  for (let i = 0; i < n; i++) {
    sum[i] += (h / 3) * k[i];
    stage[i] = x[i] + h * k[i];
  }
  k = f(stage);
  for (let i = 0; i < n; i++) x[i] = sum[i] + (h / 6) * k[i];
}

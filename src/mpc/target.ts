import { solveLeastNorm } from '../numerics/linearSolve.ts';
import { type Matrix, zeros } from '../numerics/matrix.ts';
import type { Predictor } from '../predictor/predictor.ts';

/** Steady-state target as linear maps of `(r_N, d, 1)`. */
export interface TargetMaps {
  /** nz × (ny + nz + 1). */
  readonly Tz: Matrix;
  /** nu × (ny + nz + 1). */
  readonly Tu: Matrix;
}

/** Directions in which the steady state is determined to fewer digits than this are left at zero. */
const CUTOFF = 1e-8;

/**
 * The steady state `z_s = A z_s + B u_s + d`, `C z_s = r` (for the tracked outputs) in least squares and of least norm,
 * the constant function known to be 1. Limits are not looked at.
 *
 * @param tracked for each output whether its reference counts.
 */
export function findTarget(predictor: Predictor, tracked: readonly boolean[]): TargetMaps {
  const { A, B, C, lifting } = predictor;
  const nz = A.rows;
  const nu = B.cols;
  const ny = C.rows;
  const one = ny + nz;
  const constant = lifting.constantIndex;
  const outputs = tracked.flatMap((is, i) => (is ? [i] : []));
  // Unknowns: z without the constant, then u. Rows: (I − A) z − B u = d, then C z = r.
  const free = Array.from({ length: nz }, (_, i) => i).filter((i) => i !== constant);
  const M = zeros(free.length + outputs.length, free.length + nu);
  const right = zeros(M.rows, ny + nz + 1);
  free.forEach((i, row) => {
    free.forEach((j, col) => {
      M.data[row * M.cols + col] = (i === j ? 1 : 0) - A.data[i * nz + j];
    });
    for (let j = 0; j < nu; j++) M.data[row * M.cols + free.length + j] = -B.data[i * nu + j];
    right.data[row * right.cols + ny + i] = 1;
    if (constant >= 0) right.data[row * right.cols + one] = A.data[i * nz + constant];
  });
  outputs.forEach((o, index) => {
    const row = free.length + index;
    free.forEach((j, col) => {
      M.data[row * M.cols + col] = C.data[o * nz + j];
    });
    right.data[row * right.cols + o] = 1;
  });
  const solution = solveLeastNorm(M, right, CUTOFF);
  const Tz = zeros(nz, right.cols);
  free.forEach((i, row) => {
    Tz.data.set(solution.data.subarray(row * right.cols, (row + 1) * right.cols), i * right.cols);
  });
  if (constant >= 0) Tz.data[constant * right.cols + one] = 1;
  const Tu = zeros(nu, right.cols);
  Tu.data.set(solution.data.subarray(free.length * right.cols));
  return { Tz, Tu };
}

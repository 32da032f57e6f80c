import { decomposeGeneral, type GeneralEigen } from '../numerics/eigen.ts';
import {
  addScaled,
  identity,
  type Matrix,
  multiply,
  placeBlock,
  transpose,
  zeros,
} from '../numerics/matrix.ts';
import { type RiccatiSolution, solveRiccati } from '../numerics/riccati.ts';
import type { ControlProblem } from './problem.ts';

/** A terminal weight and how it was come by. */
export interface TerminalWeight {
  /** On `(z_N − z_s, u_{N−1} − u_s)`, (nz + nu) square. */
  readonly P: Matrix;
  readonly clippedModes: number;
  readonly residual: number;
  readonly converged: boolean;
}

/** Modulus to which modes that no input moves are pulled in, for the terminal weight only. */
const CLIPPED_MODULUS = 0.999;
/** A mode counts as not moved when its share of the input's effect is below this, relative to vector lengths. */
const NOT_MOVED = 1e-6;

/**
 * Cost-to-go of the unconstrained problem beyond the horizon: the Riccati solution of `(z, u_{k−1})` driven by the move
 * `Δu`, weights Q on the outputs, S on the level and R on the move. The constant function is left out (its row and column
 * of P are zero: the deviation from the target has none), and modes on or outside the unit circle that no input moves are
 * pulled inside it, since no cost-to-go exists for them.
 */
export function weighTerminal(problem: ControlProblem): TerminalWeight {
  const { A, B, C, lifting } = problem.predictor;
  const nz = A.rows;
  const nu = B.cols;
  const free = Array.from({ length: nz }, (_, i) => i).filter((i) => i !== lifting.constantIndex);
  const reduced = { A: pick(A, free, free), B: pickRows(B, free), C: pick(C, range(C.rows), free) };
  const { A: Ac, clipped } = clipUnmoved(reduced.A, reduced.B);
  const { X, residual, converged } = solveAugmented(Ac, reduced.B, reduced.C, problem);
  const P = zeros(nz + nu, nz + nu);
  const index = [...free, ...range(nu).map((j) => nz + j)];
  index.forEach((i, row) => {
    index.forEach((j, col) => {
      P.data[i * (nz + nu) + j] = X.data[row * X.cols + col];
    });
  });
  return { P, clippedModes: clipped, residual, converged };
}

/** The Riccati equation of `(z, u_{k−1})` with input `Δu`: `z⁺ = A z + B (u + Δu)`, `u⁺ = u + Δu`. */
function solveAugmented(A: Matrix, B: Matrix, C: Matrix, { Q, S, R }: ControlProblem): RiccatiSolution {
  const nz = A.rows;
  const nu = B.cols;
  const stateWeight = multiply(transpose(C), multiply(Q, C));
  if (R.data.every((value) => value === 0)) {
    // Without a weight on moves the last input has no cost of its own: the plain equation, and P has zeros for it.
    const plain = solveRiccati(A, B, stateWeight, S);
    const X = zeros(nz + nu, nz + nu);
    placeBlock(X, 0, 0, plain.X);
    return { ...plain, X };
  }
  const Aa = zeros(nz + nu, nz + nu);
  placeBlock(Aa, 0, 0, A);
  placeBlock(Aa, 0, nz, B);
  placeBlock(Aa, nz, nz, identity(nu));
  const Ba = zeros(nz + nu, nu);
  placeBlock(Ba, 0, 0, B);
  placeBlock(Ba, nz, 0, identity(nu));
  const Qa = zeros(nz + nu, nz + nu);
  placeBlock(Qa, 0, 0, stateWeight);
  placeBlock(Qa, nz, nz, S);
  const cross = zeros(nz + nu, nu);
  placeBlock(cross, nz, 0, S);
  return solveRiccati(Aa, Ba, Qa, addScaled(1, R, 1, S), cross);
}

/**
 * Pulls modes with |λ| ≥ 1 that no input moves to modulus 0.999: `A − Σ (λ − λ_c) v wᴴ / (wᴴ v)` over those modes, `w` and
 * `v` their left and right eigenvectors. A mode is not moved when `‖wᴴ B‖` is negligible against `‖w‖ ‖B‖`.
 */
function clipUnmoved(A: Matrix, B: Matrix): { A: Matrix; clipped: number } {
  const n = A.rows;
  const left = decomposeGeneral(transpose(A));
  let right: GeneralEigen | null = null;
  const sizeB = Math.hypot(...B.data) || 1;
  let result = A;
  let clipped = 0;
  for (let i = 0; i < n; i++) {
    const modulus = Math.hypot(left.real[i], left.imaginary[i]);
    if (modulus < 1 - 1e-9) continue;
    const pair = left.imaginary[i] > 0;
    const columns = pair ? [i, i + 1] : [i];
    if (left.imaginary[i] < 0) continue;
    const W = pick(left.vectors, range(n), columns);
    if (Math.hypot(...multiply(transpose(W), B).data) > NOT_MOVED * Math.hypot(...W.data) * sizeB) continue;
    right ??= decomposeGeneral(A);
    const match = nearestMode(right, left.real[i], left.imaginary[i]);
    const V = pick(right.vectors, range(n), pair ? [match, match + 1] : [match]);
    const scaled = projectOut(result, V, W, 1 - CLIPPED_MODULUS / modulus);
    if (!scaled) continue;
    result = scaled;
    clipped += columns.length;
  }
  return { A: result, clipped };
}

/** `A − share · A V (WᵀV)⁻¹ Wᵀ`: shrinks A on the invariant subspace of V by `share`; null when it cannot be told apart. */
function projectOut(A: Matrix, V: Matrix, W: Matrix, share: number): Matrix | null {
  const M = multiply(transpose(W), V);
  const det = M.rows === 1 ? M.data[0] : M.data[0] * M.data[3] - M.data[1] * M.data[2];
  const size = (Math.hypot(...V.data) * Math.hypot(...W.data)) ** M.rows;
  if (!(Math.abs(det) > 1e-12 * size)) return null;
  const inverse =
    M.rows === 1
      ? { rows: 1, cols: 1, data: Float64Array.of(1 / det) }
      : {
          rows: 2,
          cols: 2,
          data: Float64Array.of(M.data[3] / det, -M.data[1] / det, -M.data[2] / det, M.data[0] / det),
        };
  const projector = multiply(V, multiply(inverse, transpose(W)));
  return addScaled(1, A, -share, multiply(A, projector));
}

function nearestMode(
  modes: { readonly real: Float64Array; readonly imaginary: Float64Array },
  real: number,
  imaginary: number,
): number {
  let best = 0;
  for (let i = 1; i < modes.real.length; i++) {
    const distance = Math.hypot(modes.real[i] - real, modes.imaginary[i] - imaginary);
    const least = Math.hypot(modes.real[best] - real, modes.imaginary[best] - imaginary);
    if (distance < least) best = i;
  }
  return best;
}

function pick(M: Matrix, rows: readonly number[], cols: readonly number[]): Matrix {
  const S = zeros(rows.length, cols.length);
  rows.forEach((i, row) => {
    cols.forEach((j, col) => {
      S.data[row * cols.length + col] = M.data[i * M.cols + j];
    });
  });
  return S;
}

function pickRows(M: Matrix, rows: readonly number[]): Matrix {
  return pick(M, rows, range(M.cols));
}

function range(n: number): number[] {
  return Array.from({ length: n }, (_, i) => i);
}

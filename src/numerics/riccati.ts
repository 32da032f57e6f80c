import { solveSquare } from './linearSolve.ts';
import { addScaled, block, identity, type Matrix, multiply, placeBlock, transpose, zeros } from './matrix.ts';

/** Outcome of a discrete algebraic Riccati equation. */
export interface RiccatiSolution {
  /** n × n, symmetric. */
  readonly X: Matrix;
  /** `K = (R + BᵀXB)⁻¹ (BᵀXA + Sᵀ)`, m × n: the optimal input is `u = −K x`. */
  readonly K: Matrix;
  /** ‖right side − X‖ / ‖X‖ (Frobenius) of the equation itself. */
  readonly residual: number;
  /**
   * False when the iteration did not settle (a mode on the unit circle that the cost sees or no input moves, say). A
   * small residual alone does not show that: with a constant mode it can read 5e-14 on a wrong X.
   */
  readonly converged: boolean;
}

const MOST_DOUBLINGS = 60;
/** Relative change of X between doublings that counts as settled: it converges quadratically, so one more step is at rounding. */
const SETTLED = 1e-13;
/** A residual above this, relative to ‖X‖, is no solution. */
const WRONG = 1e-6;

/**
 * The stabilising solution of `X = AᵀXA − (AᵀXB + S)(R + BᵀXB)⁻¹(AᵀXB + S)ᵀ + Q` by structure-preserving doubling.
 *
 * R may be singular (even zero) as long as `R + BᵀB` is not: the equation is then shifted by a known multiple of the
 * identity first, which makes the input weight regular and leaves an equation of the same form.
 * Source: E. Chu, H. Fan, W. Lin, C. Wang, Int. J. Control 77:767–788, 2004; B. Anderson, Int. J. Control 28:295–306, 1978.
 *
 * @param A n × n. @param B n × m. @param Q n × n symmetric. @param R m × m symmetric. @param S n × m, zero if left out.
 * @returns the outcome; `converged` false instead of an exception when there is no such solution.
 */
export function solveRiccati(A: Matrix, B: Matrix, Q: Matrix, R: Matrix, S?: Matrix): RiccatiSolution {
  const cross = S ?? zeros(A.rows, B.cols);
  const size = norm(Q) + norm(R);
  const plain = double(A, B, Q, R, cross);
  if (plain.converged) return plain;
  const shift = size > 0 ? size / Math.sqrt(Q.rows + R.rows) : 1;
  const shifted = doubleShifted(A, B, Q, R, cross, shift);
  return shifted.converged || !(plain.residual < shifted.residual) ? shifted : plain;
}

/** Solves for `Y = X − shift·I`, whose equation has the weights `Q'`, `R'`, `S'` of one Riccati step from `shift·I`. */
function doubleShifted(
  A: Matrix,
  B: Matrix,
  Q: Matrix,
  R: Matrix,
  S: Matrix,
  shift: number,
): RiccatiSolution {
  const X0 = addScaled(shift, identity(A.rows), 0, Q);
  const weighted = multiply(transpose(A), X0);
  const Q1 = addScaled(1, addScaled(1, Q, -1, X0), 1, multiply(weighted, A));
  const R1 = addScaled(1, R, 1, multiply(transpose(B), multiply(X0, B)));
  const S1 = addScaled(1, S, 1, multiply(weighted, B));
  const Y = iterate(A, B, Q1, R1, S1);
  return judge(A, B, Q, R, S, addScaled(1, X0, 1, Y.H), Y.settled);
}

function double(A: Matrix, B: Matrix, Q: Matrix, R: Matrix, S: Matrix): RiccatiSolution {
  const { H, settled } = iterate(A, B, Q, R, S);
  return judge(A, B, Q, R, S, H, settled);
}

/** The doubling itself: `A ← A W⁻¹ A`, `G ← G + A W⁻¹ G Aᵀ`, `H ← H + AᵀH W⁻¹ A` with `W = I + G H`; H tends to X. */
function iterate(A0: Matrix, B: Matrix, Q: Matrix, R: Matrix, S: Matrix): { H: Matrix; settled: boolean } {
  const n = A0.rows;
  const failed = { H: Q, settled: false };
  const scaledSt = solveSquare(R, transpose(S));
  const scaledBt = solveSquare(R, transpose(B));
  if (!scaledSt || !scaledBt) return failed;
  let A = addScaled(1, A0, -1, multiply(B, scaledSt));
  let G = symmetric(multiply(B, scaledBt));
  let H = symmetric(addScaled(1, Q, -1, multiply(S, scaledSt)));
  for (let step = 0; step < MOST_DOUBLINGS; step++) {
    const W = addScaled(1, identity(n), 1, multiply(G, H));
    const AG = zeros(n, 2 * n);
    placeBlock(AG, 0, 0, A);
    placeBlock(AG, 0, n, G);
    const solved = solveSquare(W, AG);
    if (!solved) return { H, settled: false };
    const WA = block(solved, 0, n, 0, n);
    const WG = block(solved, 0, n, n, 2 * n);
    const At = transpose(A);
    const added = symmetric(multiply(multiply(At, H), WA));
    G = symmetric(addScaled(1, G, 1, multiply(multiply(A, WG), At)));
    H = addScaled(1, H, 1, added);
    A = multiply(A, WA);
    const size = norm(H);
    if (!Number.isFinite(size)) return failed;
    if (norm(added) <= SETTLED * size) return { H, settled: norm(A) < 1 };
  }
  return { H, settled: false };
}

/** The gain, and the residual of the equation in its original form. */
function judge(
  A: Matrix,
  B: Matrix,
  Q: Matrix,
  R: Matrix,
  S: Matrix,
  X: Matrix,
  settled: boolean,
): RiccatiSolution {
  const XA = multiply(X, A);
  const cross = addScaled(1, multiply(transpose(B), XA), 1, transpose(S));
  const inner = addScaled(1, R, 1, multiply(transpose(B), multiply(X, B)));
  const K = solveSquare(inner, cross);
  if (!K) return { X, K: zeros(B.cols, A.rows), residual: Number.POSITIVE_INFINITY, converged: false };
  const right = addScaled(
    1,
    addScaled(1, multiply(transpose(A), XA), -1, multiply(transpose(cross), K)),
    1,
    Q,
  );
  const size = norm(X);
  const residual = size > 0 ? norm(addScaled(1, right, -1, X)) / size : norm(right);
  return { X, K, residual, converged: settled && residual <= WRONG };
}

/** The mean of a matrix and its transpose: equal to it up to rounding where it is symmetric in exact arithmetic. */
function symmetric(M: Matrix): Matrix {
  return addScaled(0.5, M, 0.5, transpose(M));
}

function norm(M: Matrix): number {
  let sum = 0;
  for (const value of M.data) sum += value * value;
  return Math.sqrt(sum);
}

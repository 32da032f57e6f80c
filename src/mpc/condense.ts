import { decomposeSymmetric } from '../numerics/eigen.ts';
import { addScaled, identity, type Matrix, multiply, transpose, zeros } from '../numerics/matrix.ts';
import { limitRows } from './limitRows.ts';
import { type StackedPrediction, stackPrediction } from './prediction.ts';
import type { CondensedQp, ControlProblem } from './problem.ts';
import type { TargetMaps } from './target.ts';

/**
 * Condenses the tracking problem: the states are eliminated with the predictor, the free moves `U` remain. Everything
 * scaled; `½ Uᵀ H U + (F θ)ᵀ U` is the cost of `ControlProblem` up to a term without `U`.
 *
 * @param P terminal weight on `(z_N − z_s, u_{N−1} − u_s)`, (nz + nu) square, or null: Q weighs step N as any other.
 * @param target maps of the steady state, used by the level weight and the terminal weight.
 */
export function condenseQp(problem: ControlProblem, P: Matrix | null, target: TargetMaps): CondensedQp {
  const { predictor, horizon: N, blocks } = problem;
  const { A, B, C } = predictor;
  const nz = A.rows;
  const nu = B.cols;
  const ny = C.rows;
  const n = blocks.length * nu;
  const theta = { z: 0, uPrev: nz, r: nz + nu, d: nz + nu + N * ny, one: 2 * nz + nu + N * ny };
  const ntheta = theta.one + 1;
  const H = zeros(n, n);
  const F = zeros(n, ntheta);
  const outputs = stackPrediction(A, B, C, blocks);

  addTracking(H, F, problem, outputs, theta, P ? N - 1 : N);
  addMoves(H, F, problem, theta.uPrev);
  addLevel(H, F, problem, target, theta);
  if (P) addTerminal(H, F, problem, P, target, theta);
  mirror(H);

  const { G, E, Wl, Wu, softness, rows } = limitRows(problem, outputs, theta, ntheta);
  const eigenvalues = decomposeSymmetric(H).values;
  const condition = eigenvalues[0] > 0 ? eigenvalues[n - 1] / eigenvalues[0] : Number.POSITIVE_INFINITY;
  return {
    N,
    nu,
    ny,
    nz,
    n,
    m: rows.length,
    ntheta,
    theta,
    H,
    F,
    G,
    E,
    Wl,
    Wu,
    softness,
    rows,
    blocks,
    condition,
  };
}

type ThetaLayout = CondensedQp['theta'];

/** `Σ_{k=1}^{last} ‖y_k − r_k‖²_Q`. */
function addTracking(
  H: Matrix,
  F: Matrix,
  { Q, predictor }: ControlProblem,
  { Phi, Gamma, Psi }: StackedPrediction,
  theta: ThetaLayout,
  last: number,
): void {
  const ny = predictor.C.rows;
  const n = H.cols;
  const used = last * ny;
  const weighted = zeros(used, n);
  for (let k = 0; k < last; k++) {
    for (let a = 0; a < ny; a++) {
      for (let b = 0; b < ny; b++) {
        const q = 2 * Q.data[a * ny + b];
        if (q === 0) continue;
        for (let j = 0; j < n; j++) {
          weighted.data[(k * ny + a) * n + j] += q * Gamma.data[(k * ny + b) * n + j];
        }
      }
    }
  }
  const Wt = transpose(weighted);
  accumulate(H, 0, multiply(Wt, top(Gamma, used)), 1);
  accumulate(F, theta.z, multiply(Wt, top(Phi, used)), 1);
  accumulate(F, theta.d, multiply(Wt, top(Psi, used)), 1);
  accumulate(F, theta.r, Wt, -1);
}

/** `Σ ‖Δu_k‖²_R`: only the first step of a block moves. */
function addMoves(H: Matrix, F: Matrix, { R, blocks }: ControlProblem, uPrev: number): void {
  const nu = R.rows;
  for (let b = 0; b < blocks.length; b++) {
    for (let i = 0; i < nu; i++) {
      for (let j = 0; j < nu; j++) {
        const r = 2 * R.data[i * nu + j];
        H.data[(b * nu + i) * H.cols + b * nu + j] += r;
        if (b === 0) {
          F.data[i * F.cols + uPrev + j] -= r;
          continue;
        }
        H.data[((b - 1) * nu + i) * H.cols + (b - 1) * nu + j] += r;
        H.data[(b * nu + i) * H.cols + (b - 1) * nu + j] -= r;
        H.data[((b - 1) * nu + i) * H.cols + b * nu + j] -= r;
      }
    }
  }
}

/** `Σ_k ‖u_k − u_s‖²_S`. */
function addLevel(
  H: Matrix,
  F: Matrix,
  problem: ControlProblem,
  { Tu }: TargetMaps,
  theta: ThetaLayout,
): void {
  const { S, blocks } = problem;
  const nu = S.rows;
  if (S.data.every((value) => value === 0)) return;
  const STu = multiply(S, Tu);
  for (let b = 0; b < blocks.length; b++) {
    for (let i = 0; i < nu; i++) {
      for (let j = 0; j < nu; j++) {
        H.data[(b * nu + i) * H.cols + b * nu + j] += 2 * blocks[b] * S.data[i * nu + j];
      }
    }
    addTargetTerm(F, b * nu, STu, -2 * blocks[b], problem, theta);
  }
}

/** `(z_N − z_s, u_{N−1} − u_s)ᵀ P (…)`. */
function addTerminal(
  H: Matrix,
  F: Matrix,
  problem: ControlProblem,
  P: Matrix,
  { Tz, Tu }: TargetMaps,
  theta: ThetaLayout,
): void {
  const { A, B } = problem.predictor;
  const { blocks, horizon } = problem;
  const nz = A.rows;
  const nu = B.cols;
  const n = H.cols;
  // e = Ge U + Az z + Ad d − T: the last rows pick u_{N−1}, the last block.
  const { gamma, power, sum } = finalState(A, B, blocks, horizon);
  const Ge = zeros(nz + nu, n);
  accumulate(Ge, 0, gamma, 1);
  for (let i = 0; i < nu; i++) Ge.data[(nz + i) * n + n - nu + i] = 1;
  const Wt = multiply(transpose(Ge), P);
  accumulate(H, 0, multiply(Wt, Ge), 2);
  const Wz = zeros(n, nz);
  for (let i = 0; i < n; i++) Wz.data.set(Wt.data.subarray(i * (nz + nu), i * (nz + nu) + nz), i * nz);
  accumulate(F, theta.z, multiply(Wz, power), 2);
  accumulate(F, theta.d, multiply(Wz, sum), 2);
  const T = zeros(nz + nu, Tz.cols);
  T.data.set(Tz.data);
  T.data.set(Tu.data, Tz.data.length);
  addTargetTerm(F, 0, multiply(Wt, T), -2, problem, theta);
}

/** `z_N = gamma U + power z + sum d`. */
function finalState(A: Matrix, B: Matrix, blocks: readonly number[], N: number) {
  const nz = A.rows;
  const nu = B.cols;
  const gamma = zeros(nz, blocks.length * nu);
  let effect = B;
  for (let b = blocks.length - 1; b >= 0; b--) {
    for (let step = 0; step < blocks[b]; step++) {
      accumulate(gamma, b * nu, effect, 1);
      effect = multiply(A, effect);
    }
  }
  return { gamma, ...powerAndSum(A, N) };
}

/** `A^N` and `Σ_{k<N} Aᵏ` by doubling, in at most four products for each binary digit of N. */
function powerAndSum(A: Matrix, N: number): { power: Matrix; sum: Matrix } {
  let power = identity(A.rows);
  let sum = zeros(A.rows, A.rows);
  for (const digit of N.toString(2)) {
    sum = addScaled(1, sum, 1, multiply(power, sum));
    power = multiply(power, power);
    if (digit === '0') continue;
    sum = addScaled(1, sum, 1, power);
    power = multiply(power, A);
  }
  return { power, sum };
}

/** Adds `factor · M (r_N, d, 1)` to the rows of F from `row` on. */
function addTargetTerm(
  F: Matrix,
  row: number,
  M: Matrix,
  factor: number,
  { predictor, horizon }: ControlProblem,
  theta: ThetaLayout,
): void {
  const ny = predictor.C.rows;
  const nz = predictor.A.rows;
  const lastReference = theta.r + (horizon - 1) * ny;
  for (let i = 0; i < M.rows; i++) {
    const out = (row + i) * F.cols;
    const at = i * M.cols;
    for (let j = 0; j < ny; j++) F.data[out + lastReference + j] += factor * M.data[at + j];
    for (let j = 0; j < nz; j++) F.data[out + theta.d + j] += factor * M.data[at + ny + j];
    F.data[out + theta.one] += factor * M.data[at + ny + nz];
  }
}

/** `M[:, col …] += factor · S`. */
function accumulate(M: Matrix, col: number, S: Matrix, factor: number): void {
  for (let i = 0; i < S.rows; i++) {
    for (let j = 0; j < S.cols; j++) M.data[i * M.cols + col + j] += factor * S.data[i * S.cols + j];
  }
}

function top(M: Matrix, rows: number): Matrix {
  return { rows, cols: M.cols, data: M.data.subarray(0, rows * M.cols) };
}

/** Copies the lower triangle onto the upper one: H is symmetric, its computed halves differ by rounding. */
function mirror(H: Matrix): void {
  for (let i = 0; i < H.rows; i++)
    for (let j = 0; j < i; j++) H.data[j * H.cols + i] = H.data[i * H.cols + j];
}

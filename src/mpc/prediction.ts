import { type Matrix, multiply, zeros } from '../numerics/matrix.ts';

/**
 * Predicted outputs over the horizon, stacked stage by stage: `Y = Phi z + Gamma V + Psi d` with the free moves `V`, one
 * group of nu for each input block.
 */
export interface StackedPrediction {
  /** (N·ny) × nz. */
  readonly Phi: Matrix;
  /** (N·ny) × (blocks·nu). */
  readonly Gamma: Matrix;
  /** (N·ny) × nz. */
  readonly Psi: Matrix;
}

/**
 * Stacks the predictions of `z⁺ = A z + B u + d`, `y = C z` over `blocks` (lengths summing to N).
 *
 * The rows `C Aᵏ` follow from one another by a product with `A` from the right, `ny · nz²` flops a step: no power of A is
 * formed.
 */
export function stackPrediction(
  A: Matrix,
  B: Matrix,
  C: Matrix,
  blocks: readonly number[],
): StackedPrediction {
  const N = blocks.reduce((sum, length) => sum + length, 0);
  const nz = A.rows;
  const nu = B.cols;
  const ny = C.rows;
  const n = blocks.length * nu;
  const Phi = zeros(N * ny, nz);
  const Psi = zeros(N * ny, nz);
  // impulse[k] = C Aᵏ B: effect of an input on the output k + 1 steps later.
  const impulse: Matrix[] = [];
  let row = C;
  for (let k = 0; k < N; k++) {
    impulse.push(multiply(row, B));
    for (let i = 0; i < ny * nz; i++) {
      const before = k > 0 ? Psi.data[(k - 1) * ny * nz + i] : 0;
      Psi.data[k * ny * nz + i] = before + row.data[i];
    }
    row = multiply(row, A);
    Phi.data.set(row.data, k * ny * nz);
  }
  const Gamma = zeros(N * ny, n);
  let start = 0;
  for (let b = 0; b < blocks.length; b++) {
    for (let stage = start; stage < start + blocks[b]; stage++) {
      for (let k = stage; k < N; k++) addBlock(Gamma, k * ny, b * nu, impulse[k - stage]);
    }
    start += blocks[b];
  }
  return { Phi, Gamma, Psi };
}

function addBlock(M: Matrix, row: number, col: number, S: Matrix): void {
  for (let i = 0; i < S.rows; i++) {
    for (let j = 0; j < S.cols; j++) M.data[(row + i) * M.cols + col + j] += S.data[i * S.cols + j];
  }
}

import { solveSquare } from '../numerics/linearSolve.ts';
import { block, identity, type Matrix, multiply, transpose, zeros } from '../numerics/matrix.ts';
import { condenseQp } from './condense.ts';
import type { ControllerDesign, ControlProblem } from './problem.ts';
import { findTarget } from './target.ts';
import { weighTerminal } from './terminal.ts';

/**
 * Everything that can be computed before the first sample: steady-state target, terminal weight, condensed QP and the
 * unconstrained gain. A terminal weight whose Riccati equation has no stabilising solution is left out, and the notes
 * say so.
 */
export function designController(problem: ControlProblem): ControllerDesign {
  const { predictor, Q } = problem;
  const ny = predictor.C.rows;
  const tracked = Array.from({ length: ny }, (_, i) => Q.data[i * ny + i] > 0);
  const target = findTarget(predictor, tracked);
  const terminal = problem.terminal === 'riccati' ? weighTerminal(problem) : null;
  const usable = terminal?.converged ? terminal.P : null;
  const qp = condenseQp(problem, usable, target);
  const size = predictor.A.rows + predictor.B.cols;
  return {
    problem,
    qp,
    K: firstMoveGain(qp.H, qp.F, qp.nu),
    P: usable ?? zeros(size, size),
    Tz: target.Tz,
    Tu: target.Tu,
    notes: {
      clippedModes: terminal?.clippedModes ?? 0,
      riccatiResidual: terminal?.residual ?? 0,
      riccatiConverged: terminal?.converged ?? true,
    },
  };
}

/** `K` with `u_0 = −K θ` where no limit is active: the first nu rows of `H⁻¹ F`, H being symmetric; NaN where it is singular. */
function firstMoveGain(H: Matrix, F: Matrix, nu: number): Matrix {
  const firstColumns = solveSquare(H, block(identity(H.rows), 0, H.rows, 0, nu));
  if (firstColumns) return multiply(transpose(firstColumns), F);
  const K = zeros(nu, F.cols);
  K.data.fill(Number.NaN);
  return K;
}

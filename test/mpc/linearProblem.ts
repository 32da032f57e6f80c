import type { BoundLifting } from '../../src/lift/lifting.ts';
import type { ControlProblem } from '../../src/mpc/problem.ts';
import { diagonal, fromRows, identity, type Matrix, zeros } from '../../src/numerics/matrix.ts';
import type { Predictor } from '../../src/predictor/predictor.ts';

/** A predictor that is the linear plant itself: no lifting, no scaling, all ranges [−1, 1] (so that scaled = physical). */
export function linearPredictor(A: Matrix, B: Matrix, C: Matrix, sampleTime = 1): Predictor {
  const channel = (letter: string, i: number) => ({ name: `${letter}${i + 1}`, unit: '1', min: -1, max: 1 });
  const channels = (letter: string, n: number) => Array.from({ length: n }, (_, i) => channel(letter, i));
  const unscaled = (n: number) => ({ centre: new Array(n).fill(0), half: new Array(n).fill(1) });
  const coordinates = channels('x', A.rows);
  return {
    form: 'linear',
    sampleTime,
    coordinates,
    inputs: channels('u', B.cols),
    outputs: channels('y', C.rows),
    scaling: { x: unscaled(A.rows), u: unscaled(B.cols), y: unscaled(C.rows) },
    lifting: {
      nx: A.rows,
      nz: A.rows,
      names: coordinates.map(({ name }) => name),
      parts: [],
      dropped: [],
      constantIndex: -1,
    },
    A,
    B,
    C,
    N: [],
    fit: {
      route: 'given',
      samples: 0,
      condition: 1,
      digitsLost: 0,
      ridge: 0,
      ridgesTried: [],
      rank: A.rows + B.cols,
      regressors: A.rows + B.cols,
      dependent: [],
      residuals: [],
    },
  };
}

/** `z = x`. */
export function bindIdentity(nx: number): BoundLifting {
  return {
    nx,
    nz: nx,
    liftInto: (z, x) => z.set(x),
    jacobianInto: (J) => J.set(identity(nx).data),
  };
}

/** A problem without limits on a linear plant whose state is the output, Q and R identities; change what matters. */
export function linearProblem(
  rows: { readonly A: number[][]; readonly B: number[][]; readonly C?: number[][] },
  change: Partial<ControlProblem> = {},
): ControlProblem {
  const A = fromRows(rows.A);
  const B = fromRows(rows.B);
  const C = rows.C ? fromRows(rows.C) : identity(A.rows);
  const horizon = change.horizon ?? 10;
  const wide = (sign: number) => new Array(B.cols).fill(sign * 1e9);
  return {
    predictor: linearPredictor(A, B, C),
    horizon,
    blocks: new Array(horizon).fill(1),
    Q: identity(C.rows),
    S: zeros(B.cols, B.cols),
    R: diagonal(new Array(B.cols).fill(1)),
    terminal: 'none',
    inputLimits: { min: wide(-1), max: wide(1) },
    rateLimits: new Array(B.cols).fill(Number.POSITIVE_INFINITY),
    outputLimits: [],
    delay: 0,
    preview: true,
    disturbanceGain: 0,
    ...change,
  };
}

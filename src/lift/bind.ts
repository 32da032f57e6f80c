import { type Matrix, zeros } from '../numerics/matrix.ts';
import { familyOf } from './families.ts';
import type { BoundLifting, EvaluationContext, FamilyFunctions, Lifting, LiftingPart } from './lifting.ts';
import { refuseLifting, UnusableLiftingError } from './unusableLifting.ts';

/** A part's functions and where its kept ones go. */
interface BoundPart {
  readonly functions: FamilyFunctions;
  /** Index in `z` of the first kept function. */
  readonly offset: number;
  /** Null when all functions are kept: they are then evaluated in place. */
  readonly keep: Int32Array | null;
  readonly values: Float64Array;
  readonly gradients: Float64Array;
}

/**
 * Makes a lifting ready to be evaluated, without allocation in `liftInto` and `jacobianInto`. Two bindings are independent;
 * one binding must not be used inside its own evaluation, since it keeps its workspace.
 *
 * @throws UnusableLiftingError when a family is unknown, or the plant no longer offers a function.
 */
export function bindLifting(lifting: Lifting, context: EvaluationContext): BoundLifting {
  const { nx, nz } = lifting;
  const parts: BoundPart[] = [];
  let offset = 0;
  for (const [i, part] of lifting.parts.entries()) {
    parts.push(bindPart(part, offset, context, `lifting.parts[${i + 1}]`));
    offset += part.keep.length;
  }
  if (offset !== nz || context.nx !== nx) {
    throw new RangeError(`${offset} functions of ${context.nx} coordinates, not ${nz} of ${nx}`);
  }
  return {
    nx,
    nz,
    liftInto: (z, x) => {
      for (const part of parts) evaluatePart(part, z, x);
    },
    jacobianInto: (J, x) => {
      for (const part of parts) differentiatePart(part, J, x, nx);
    },
  };
}

function bindPart(part: LiftingPart, offset: number, context: EvaluationContext, key: string): BoundPart {
  const family =
    familyOf(part.family) ??
    refuseLifting(`${key}.family`, 'a known family', part.family, 'fit again with this version');
  let functions: FamilyFunctions;
  try {
    functions = family.functions(part.constants, context);
  } catch (error) {
    throw error instanceof UnusableLiftingError ? error.within(key) : error;
  }
  const { count } = functions;
  const whole = part.keep.length === count && part.keep.every((index, i) => index === i);
  return {
    functions,
    offset,
    keep: whole ? null : Int32Array.from(part.keep),
    values: new Float64Array(whole ? 0 : count),
    gradients: new Float64Array(whole ? 0 : count * context.nx),
  };
}

function evaluatePart(part: BoundPart, z: Float64Array, x: ArrayLike<number>): void {
  const { functions, offset, keep, values } = part;
  if (keep === null) {
    functions.evaluateInto(z, offset, x);
    return;
  }
  functions.evaluateInto(values, 0, x);
  for (let i = 0; i < keep.length; i++) z[offset + i] = values[keep[i]];
}

function differentiatePart(part: BoundPart, J: Float64Array, x: ArrayLike<number>, nx: number): void {
  const { functions, offset, keep, gradients } = part;
  if (keep === null) {
    functions.gradientInto(J, offset, x);
    return;
  }
  functions.gradientInto(gradients, 0, x);
  for (let i = 0; i < keep.length; i++) {
    for (let j = 0; j < nx; j++) J[(offset + i) * nx + j] = gradients[keep[i] * nx + j];
  }
}

/** `Z = psi(X)` row by row. @param X rows × nx, row-major, scaled. @returns rows × nz. */
export function liftRows(bound: BoundLifting, X: Float64Array): Matrix {
  const { nx, nz } = bound;
  const Z = zeros(X.length / nx, nz);
  for (let k = 0; k < Z.rows; k++) {
    bound.liftInto(Z.data.subarray(k * nz, (k + 1) * nz), X.subarray(k * nx, (k + 1) * nx));
  }
  return Z;
}

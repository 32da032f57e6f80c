import type { ChannelScaling, Dataset, Role, Scaling } from '../data/dataset.ts';
import type { BoundLifting } from '../lift/lifting.ts';
import { type Allocate, createRowBlock, type RowBlock } from '../numerics/rowBlock.ts';
import { UnusableDataError } from './unusableData.ts';

/** What one row `[z, u, uᵢ z]` of the regression holds and where. */
export interface RegressorLayout {
  readonly nz: number;
  readonly nu: number;
  /** One name a regressor: functions, inputs, then products `u·function` input by input. */
  readonly names: readonly string[];
  /**
   * For each regressor after the first nz + nu: which input times which function. The constant function is left out,
   * since its product is the input itself.
   */
  readonly products: readonly { readonly input: number; readonly of: number }[];
  /** Index of the constant function, −1 if there is none. */
  readonly constant: number;
}

/** The regressors of a predictor of this form. */
export function layOutRegressors(
  form: 'linear' | 'bilinear',
  functions: readonly string[],
  inputs: readonly string[],
  constant: number,
): RegressorLayout {
  const products = [];
  if (form === 'bilinear') {
    for (let input = 0; input < inputs.length; input++) {
      for (let of = 0; of < functions.length; of++) if (of !== constant) products.push({ input, of });
    }
  }
  const names = [
    ...functions,
    ...inputs,
    ...products.map(({ input, of }) => `${inputs[input]}·${functions[of]}`),
  ];
  return { nz: functions.length, nu: inputs.length, names, products, constant };
}

/** `out[at + i] = (values[from + i] − centre[i]) / half[i]`. */
export function scaleInto(
  out: Float64Array,
  at: number,
  values: ArrayLike<number>,
  from: number,
  scaling: ChannelScaling,
): void {
  const { centre, half } = scaling;
  for (let i = 0; i < half.length; i++) out[at + i] = (values[from + i] - centre[i]) / half[i];
}

export interface RegressionStream {
  readonly dataset: Dataset;
  readonly role: Role;
  readonly bound: BoundLifting;
  readonly scaling: Scaling;
  readonly layout: RegressorLayout;
  /** Called as the samples are gone through, with the share that is done, 0 … 1. */
  readonly onProgress?: (share: number) => void;
}

/** Rows a block: enough to hide the work per block, few enough for the second-level cache. */
export const BLOCK_ROWS = 128;

/**
 * Goes through the pairs `(x_k, u_k) → x_{k+1}` of one role and hands them over in blocks of rows
 * `[z_k, u_k, uᵢ z_k | z_{k+1}]`, scaled and lifted. A pair never spans two trajectories. Memory does not grow with the
 * number of samples; each sample is lifted once.
 *
 * @param allocate where the block's memory comes from. @param visit gets the block and how many of its rows are filled; it may overwrite it.
 * @returns the number of pairs.
 */
export function streamRows(
  stream: RegressionStream,
  allocate: Allocate,
  visit: (block: RowBlock, count: number) => void,
): number {
  const { dataset, role, bound, scaling, layout, onProgress } = stream;
  const { nz, nu, products } = layout;
  const { nx } = bound;
  const block = createRowBlock(BLOCK_ROWS, layout.names.length, nz, allocate);
  const { data, stride, targets } = block;
  const next = Array.from({ length: BLOCK_ROWS }, (_, r) =>
    data.subarray(r * stride + targets, r * stride + targets + nz),
  );
  const x = new Float64Array(nx);
  const z = new Float64Array(nz);
  const trajectories = dataset.trajectories.filter((t) => t.role === role && t.steps > 0);
  const total = trajectories.reduce((sum, t) => sum + t.steps, 0);
  let filled = 0;
  let samples = 0;
  for (const trajectory of trajectories) {
    scaleInto(x, 0, trajectory.x, 0, scaling.x);
    bound.liftInto(z, x);
    for (let k = 0; k < trajectory.steps; k++) {
      const row = filled * stride;
      data.set(z, row);
      scaleInto(data, row + nz, trajectory.u, k * nu, scaling.u);
      for (let i = 0; i < products.length; i++) {
        data[row + nz + nu + i] = data[row + nz + products[i].input] * z[products[i].of];
      }
      scaleInto(x, 0, trajectory.x, (k + 1) * nx, scaling.x);
      bound.liftInto(next[filled], x);
      z.set(next[filled]);
      samples++;
      if (++filled === BLOCK_ROWS) {
        visit(block, filled);
        filled = 0;
        onProgress?.(samples / total);
      }
    }
  }
  if (filled > 0) visit(block, filled);
  onProgress?.(1);
  return samples;
}

/** The order in which regressors may express others: the constant, then as they stand. */
export function columnOrder(p: number, constant: number): number[] {
  const others = Array.from({ length: p }, (_, j) => j).filter((j) => j !== constant);
  return constant < 0 ? others : [constant, ...others];
}

/**
 * Refuses sums over samples that hold NaN or infinity.
 * @throws UnusableDataError with the name of a function whose values did it.
 */
export function refuseNonFinite(
  sums: Float64Array,
  targetSquares: Float64Array,
  layout: RegressorLayout,
): void {
  if (sums.length === 0) {
    throw new UnusableDataError('there are no samples to fit: give some trajectories the role of fitting');
  }
  const bad = targetSquares.findIndex((square) => !Number.isFinite(square));
  const inputs = sums.findIndex((sum) => !Number.isFinite(sum));
  if (bad < 0 && inputs < 0) return;
  const what = bad >= 0 ? `the function ${layout.names[bad]}` : 'a function or an input';
  throw new UnusableDataError(
    `${what} is not finite on the fitting data: leave it out, or keep the data inside its domain`,
  );
}

import type { Dataset, Scaling } from '../data/dataset.ts';
import type { BoundLifting, Lifting } from '../lift/lifting.ts';
import { type Matrix, zeros } from '../numerics/matrix.ts';
import type { Channel } from '../plant/plant.ts';
import { chooseRidge, type RidgeChoice } from './chooseRidge.ts';
import { conditionOf, digitsLostWith, type RegressionFactor } from './factor.ts';
import type { PredictorMatrices } from './predict.ts';
import type { FitSummary, Predictor, PredictorSettings } from './predictor.ts';
import { layOutRegressors, type RegressorLayout } from './regressors.ts';
import { factorRegression } from './route.ts';
import { cutWindows, typicalLength } from './windows.ts';

export interface FitRequest {
  readonly dataset: Dataset;
  readonly lifting: Lifting;
  readonly bound: BoundLifting;
  readonly scaling: Scaling;
  readonly outputs: readonly Channel[];
  /** For each output the index in `z` that reads it. */
  readonly readout: readonly number[];
  readonly settings: Pick<PredictorSettings, 'form' | 'route' | 'ridge'>;
  /** Steps ahead over which the ridge is chosen. */
  readonly horizon: number;
  /** Share of the work that is done, 0 … 1. */
  readonly onProgress?: (share: number) => void;
}

/** Windows on which a ridge is chosen; the bilinear form costs nz/nx times more a window. */
const CHOOSE_WINDOWS = { linear: 400, bilinear: 100 } as const;

/**
 * Regresses `z⁺ ≈ A z + B u (+ Σᵢ uᵢ Nᵢ z)` on the trajectories that are to be fitted:
 * `min Σₖ ‖z_{k+1} − A z_k − B u_k − …‖² + M ρ ‖θ_s‖²`, M samples, `θ_s` the coefficients of regressors standardised to mean
 * square one, the constant function's left out. ρ is the ridge: a number, or the one of `RIDGE_GRID` with the smallest
 * error over `horizon` steps on the choosing trajectories (0 where there is none long enough for one step).
 *
 * The constant function's row is not regressed: it is known, `A` there is the selector of the constant itself and no
 * input moves it. With deficient rank the functions and inputs that others express are named in `fit.dependent`,
 * and the solution is the one of least norm.
 *
 * @throws UnusableDataError when there is no sample to fit or a function is not finite on the data.
 */
export function fitPredictor(request: FitRequest): Predictor {
  const { dataset, lifting, bound, scaling, settings, onProgress } = request;
  const inputs = dataset.inputs.map((input) => input.name);
  const layout = layOutRegressors(settings.form, lifting.names, inputs, lifting.constantIndex);
  const stream = {
    dataset,
    role: 'fit' as const,
    bound,
    scaling,
    layout,
    onProgress: (share: number) => onProgress?.(0.8 * share),
  };
  const factor = factorRegression(stream, settings.route);
  const matrices = (theta: Matrix) => splitCoefficients(theta, layout);
  const { ridge, tried } = pickRidge(request, factor, matrices);
  const theta = factor.solve(ridge);
  const { A, B, N } = matrices(theta);
  onProgress?.(1);
  return {
    form: settings.form,
    sampleTime: dataset.sampleTime,
    coordinates: dataset.coordinates,
    inputs: dataset.inputs,
    outputs: request.outputs,
    scaling,
    lifting,
    A,
    B,
    C: selectRows(request.readout, lifting.nz),
    N,
    fit: summarise(factor, theta, layout, ridge, tried),
  };
}

function pickRidge(
  request: FitRequest,
  factor: RegressionFactor,
  matrices: (theta: Matrix) => PredictorMatrices,
): RidgeChoice {
  const { dataset, bound, scaling, settings, horizon, onProgress } = request;
  if (settings.ridge !== null) return { ridge: settings.ridge, tried: [] };
  const steps = Math.min(horizon, typicalLength(dataset, 'choose'));
  if (!(steps >= 1)) return { ridge: 0, tried: [] };
  const windows = cutWindows(dataset, 'choose', scaling, steps, CHOOSE_WINDOWS[settings.form]);
  return chooseRidge(factor, windows, bound, matrices, (share) => onProgress?.(0.8 + 0.2 * share));
}

/** `A`, `B` and `Nᵢ` from the coefficients (regressors × nz); the constant's row set to what is known. */
function splitCoefficients(theta: Matrix, layout: RegressorLayout): PredictorMatrices {
  const { nz, nu, products, constant } = layout;
  const A = zeros(nz, nz);
  const B = zeros(nz, nu);
  const N = products.length > 0 ? Array.from({ length: nu }, () => zeros(nz, nz)) : [];
  for (let i = 0; i < nz; i++) {
    if (i === constant) {
      A.data[i * nz + i] = 1;
      continue;
    }
    for (let j = 0; j < nz; j++) A.data[i * nz + j] = theta.data[j * nz + i];
    for (let m = 0; m < nu; m++) B.data[i * nu + m] = theta.data[(nz + m) * nz + i];
    products.forEach(({ input, of }, k) => {
      N[input].data[i * nz + of] = theta.data[(nz + nu + k) * nz + i];
    });
  }
  return { A, B, N };
}

/** The selection matrix that reads the given entries. */
export function selectRows(indices: readonly number[], nz: number): Matrix {
  const C = zeros(indices.length, nz);
  indices.forEach((index, row) => {
    C.data[row * nz + index] = 1;
  });
  return C;
}

function summarise(
  factor: RegressionFactor,
  theta: Matrix,
  layout: RegressorLayout,
  ridge: number,
  ridgesTried: FitSummary['ridgesTried'],
): FitSummary {
  const squares = factor.residualSquares(theta);
  return {
    route: factor.route,
    samples: factor.samples,
    condition: conditionOf(factor),
    digitsLost: digitsLostWith(factor, ridge),
    ridge,
    ridgesTried,
    rank: factor.rank,
    regressors: layout.names.length,
    dependent: factor.dependent.map((index) => layout.names[index]),
    residuals: Array.from(squares, (square, i) => {
      if (i === layout.constant || factor.targetSquares[i] === 0) return 0;
      return Math.sqrt(square / factor.targetSquares[i]);
    }),
  };
}

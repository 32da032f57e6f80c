import type { Dataset, Scaling } from '../data/dataset.ts';
import type { BoundLifting, Lifting } from '../lift/lifting.ts';
import { exponentiate } from '../numerics/exponential.ts';
import { zeros } from '../numerics/matrix.ts';
import { type Channel, nominalParameters, type ParameterValues, type Plant } from '../plant/plant.ts';
import { fitPredictor, selectRows } from './fit.ts';
import type { Predictor } from './predictor.ts';
import { UnusableDataError } from './unusableData.ts';

/** The lifting that lifts nothing: the coordinates and the constant, `z = (x, 1)`. */
export function plainLifting(coordinates: readonly Channel[]): Lifting {
  const nx = coordinates.length;
  const names = coordinates.map((channel) => channel.name);
  return {
    nx,
    nz: nx + 1,
    names: [...names, '1'],
    parts: [
      { family: 'state', names, keep: names.map((_, i) => i), constants: {} },
      { family: 'constant', names: ['1'], keep: [0], constants: {} },
    ],
    dropped: [],
    constantIndex: nx,
  };
}

/** `plainLifting`, ready to be evaluated. */
export function bindPlainLifting(nx: number): BoundLifting {
  return {
    nx,
    nz: nx + 1,
    liftInto: (z, x) => {
      for (let i = 0; i < nx; i++) z[i] = x[i];
      z[nx] = 1;
    },
    jacobianInto: (J) => {
      J.fill(0);
      for (let i = 0; i < nx; i++) J[i * nx + i] = 1;
    },
  };
}

/**
 * The rival that every lifting has to beat: the same regression with the state and a constant only,
 * `x⁺ ≈ A x + B u + c`, by the orthogonal route without ridge.
 *
 * @param readout for each output the coordinate that it is.
 * @throws UnusableDataError as `fitPredictor`.
 */
export function fitPlainLinear(request: {
  readonly dataset: Dataset;
  readonly scaling: Scaling;
  readonly outputs: readonly Channel[];
  readonly readout: readonly number[];
}): Predictor {
  const { coordinates } = request.dataset;
  return fitPredictor({
    ...request,
    lifting: plainLifting(coordinates),
    bound: bindPlainLifting(coordinates.length),
    settings: { form: 'linear', route: 'orthogonal', ridge: 0 },
    horizon: 1,
  });
}

export interface LinearisationRequest {
  readonly plant: Plant;
  /** About where: state nx and input nu, physical; need not be an equilibrium. */
  readonly operatingPoint: { readonly x: readonly number[]; readonly u: readonly number[] };
  /** Seconds. */
  readonly sampleTime: number;
  readonly scaling: Scaling;
  readonly outputs: readonly Channel[];
  /** For each output the state that it is. */
  readonly readout: readonly number[];
  /** Nominal values when left out. */
  readonly parameters?: ParameterValues;
}

/**
 * The plant linearised at a point and discretised exactly for an input held over the sample:
 * `δẋ = F δx + G δu + f₀` with `F, G` by central differences; `e^{[F G f₀; 0] Ts}` holds `A_d, B_d` and the drift.
 * Given as a predictor with the lifting `z = (x, 1)` in scaled coordinates; the affine part is the constant's column.
 *
 * Accuracy: steps of ε^{1/3} of a channel's half range, error about ε^{2/3} of the second derivatives' scale.
 * @throws UnusableDataError when the derivative at or about the point is not finite.
 */
export function linearisePredictor(request: LinearisationRequest): Predictor {
  const { plant, operatingPoint, sampleTime, scaling, outputs, readout } = request;
  const nx = plant.states.length;
  const nu = plant.inputs.length;
  const parameters = request.parameters ?? nominalParameters(plant);
  // Scaled coordinates: ẋ_s,i = f_i / half_i.
  const derivative = (x: readonly number[], u: readonly number[]) =>
    Array.from(plant.derivative(x, u, parameters), (value, i) => value / scaling.x.half[i]);
  const { x: x0, u: u0 } = operatingPoint;
  const order = nx + nu + 1;
  const M = zeros(order, order);
  derivative(x0, u0).forEach((value, i) => {
    M.data[i * order + nx + nu] = value * sampleTime;
  });
  const h = Math.cbrt(Number.EPSILON);
  const shift = (values: readonly number[], j: number, by: number) =>
    values.map((value, i) => (i === j ? value + by : value));
  for (let j = 0; j < nx + nu; j++) {
    const half = j < nx ? scaling.x.half[j] : scaling.u.half[j - nx];
    const at = (sign: number) =>
      j < nx
        ? derivative(shift(x0, j, sign * h * half), u0)
        : derivative(x0, shift(u0, j - nx, sign * h * half));
    const ahead = at(1);
    const behind = at(-1);
    for (let i = 0; i < nx; i++) M.data[i * order + j] = ((ahead[i] - behind[i]) / (2 * h)) * sampleTime;
  }
  if (!M.data.every(Number.isFinite)) {
    throw new UnusableDataError(
      'the derivative of the plant is not finite at its operating point: move the point',
    );
  }
  const nz = nx + 1;
  const E = exponentiate(M);
  const A = zeros(nz, nz);
  const B = zeros(nz, nu);
  A.data[nx * nz + nx] = 1;
  for (let i = 0; i < nx; i++) {
    // x⁺ = x0 + A_d (x − x0) + B_d (u − u0) + drift, all scaled.
    let affine = (x0[i] - scaling.x.centre[i]) / scaling.x.half[i] + E.data[i * order + nx + nu];
    for (let j = 0; j < nx; j++) {
      const a = E.data[i * order + j];
      A.data[i * nz + j] = a;
      affine -= (a * (x0[j] - scaling.x.centre[j])) / scaling.x.half[j];
    }
    for (let m = 0; m < nu; m++) {
      const b = E.data[i * order + nx + m];
      B.data[i * nu + m] = b;
      affine -= (b * (u0[m] - scaling.u.centre[m])) / scaling.u.half[m];
    }
    A.data[i * nz + nx] = affine;
  }
  return {
    form: 'linear',
    sampleTime,
    coordinates: plant.states,
    inputs: plant.inputs,
    outputs,
    scaling,
    lifting: plainLifting(plant.states),
    A,
    B,
    C: selectRows(readout, nz),
    N: [],
    fit: {
      route: 'given',
      samples: 0,
      condition: 1,
      digitsLost: 0,
      ridge: 0,
      ridgesTried: [],
      rank: nz + nu,
      regressors: nz + nu,
      dependent: [],
      residuals: new Array(nz).fill(0),
    },
  };
}

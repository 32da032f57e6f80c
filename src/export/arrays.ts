import type { LiftingPart, PartConstant } from '../lift/lifting.ts';
import type { ControllerDesign } from '../mpc/problem.ts';
import type { Matrix } from '../numerics/matrix.ts';

/** The sizes that shapes are made of, by the names that README and header give them. */
export type SizeName = keyof ReturnType<typeof sizesOf>;

/** One exported array with everything that a reader must know of it. */
export interface ExportedArray {
  /** Name in all files; a letter of the formulas where there is one. */
  readonly name: string;
  readonly matrix: Matrix;
  /** Names of its sizes; a vector has one. Numbers where no name stands for them. */
  readonly shape: readonly (SizeName | number)[];
  /** `scaled`, a unit, or one unit an entry. */
  readonly unit: string;
  readonly meaning: string;
  /** Where it comes from: the key in controller.json. */
  readonly origin: string;
  /** Whole numbers: orders, indices, lengths. */
  readonly whole?: boolean;
}

/** The sizes of a design. */
export function sizesOf({ qp, problem }: ControllerDesign) {
  const { nz, nu, ny } = qp;
  return {
    NX: problem.predictor.coordinates.length,
    NU: nu,
    NY: ny,
    NZ: nz,
    /** Horizon. */
    N: qp.N,
    /** Input blocks. */
    NBLOCKS: qp.blocks.length,
    /** Free moves: blocks times inputs. */
    NMOVES: qp.n,
    /** Rows of the limits. */
    NROWS: qp.m,
    NTHETA: qp.ntheta,
    /** Of the target's argument (r_N, d, 1). */
    NTARGET: ny + nz + 1,
    /** Of the terminal weight: lifted state and last input. */
    NEND: nz + nu,
  };
}

/** What each size is. */
export const SIZE_MEANINGS: Readonly<Record<SizeName, string>> = {
  NX: 'coordinates that are measured',
  NU: 'inputs',
  NY: 'outputs',
  NZ: 'lifted state',
  N: 'horizon, steps',
  NBLOCKS: 'input blocks over the horizon',
  NMOVES: 'free moves U = NBLOCKS * NU',
  NROWS: 'rows of the limits',
  NTHETA: 'parameter vector theta',
  NTARGET: 'argument (r_N, d, 1) of the steady-state target = NY + NZ + 1',
  NEND: 'argument of the terminal weight = NZ + NU',
};

const SCALED = 'scaled';

/** The matrices and vectors of predictor and quadratic program: each is also a Matrix Market file. */
export function listMatrices(design: ControllerDesign): readonly ExportedArray[] {
  const { problem, qp, K, P, Tz, Tu } = design;
  const { predictor } = problem;
  const row = (
    name: string,
    matrix: Matrix | Float64Array,
    shape: ExportedArray['shape'],
    origin: string,
    meaning: string,
  ): ExportedArray => ({
    name,
    matrix: matrix instanceof Float64Array ? columnOf(matrix) : matrix,
    shape,
    unit: SCALED,
    meaning,
    origin: `${origin}.${name}`,
  });
  return [
    row(
      'A',
      predictor.A,
      ['NZ', 'NZ'],
      'predictor',
      'predictor z+ = A z + B u + d: effect of the lifted state',
    ),
    row('B', predictor.B, ['NZ', 'NU'], 'predictor', 'predictor z+ = A z + B u + d: effect of the inputs'),
    row('C', predictor.C, ['NY', 'NZ'], 'predictor', 'readout y = C z, a selection'),
    ...predictor.N.map(
      (matrix, i): ExportedArray => ({
        ...row(
          `N${i + 1}`,
          matrix,
          ['NZ', 'NZ'],
          'predictor',
          `bilinear block of input ${i + 1}, not used by this quadratic program`,
        ),
        origin: `predictor.N[${i}]`,
      }),
    ),
    row('H', qp.H, ['NMOVES', 'NMOVES'], 'qp', "Hessian of the cost U' H U / 2 + (F theta)' U, symmetric"),
    row('F', qp.F, ['NMOVES', 'NTHETA'], 'qp', 'gradient of the cost: q = F theta'),
    row('G', qp.G, ['NROWS', 'NMOVES'], 'qp', 'rows of the limits Wl + E theta <= G U + e <= Wu + E theta'),
    row('E', qp.E, ['NROWS', 'NTHETA'], 'qp', 'shift of both bounds with theta'),
    row('Wl', qp.Wl, ['NROWS'], 'qp', 'lower bounds before the shift; -infinity where there is none'),
    row('Wu', qp.Wu, ['NROWS'], 'qp', 'upper bounds before the shift; infinity where there is none'),
    row(
      'softness',
      qp.softness,
      ['NROWS'],
      'qp',
      '0: hard row, e = 0; else the slack e costs e^2 / (2 softness)',
    ),
    row('K', K, ['NU', 'NTHETA'], 'law', 'first move where no limit is active: u_0 = -K theta'),
    row(
      'P',
      P,
      ['NEND', 'NEND'],
      'law',
      'terminal weight on (z_N - z_s, u_N-1 - u_s), already in H and F; zero when there is none',
    ),
    row('Tz', Tz, ['NZ', 'NTARGET'], 'law', 'steady state z_s = Tz (r_N, d, 1), already in H and F'),
    row('Tu', Tu, ['NU', 'NTARGET'], 'law', 'steady input u_s = Tu (r_N, d, 1), already in H and F'),
  ];
}

/** Scaling, limits, weights and the table of rows: in the header and controller.json. */
export function listSettings({ problem, qp }: ControllerDesign): readonly ExportedArray[] {
  const { predictor, inputLimits, rateLimits, Q, S, R } = problem;
  const { scaling, coordinates, inputs, outputs } = predictor;
  const units = (channels: readonly { name: string; unit: string }[], per = '') =>
    channels.map(({ name, unit }) => `${name} ${unit}${per}`).join(', ');
  const vector = (
    name: string,
    values: ArrayLike<number>,
    size: SizeName,
    unit: string,
    origin: string,
    meaning: string,
    whole?: boolean,
  ): ExportedArray => ({ name, matrix: columnOf(values), shape: [size], unit, origin, meaning, whole });
  const map = 'scaled = (physical - centre) / half';
  const kinds = ['input', 'rate', 'output'];
  return [
    vector('x_centre', scaling.x.centre, 'NX', units(coordinates), 'scaling.coordinates[].centre', map),
    vector('x_half', scaling.x.half, 'NX', units(coordinates), 'scaling.coordinates[].half', map),
    vector('u_centre', scaling.u.centre, 'NU', units(inputs), 'scaling.inputs[].centre', map),
    vector('u_half', scaling.u.half, 'NU', units(inputs), 'scaling.inputs[].half', map),
    vector('y_centre', scaling.y.centre, 'NY', units(outputs), 'scaling.outputs[].centre', map),
    vector('y_half', scaling.y.half, 'NY', units(outputs), 'scaling.outputs[].half', map),
    vector(
      'u_min',
      inputLimits.min,
      'NU',
      units(inputs),
      'problem.inputLimits.min',
      'hard lower limit of the input; clamp to it',
    ),
    vector(
      'u_max',
      inputLimits.max,
      'NU',
      units(inputs),
      'problem.inputLimits.max',
      'hard upper limit of the input; clamp to it',
    ),
    vector(
      'u_rate',
      rateLimits,
      'NU',
      units(inputs, '/s'),
      'problem.rateLimits',
      'fastest change of the input; infinity where there is none',
    ),
    {
      name: 'Q',
      matrix: Q,
      shape: ['NY', 'NY'],
      unit: SCALED,
      origin: 'problem.Q',
      meaning: 'weight on y - r, already in H and F',
    },
    {
      name: 'S',
      matrix: S,
      shape: ['NU', 'NU'],
      unit: SCALED,
      origin: 'problem.S',
      meaning: 'weight on u - u_s, already in H and F',
    },
    {
      name: 'R',
      matrix: R,
      shape: ['NU', 'NU'],
      unit: SCALED,
      origin: 'problem.R',
      meaning: 'weight on the move of u, already in H and F',
    },
    vector('blocks', qp.blocks, 'NBLOCKS', 'steps', 'qp.blocks', 'length of each input block', true),
    vector(
      'row_kind',
      qp.rows.map(({ kind }) => kinds.indexOf(kind)),
      'NROWS',
      '0 input, 1 rate, 2 output',
      'qp.rows[].kind',
      'what each row limits',
      true,
    ),
    vector(
      'row_channel',
      qp.rows.map(({ channel }) => channel),
      'NROWS',
      'index of input or output',
      'qp.rows[].channel',
      'whose limit it is, from 0',
      true,
    ),
    vector(
      'row_step',
      qp.rows.map(({ step }) => step),
      'NROWS',
      'steps',
      'qp.rows[].step',
      'when it holds: 0 is now for inputs, 1 the next sample for outputs',
      true,
    ),
  ];
}

/** Constants that are indices or orders, whatever their values. */
const WHOLE = ['orders', 'reads'];

/**
 * Number constants of the lifting's parts that have entries in z, and which of their functions these are; names and texts are
 * left to comments.
 */
export function listLiftingConstants({ problem }: ControllerDesign): readonly ExportedArray[] {
  return problem.predictor.lifting.parts.flatMap((part, i) =>
    part.keep.length === 0 ? [] : [listKept(part, i), ...listConstants(part, i)],
  );
}

function listKept({ family, keep }: LiftingPart, i: number): ExportedArray {
  return {
    name: `part${i + 1}_keep`,
    matrix: columnOf(keep),
    shape: [keep.length],
    unit: 'index from 0',
    meaning: `functions of part ${i + 1}, ${family}, that are entries of z, in this order`,
    origin: `lifting.parts[${i}].keep`,
    whole: true,
  };
}

function listConstants({ family, constants }: LiftingPart, i: number): ExportedArray[] {
  // The functions of a plant are in physical units, and so is the map of their values.
  const isPhysical = 'functions' in constants;
  return Object.entries(constants).flatMap(([key, value]): ExportedArray[] => {
    const rows = numberRows(value);
    if (rows === null || rows.length === 0 || rows[0].length === 0) return [];
    const whole = WHOLE.includes(key);
    const isTable = Array.isArray(value) && Array.isArray(value[0]);
    return [
      {
        name: `part${i + 1}_${key}`,
        matrix: { rows: rows.length, cols: rows[0].length, data: Float64Array.from(rows.flat()) },
        shape: isTable ? [rows.length, rows[0].length] : [rows.length],
        unit: whole ? 'whole numbers' : isPhysical ? 'unit of each function' : SCALED,
        meaning: `${key} of part ${i + 1}, ${family}`,
        origin: `lifting.parts[${i}].constants.${key}`,
        whole,
      },
    ];
  });
}

/** A constant as rows of numbers of one length; a list becomes rows of one. Null for anything else. */
function numberRows(value: PartConstant): number[][] | null {
  if (typeof value === 'number') return [[value]];
  if (!Array.isArray(value)) return null;
  const rows = value.map((row: PartConstant) => (Array.isArray(row) ? row : [row]));
  const isEven = rows.every(
    (row) => row.length === rows[0].length && row.every((entry) => typeof entry === 'number'),
  );
  return isEven ? (rows as number[][]) : null;
}

function columnOf(values: ArrayLike<number>): Matrix {
  return { rows: values.length, cols: 1, data: Float64Array.from(values) };
}

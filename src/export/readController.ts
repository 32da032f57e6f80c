import type { Lifting, LiftingPart, PartConstant } from '../lift/lifting.ts';
import type { CondensedQp, ControllerDesign, ControlProblem } from '../mpc/problem.ts';
import type { InputChannel } from '../plant/plant.ts';
import type { FitSummary, Predictor } from '../predictor/predictor.ts';
import { CONTROLLER_FORMAT, CONTROLLER_FORMAT_VERSION } from './options.ts';
import { type Field, readFields, UnusableControllerError } from './readFields.ts';

export { UnusableControllerError };

/** What `controller.json` holds. */
export interface ControllerFile {
  readonly program: string;
  readonly name: string;
  readonly title: string;
  readonly hashes: { readonly study: string; readonly data: string };
  readonly plantName: string;
  /** Bit for bit the design that was exported. */
  readonly design: ControllerDesign;
}

/**
 * Reads `controller.json`: the inverse of `controllerDocument` and `writeJson`. All shapes are checked against one another.
 *
 * @throws UnusableControllerError naming the key that is missing, of the wrong kind or of the wrong size.
 */
export function readController(text: string): ControllerFile {
  let parsed: unknown;
  try {
    parsed = JSON.parse(text);
  } catch {
    throw new UnusableControllerError('controller', 'JSON', text);
  }
  const file = readFields(parsed);
  file.at('format').oneOf([CONTROLLER_FORMAT]);
  const version = file.at('formatVersion');
  if (version.whole() !== CONTROLLER_FORMAT_VERSION) version.refuse(String(CONTROLLER_FORMAT_VERSION));
  const predictor = readPredictor(file);
  const problem = readProblem(file.at('problem'), predictor);
  const qp = readQp(file.at('qp'), problem);
  const law = file.at('law');
  const notes = law.at('notes');
  const { nu, ny, nz } = qp;
  return {
    program: file.at('program').text(),
    name: file.at('name').text(),
    title: file.at('title').text(),
    hashes: { study: file.at('hashes').at('study').text(), data: file.at('hashes').at('data').text() },
    plantName: file.at('plant').at('name').text(),
    design: {
      problem,
      qp,
      K: law.at('K').matrix(nu, qp.ntheta),
      P: law.at('P').matrix(nz + nu, nz + nu),
      Tz: law.at('Tz').matrix(nz, ny + nz + 1),
      Tu: law.at('Tu').matrix(nu, ny + nz + 1),
      notes: {
        clippedModes: notes.at('clippedModes').whole(),
        riccatiResidual: notes.at('riccatiResidual').real(),
        riccatiConverged: notes.at('riccatiConverged').flag(),
      },
    },
  };
}

function readChannels(list: Field): { channels: InputChannel[]; centre: number[]; half: number[] } {
  const fields = list.list();
  return {
    channels: fields.map((field) => ({
      name: field.at('name').text(),
      unit: field.at('unit').text(),
      min: field.at('min').finite(),
      max: field.at('max').finite(),
      ...(field.at('rate').present ? { rate: field.at('rate').finite() } : {}),
    })),
    centre: fields.map((field) => field.at('centre').finite()),
    half: fields.map((field) => field.at('half').finite()),
  };
}

function readPredictor(file: Field): Predictor {
  const scaling = file.at('scaling');
  const x = readChannels(scaling.at('coordinates'));
  const u = readChannels(scaling.at('inputs'));
  const y = readChannels(scaling.at('outputs'));
  const lifting = readLifting(file.at('lifting'), x.channels.length);
  const { nz } = lifting;
  const own = file.at('predictor');
  return {
    form: own.at('form').oneOf(['linear', 'bilinear']),
    sampleTime: file.at('sampleTime').finite(),
    coordinates: x.channels,
    inputs: u.channels,
    outputs: y.channels,
    scaling: {
      x: { centre: x.centre, half: x.half },
      u: { centre: u.centre, half: u.half },
      y: { centre: y.centre, half: y.half },
    },
    lifting,
    A: own.at('A').matrix(nz, nz),
    B: own.at('B').matrix(nz, u.channels.length),
    C: own.at('C').matrix(y.channels.length, nz),
    N: own
      .at('N')
      .list()
      .map((block) => block.matrix(nz, nz)),
    fit: readFit(own.at('fit')),
  };
}

function readLifting(field: Field, nx: number): Lifting {
  const nz = field.at('nz').whole(1);
  const names = field
    .at('names')
    .list()
    .map((name) => name.text());
  if (field.at('nx').whole() !== nx) field.at('nx').refuse(`${nx}, the number of coordinates`);
  if (names.length !== nz) field.at('names').refuse(`a list of ${nz} names`);
  const parts = field
    .at('parts')
    .list()
    .map(
      (part): LiftingPart => ({
        family: part.at('family').text(),
        names: part
          .at('names')
          .list()
          .map((name) => name.text()),
        keep: part
          .at('keep')
          .list()
          .map((index) => index.whole()),
        constants: Object.fromEntries(
          part
            .at('constants')
            .entries()
            .map(([key, value]) => [key, readConstant(value)]),
        ),
      }),
    );
  if (parts.reduce((sum, { keep }) => sum + keep.length, 0) !== nz) {
    field.at('parts').refuse(`parts that keep ${nz} functions in all`);
  }
  const constantIndex = field.at('constantIndex').whole(-1);
  if (constantIndex >= nz) field.at('constantIndex').refuse(`below ${nz}`);
  return {
    nx,
    nz,
    names,
    parts,
    dropped: field
      .at('dropped')
      .list()
      .map((one) => ({ name: one.at('name').text(), sameAs: one.at('sameAs').text() })),
    constantIndex,
  };
}

function readConstant(field: Field): PartConstant {
  if (Array.isArray(field.raw)) return field.list().map(readConstant);
  if (typeof field.raw === 'boolean') return field.raw;
  return typeof field.raw === 'string' ? field.raw : field.finite();
}

function readFit(field: Field): FitSummary {
  return {
    route: field.at('route').oneOf(['gram', 'orthogonal', 'given']),
    samples: field.at('samples').whole(),
    condition: field.at('condition').real(),
    digitsLost: field.at('digitsLost').real(),
    ridge: field.at('ridge').real(),
    ridgesTried: field
      .at('ridgesTried')
      .list()
      .map((tried) => ({
        ridge: tried.at('ridge').real(),
        error: tried.at('error').real(),
      })),
    rank: field.at('rank').whole(),
    regressors: field.at('regressors').whole(),
    dependent: field
      .at('dependent')
      .list()
      .map((name) => name.text()),
    residuals: field.at('residuals').reals(),
  };
}

function readProblem(field: Field, predictor: Predictor): ControlProblem {
  const nu = predictor.inputs.length;
  const ny = predictor.outputs.length;
  const horizon = field.at('horizon').whole(1);
  const blocks = field
    .at('blocks')
    .list()
    .map((length) => length.whole(1));
  if (blocks.reduce((sum, length) => sum + length, 0) !== horizon) {
    field.at('blocks').refuse(`lengths that sum to the horizon of ${horizon}`);
  }
  return {
    predictor,
    horizon,
    blocks,
    Q: field.at('Q').matrix(ny, ny),
    S: field.at('S').matrix(nu, nu),
    R: field.at('R').matrix(nu, nu),
    terminal: field.at('terminal').oneOf(['none', 'riccati']),
    inputLimits: {
      min: field.at('inputLimits').at('min').reals(nu),
      max: field.at('inputLimits').at('max').reals(nu),
    },
    rateLimits: field.at('rateLimits').reals(nu),
    outputLimits: field
      .at('outputLimits')
      .list()
      .map((limit) => {
        const output = limit.at('output').whole();
        if (output >= ny) limit.at('output').refuse(`the index of one of ${ny} outputs`);
        return {
          output,
          min: limit.at('min').real(),
          max: limit.at('max').real(),
          weight: limit.at('weight').real(),
          fromStep: limit.at('fromStep').whole(),
        };
      }),
    delay: field.at('delay').whole(),
    preview: field.at('preview').flag(),
    disturbanceGain: field.at('disturbanceGain').finite(),
  };
}

function readQp(field: Field, { predictor, horizon, blocks }: ControlProblem): CondensedQp {
  const nz = predictor.lifting.nz;
  const nu = predictor.inputs.length;
  const ny = predictor.outputs.length;
  const n = blocks.length * nu;
  const theta = { z: 0, uPrev: nz, r: nz + nu, d: nz + nu + horizon * ny, one: 2 * nz + nu + horizon * ny };
  const ntheta = theta.one + 1;
  const m = field.at('m').whole();
  const due = { N: horizon, nu, ny, nz, n, ntheta };
  for (const [key, size] of Object.entries(due)) {
    if (field.at(key).whole() !== size) field.at(key).refuse(`${size}, as predictor and horizon have it`);
  }
  for (const [key, start] of Object.entries(theta)) {
    const given = field.at('theta').at(key);
    if (given.whole() !== start) given.refuse(String(start));
  }
  const rows = field
    .at('rows')
    .list()
    .map((row) => ({
      kind: row.at('kind').oneOf(['input', 'rate', 'output']),
      channel: row.at('channel').whole(),
      step: row.at('step').whole(),
    }));
  if (rows.length !== m) field.at('rows').refuse(`a list of ${m} rows`);
  const own = field
    .at('blocks')
    .list()
    .map((length) => length.whole(1));
  if (own.join() !== blocks.join()) field.at('blocks').refuse('the blocks of the problem');
  return {
    ...due,
    m,
    theta,
    H: field.at('H').matrix(n, n),
    F: field.at('F').matrix(n, ntheta),
    G: field.at('G').matrix(m, n),
    E: field.at('E').matrix(m, ntheta),
    Wl: Float64Array.from(field.at('Wl').reals(m)),
    Wu: Float64Array.from(field.at('Wu').reals(m)),
    softness: Float64Array.from(field.at('softness').reals(m)),
    rows,
    blocks: own,
    condition: field.at('condition').real(),
  };
}

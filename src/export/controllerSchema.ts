import { CONTROLLER_FORMAT, CONTROLLER_FORMAT_VERSION } from './options.ts';

type Schema = Readonly<Record<string, unknown>>;

const ref = (name: string): Schema => ({ $ref: `#/$defs/${name}` });
const text: Schema = { type: 'string' };
const flag: Schema = { type: 'boolean' };
const count: Schema = { type: 'integer', minimum: 0 };
const finite: Schema = { type: 'number' };
const positive: Schema = { type: 'number', exclusiveMinimum: 0 };
const list = (items: Schema, more: Schema = {}): Schema => ({ type: 'array', items, ...more });
/** An object with exactly these fields; those named in `optional` may be missing. */
const record = (fields: Readonly<Record<string, Schema>>, optional: readonly string[] = []): Schema => ({
  type: 'object',
  properties: fields,
  required: Object.keys(fields).filter((key) => !optional.includes(key)),
  additionalProperties: false,
});

const channel = (more: Readonly<Record<string, Schema>> = {}, optional: readonly string[] = []) =>
  record(
    { name: text, unit: text, min: finite, max: finite, ...more, centre: finite, half: positive },
    optional,
  );

/** JSON Schema (draft 2020-12) of `controller.json`; shapes that depend on one another are checked by `readController`. */
export const CONTROLLER_SCHEMA: Schema = {
  $schema: 'https://json-schema.org/draft/2020-12/schema',
  $id: `urn:liftwright:controller:${CONTROLLER_FORMAT_VERSION}`,
  title: 'A controller exported by liftwright',
  ...record({
    $schema: text,
    format: { const: CONTROLLER_FORMAT },
    formatVersion: { const: CONTROLLER_FORMAT_VERSION },
    program: { type: 'string', pattern: '^liftwright ' },
    name: text,
    title: text,
    hashes: record({ study: ref('sha256'), data: ref('sha256') }),
    seed: count,
    safety: record({ standing: list(text, { minItems: 1 }), plant: list(text) }),
    reading: record({ numbers: text, scaled: text, matrices: text }),
    plant: record({
      name: text,
      description: text,
      parameters: {
        type: 'object',
        additionalProperties: record({ unit: text, value: finite, tolerance: finite, meaning: text }, [
          'tolerance',
          'meaning',
        ]),
      },
    }),
    sampleTime: { ...positive, description: 'seconds' },
    scaling: record({
      coordinates: list(channel({ rate: positive }, ['rate']), { minItems: 1 }),
      inputs: list(channel({ rate: positive }, ['rate']), { minItems: 1 }),
      outputs: list(channel({ rate: positive }, ['rate']), { minItems: 1 }),
    }),
    lifting: record({
      nx: count,
      nz: count,
      names: list(text),
      parts: list(
        record({
          family: text,
          names: list(text),
          keep: list(count),
          constants: { type: 'object', additionalProperties: ref('constant') },
        }),
      ),
      dropped: list(record({ name: text, sameAs: text })),
      constantIndex: { type: 'integer', minimum: -1 },
    }),
    predictor: record({
      form: { enum: ['linear', 'bilinear'] },
      A: ref('matrix'),
      B: ref('matrix'),
      C: ref('matrix'),
      N: list(ref('matrix')),
      fit: record({
        route: { enum: ['gram', 'orthogonal', 'given'] },
        samples: count,
        condition: ref('real'),
        digitsLost: ref('real'),
        ridge: ref('real'),
        ridgesTried: list(record({ ridge: ref('real'), error: ref('real') })),
        rank: count,
        regressors: count,
        dependent: list(text),
        residuals: list(ref('real')),
      }),
    }),
    problem: record({
      horizon: { type: 'integer', minimum: 1 },
      blocks: list({ type: 'integer', minimum: 1 }, { minItems: 1 }),
      Q: ref('matrix'),
      S: ref('matrix'),
      R: ref('matrix'),
      terminal: { enum: ['none', 'riccati'] },
      inputLimits: record({ min: list(ref('real')), max: list(ref('real')) }),
      rateLimits: list(ref('real')),
      outputLimits: list(
        record({ output: count, min: ref('real'), max: ref('real'), weight: ref('real'), fromStep: count }),
      ),
      delay: count,
      preview: flag,
      disturbanceGain: { type: 'number', minimum: 0, maximum: 1 },
    }),
    qp: record({
      N: count,
      nu: count,
      ny: count,
      nz: count,
      n: count,
      m: count,
      ntheta: count,
      theta: record({ z: count, uPrev: count, r: count, d: count, one: count }),
      H: ref('matrix'),
      F: ref('matrix'),
      G: ref('matrix'),
      E: ref('matrix'),
      Wl: list(ref('real')),
      Wu: list(ref('real')),
      softness: list({ type: 'number', minimum: 0 }),
      rows: list(record({ kind: { enum: ['input', 'rate', 'output'] }, channel: count, step: count })),
      blocks: list({ type: 'integer', minimum: 1 }),
      condition: ref('real'),
    }),
    law: record({
      K: ref('matrix'),
      P: ref('matrix'),
      Tz: ref('matrix'),
      Tu: ref('matrix'),
      notes: record({ clippedModes: count, riccatiResidual: ref('real'), riccatiConverged: flag }),
    }),
  }),
  $defs: {
    real: {
      description: 'A number, or a text for what JSON has no number for',
      anyOf: [finite, { enum: ['Infinity', '-Infinity', 'NaN'] }],
    },
    matrix: record({ rows: count, cols: count, data: list(list(ref('real'))) }),
    constant: {
      description: 'A constant of a lifting part: a number, a text, a flag, or lists of these',
      anyOf: [finite, text, flag, list(ref('constant'))],
    },
    sha256: { type: 'string', pattern: '^[0-9a-f]{64}$' },
  },
};

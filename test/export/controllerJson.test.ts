import { Ajv2020 } from 'ajv/dist/2020.js';
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { controllerDocument } from '../../src/export/controllerDocument.ts';
import { CONTROLLER_SCHEMA } from '../../src/export/controllerSchema.ts';
import { writeJson } from '../../src/export/json.ts';
import { readController, UnusableControllerError } from '../../src/export/readController.ts';
import type { StudyResult } from '../../src/findings/studyResult.ts';
import { smallResult } from '../findings/smallResult.ts';
import { bitsOf, UGLY } from './bits.ts';

const OPTIONS = { name: 'pendulum', version: '0.1.0' };
const textOf = (result: StudyResult) => writeJson(controllerDocument(result, OPTIONS));

/** Every number of a record as its bits, so that −0 and NaN are told apart; channels without what only a plant knows. */
function bitsWithin(value: unknown): unknown {
  if (typeof value === 'number') return bitsOf(value);
  if (Array.isArray(value) || value instanceof Float64Array)
    return Array.from(value as ArrayLike<unknown>, bitsWithin);
  if (typeof value !== 'object' || value === null) return value;
  const entries = Object.entries(value).filter(([key, entry]) => entry !== undefined && key !== 'of');
  return Object.fromEntries(entries.map(([key, entry]) => [key, bitsWithin(entry)]));
}

const validate = new Ajv2020({ strict: true, allErrors: false, allowUnionTypes: true }).compile(
  CONTROLLER_SCHEMA,
);

describe('controller.json', () => {
  it('is valid against the schema that is shipped beside it (independent program: ajv, draft 2020-12)', () => {
    const valid = validate(JSON.parse(textOf(smallResult())));
    expect(validate.errors).toBeNull();
    expect(valid).toBe(true);
  });

  it('reads back as the design that was exported, bit for bit (relation: writing then reading)', () => {
    const result = smallResult();
    const file = readController(textOf(result));
    expect(bitsWithin(file.design)).toEqual(bitsWithin(result.design));
    expect(file).toMatchObject({
      program: 'liftwright 0.1.0',
      name: 'pendulum',
      title: result.title,
      hashes: { study: result.studyHash, data: result.dataHash },
      plantName: 'pendulum',
    });
  });

  it('keeps every bit of any number: −0, subnormals, infinities, NaN, and stays valid (relation)', () => {
    const value = fc.oneof(fc.double(), fc.constantFrom(...UGLY, Number.NaN));
    const result = smallResult();
    const { design } = result;
    fc.assert(
      fc.property(fc.array(value, { minLength: 1, maxLength: 30 }), (values) => {
        const fill = (length: number) => Float64Array.from({ length }, (_, i) => values[i % values.length]);
        const changed = {
          ...design,
          K: { ...design.K, data: fill(design.K.data.length) },
          Tz: { ...design.Tz, data: fill(design.Tz.data.length) },
          qp: { ...design.qp, Wl: fill(design.qp.m), condition: values[0] },
          problem: { ...design.problem, rateLimits: [values[0]] },
        };
        const text = textOf({ ...result, design: changed });
        expect(bitsWithin(readController(text).design)).toEqual(bitsWithin(changed));
        expect(validate(JSON.parse(text))).toBe(true);
      }),
      { numRuns: 40 },
    );
  });

  it('is the same bytes for the same result', () => {
    expect(textOf(smallResult())).toBe(textOf(smallResult()));
  });

  it('carries the safety note, the unit of every channel, and the map from scaled to physical', () => {
    const document = JSON.parse(textOf(smallResult()));
    expect(document.safety.standing.join(' ')).toContain('emergency stop');
    expect(document.safety.plant).toEqual(smallResult().plant.hazards);
    for (const channels of Object.values(document.scaling) as Record<string, unknown>[][]) {
      for (const channel of channels) {
        expect(channel.unit).toMatch(/\S/);
        expect(channel.half).toBeGreaterThan(0);
      }
    }
    expect(document.reading.scaled).toContain('(physical - centre) / half');
  });

  type Edit = (document: ReturnType<typeof JSON.parse>) => void;
  // What the schema can see: kinds, ranges, missing and unknown keys.
  const SEEN_BY_SCHEMA: readonly [string, string, Edit][] = [
    ['another format', 'controller.format', (d) => (d.format = 'something')],
    ['a later layout', 'controller.formatVersion', (d) => (d.formatVersion = 2)],
    ['a missing matrix', 'controller.qp.H', (d) => delete d.qp.H],
    ['a text for a number', 'controller.qp.F.data[0][3]', (d) => (d.qp.F.data[0][3] = '0.5')],
    ['null for a number', 'controller.qp.Wl[0]', (d) => (d.qp.Wl[0] = null)],
    ['a horizon of zero', 'controller.problem.horizon', (d) => (d.problem.horizon = 0)],
    ['a flag written as a word', 'controller.problem.preview', (d) => (d.problem.preview = 'yes')],
    ['an unknown kind of row', 'controller.qp.rows[0].kind', (d) => (d.qp.rows[0].kind = 'state')],
    ['an infinite sample time', 'controller.sampleTime', (d) => (d.sampleTime = 'Infinity')],
    ['parts that are no list', 'controller.lifting.parts', (d) => (d.lifting.parts = {})],
  ];
  // What only the reader can see: sizes that do not go together.
  const SEEN_BY_READER: readonly [string, string, Edit][] = [
    ['a matrix of the wrong shape', 'controller.predictor.B', (d) => (d.predictor.B = d.predictor.A)],
    ['a row too short', 'controller.law.K.data[0]', (d) => d.law.K.data[0].pop()],
    ['a row too few', 'controller.qp.G.data', (d) => d.qp.G.data.pop()],
    ['blocks that miss the horizon', 'controller.problem.blocks', (d) => (d.problem.blocks[0] = 5)],
    ['blocks that disagree', 'controller.qp.blocks', (d) => d.qp.blocks.reverse()],
    ['a layout of theta that is another one', 'controller.qp.theta.d', (d) => (d.qp.theta.d = 3)],
    ['names that are not one an entry', 'controller.lifting.names', (d) => d.lifting.names.pop()],
    ['functions that are not nz', 'controller.lifting.parts', (d) => d.lifting.parts[0].keep.pop()],
    [
      'a limit on no output',
      'controller.problem.outputLimits[0].output',
      (d) => (d.problem.outputLimits[0].output = 2),
    ],
    ['bounds that are too few', 'controller.qp.Wu', (d) => d.qp.Wu.pop()],
  ];

  it.each(SEEN_BY_SCHEMA)('%s is refused by schema and reader, the reader naming %s', (_, key, edit) => {
    const document = JSON.parse(textOf(smallResult()));
    edit(document);
    expect(validate(document)).toBe(false);
    expect(() => readController(JSON.stringify(document))).toThrow(UnusableControllerError);
    expect(() => readController(JSON.stringify(document))).toThrow(`${key}: must be `);
  });

  it.each(SEEN_BY_READER)('%s is refused by the reader, which names %s', (_, key, edit) => {
    const document = JSON.parse(textOf(smallResult()));
    edit(document);
    expect(() => readController(JSON.stringify(document))).toThrow(`${key}: must be `);
  });

  it.each(['', 'x', '[1, 2', 'null', '[]', '3'])('the text %j is refused, not a crash', (text) => {
    expect(() => readController(text)).toThrow(UnusableControllerError);
  });

  it('an unknown key is refused by the schema', () => {
    const document = JSON.parse(textOf(smallResult()));
    document.extra = 1;
    expect(validate(document)).toBe(false);
  });
});

describe('JSON text', () => {
  it('is read by JSON.parse as the value, whatever it is (independent program: the JSON parser of the engine)', () => {
    fc.assert(
      fc.property(fc.jsonValue(), (value) => {
        expect(JSON.parse(writeJson(value))).toEqual(value);
      }),
    );
    expect(
      writeJson({ a: -0, b: undefined, c: Number.NaN, d: Float64Array.of(1, Number.NEGATIVE_INFINITY) }),
    ).toBe('{ "a": -0, "c": "NaN", "d": [1, "-Infinity"] }\n');
  });
});

import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { LineCounter, parseDocument } from 'yaml';
import { listKeys, referenceMarkdown, referenceText } from '../../src/study/describeTable.ts';
import type { Fields, Kind } from '../../src/study/kinds.ts';
import { createReader } from '../../src/study/reader.ts';
import { TABLE } from '../../src/study/table.ts';
import { bind, EXAMPLE } from './exampleStudy.ts';

/** What a kind says of a text of YAML that stands for its value. */
function readValue(kind: Kind<unknown>, text: string) {
  const counter = new LineCounter();
  const document = parseDocument(text, { lineCounter: counter });
  const reader = createReader('f', document, counter);
  const channel = { role: 'output', name: 'position' } as const;
  const value = kind.read(reader, reader.resolve(document.contents), { key: 'k', line: 1, channel });
  return { value, problems: reader.problems };
}

function* everyField(fields: Fields, above = ''): Generator<[path: string, field: Fields[string]]> {
  for (const [key, field] of Object.entries(fields)) {
    yield [above + key, field];
    yield* below(field.kind, `${above}${key}.`);
  }
}

function* below(kind: Kind<unknown>, above: string): Generator<[string, Fields[string]]> {
  const inner = kind.below;
  if (inner?.type === 'group') yield* everyField(inner.fields, above);
  if (inner?.type === 'map' || inner?.type === 'list') yield* below(inner.of, above);
  if (inner?.type === 'variants') {
    for (const { name, fields } of inner.variants) yield* everyField(fields, `${above}${name}.`);
  }
}

const FIELDS = [...everyField(TABLE)];

describe('the table of the study file', () => {
  it.each(FIELDS)(
    'the default of %s is accepted by its own kind and comes back the same (round trip)',
    (_, field) => {
      const { kind, presence } = field;
      if (presence.type === 'required' || kind.below?.type === 'map') return;
      if (presence.type === 'default' && (presence.value === null || kind.below?.type === 'group')) return;
      for (const sampleTime of [1e-6, 1e-3, 0.05, 3]) {
        for (const horizon of [1, 40, 1000]) {
          const value = presence.type === 'default' ? presence.value : presence.from({ sampleTime, horizon });
          const read = readValue(kind, kind.write(value));
          expect(read.problems).toEqual([]);
          expect(read.value).toEqual(value);
        }
      }
    },
  );

  it('every derived default keeps the rules between keys, from a microsecond to a second and over all horizons', () => {
    const settings = fc.record({
      sampleTime: fc.double({ min: 1e-6, max: 1, noNaN: true }),
      horizon: fc.integer({ min: 1, max: 1000 }),
    });
    fc.assert(
      fc.property(settings, ({ sampleTime, horizon }) => {
        const { study, lines } = bind(
          `plant: ./plant.ts\nsampleTime: ${sampleTime}\ncontroller: { horizon: ${horizon} }\n` +
            'scenario: { references: { position: { shape: constant, value: 1 mm } } }\n',
        );
        expect(lines).toEqual([]);
        expect(study?.experiment.duration).toBeGreaterThanOrEqual(100 * sampleTime);
      }),
    );
  });

  it('a study of plant, sample time, horizon and one reference is complete', () => {
    const { study, lines } = bind(
      'plant: ./plant.ts\nsampleTime: 2 ms\ncontroller:\n  horizon: 30\n' +
        'scenario:\n  references:\n    position: { shape: sine, amplitude: 3 mm, period: 1 s }\n',
    );
    expect(lines).toEqual([]);
    expect(JSON.stringify(study)).not.toContain('undefined');
    expect(study?.controller.track).toEqual({ position: 1, velocity: 0 });
    expect(study?.controller.inputLimits).toEqual({ current: { min: -2, max: 2 } });
    expect(study?.controller.rateLimits).toEqual({ current: 400 });
    expect(study?.scenario.duration).toBe(2);
    expect(study?.title).toBe('valve');
    expect(study?.lifting.parts.map(({ family }) => family)).toEqual(['thin-plate']);
  });

  it('every value of the example arrives in SI units under its name (worked by hand)', () => {
    const { study, lines } = bind(EXAMPLE);
    expect(lines).toEqual([]);
    expect(study).toMatchObject({
      title: 'A valve',
      seed: 7,
      sampleTime: 0.002,
      experiment: {
        signals: ['random-steps', 'chirp'],
        trajectories: 50,
        duration: 0.3,
        hold: 0.01,
        highest: 50,
      },
      lifting: { constant: true, parts: [{ family: 'monomials', values: { degree: 3 } }] },
      predictor: { ridge: 1e-6, route: 'auto' },
      controller: {
        horizon: 25,
        blocks: [1, 2],
        inputLimits: { current: { min: -2, max: 1.5 } },
        rateLimits: { current: 300 },
        outputLimits: [{ output: 'velocity', min: -0.5, max: 0.5, hard: false, weight: 1e4, fromStep: 1 }],
      },
      scenario: {
        duration: 1,
        start: { position: 0.001 },
        references: [{ output: 'position', shape: 'steps', values: [0.005, -0.005], time: 0.5 }],
        disturbances: [{ input: 'current', value: 0.1, from: 0.3 }],
        noise: 0.003,
      },
      accept: { worstExcess: 0.05, offset: null },
    });
  });

  it('help and README reference name every key of the table, its kind and its meaning', () => {
    const [text, markdown] = [referenceText(), referenceMarkdown()];
    expect(listKeys().length).toBeGreaterThan(60);
    for (const [path, { meaning }] of FIELDS) {
      const key = path.split('.').at(-1) as string;
      expect(text).toMatch(new RegExp(`(^|\\s|\\.)${key}: `, 'm'));
      expect(markdown).toMatch(new RegExp(`[.\`]${key}\``));
      expect(text).toContain(meaning);
    }
  });

  it('meanings are one line without a full stop, keys are camelCase', () => {
    for (const [path, { meaning }] of FIELDS) {
      expect(meaning, path).toMatch(/^\S.*[^.\s]$/);
      expect(path.split('.').at(-1), path).toMatch(/^[a-z][a-zA-Z]*$/);
    }
  });
});

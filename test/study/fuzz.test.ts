import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { stringify } from 'yaml';
import { bindStudy } from '../../src/study/bindStudy.ts';
import { listKeys } from '../../src/study/describeTable.ts';
import { formatProblem } from '../../src/study/problem.ts';
import { readStudy } from '../../src/study/readStudy.ts';
import { EXAMPLE, valve } from './exampleStudy.ts';

const origin = { file: '/somewhere/study.yaml', hash: 'hash', plant: '/somewhere/plant.ts' };

/** A study, or problems that each make one line of the promised form; anything else fails. */
function expectStudyOrProblems(text: string): void {
  const { study, problems } = bindStudy(readStudy(text, 'f.yaml'), valve, origin);
  expect(study === null).toBe(problems.length > 0);
  for (const problem of problems) {
    expect(formatProblem(problem)).toMatch(/^f\.yaml:\d+: .*must be .+, got .+; .+$/u);
  }
  const lines = problems.map(({ line }) => line ?? 0);
  expect(lines).toEqual([...lines].sort((a, b) => a - b));
  if (study) expect(onlyFinite(study)).toBe(true);
}

/** Limits that are not given are the only numbers that may be infinite. */
function onlyFinite(value: unknown, key = ''): boolean {
  if (typeof value === 'number')
    return Number.isFinite(value) || (Math.abs(value) > 1 && /^(min|max)$/.test(key));
  if (typeof value !== 'object' || value === null) return true;
  return Object.entries(value).every(([inner, part]) => onlyFinite(part, inner));
}

const words = [...new Set(listKeys().flatMap(({ path }) => path.split(/[.:\s[\]<>]+/)))].filter(Boolean);
const scalar = fc.oneof(
  fc.constantFrom(
    ...words,
    'position',
    'velocity',
    'current',
    'mass',
    'auto',
    '5 ms',
    '3 mm',
    '2 A',
    '7 %',
    '1 A/s',
  ),
  fc.double(),
  fc.integer(),
  fc.boolean(),
  fc.constant(null),
  fc.string(),
);

describe('any text at all', () => {
  it('arbitrary text gives a study or problems, never anything else (defining property)', () => {
    fc.assert(fc.property(fc.string({ maxLength: 200, unit: 'binary' }), expectStudyOrProblems), {
      numRuns: 300,
    });
  });

  it('arbitrary YAML with the words of the table gives a study or problems (defining property)', () => {
    const { tree } = fc.letrec((tie) => ({
      tree: fc.oneof(
        { maxDepth: 5, withCrossShrink: true },
        scalar,
        fc.array(tie('tree'), { maxLength: 4 }),
        fc.dictionary(fc.constantFrom(...words, 'position', 'current'), tie('tree'), { maxKeys: 6 }),
      ),
    }));
    const document = fc.dictionary(fc.constantFrom(...words), tree, { maxKeys: 8 });
    fc.assert(
      fc.property(document, (value) => expectStudyOrProblems(stringify(value))),
      { numRuns: 500 },
    );
  });

  it('the example with a line dropped, doubled, cut or given another value gives a study or problems', () => {
    const lines = EXAMPLE.split('\n');
    const damage = fc.record({
      at: fc.nat({ max: lines.length - 1 }),
      how: fc.constantFrom('drop', 'double', 'cut', 'value'),
      where: fc.nat({ max: 60 }),
      value: scalar,
    });
    fc.assert(
      fc.property(fc.array(damage, { minLength: 1, maxLength: 3 }), (damages) => {
        const copy: string[] = [...lines];
        for (const { at, how, where, value } of damages) {
          const line = copy[at];
          if (how === 'drop') copy[at] = '';
          if (how === 'double') copy[at] = `${line}\n${line}`;
          if (how === 'cut') copy[at] = line.slice(0, where);
          if (how === 'value') copy[at] = line.replace(/: .*$/, () => `: ${String(value)}`);
        }
        expectStudyOrProblems(copy.join('\n'));
      }),
      { numRuns: 1000 },
    );
  });

  it.each([
    'a: &a [*a]',
    'plant: &p ./plant.ts\ntitle: *p',
    'controller: &c\n  horizon: *c',
    'a: &a [x, x]\nb: &b [*a, *a]\nscenario: {references: {position: [*b, *b]}}',
    '? {plant: a}\n: b',
    '!!binary aGVsbG8=',
    'sampleTime: !!float 1\nplant: !custom x',
    '%YAML 1.1\n---\nseed: 1',
    `${'['.repeat(2000)}`,
    `x: ${'{a: '.repeat(500)}1${'}'.repeat(500)}`,
    '\u0000',
    '\ufeffplant: ./plant.ts',
    '__proto__: 1\nconstructor: {horizon: 1}',
    'controller: {__proto__: {horizon: 3}}',
    'scenario: {references: {toString: {shape: toString}}}',
    'lifting: {parts: [{family: constructor}]}',
  ])('anchors, tags, deep nesting, names of the language itself: %j', (text) => {
    expectStudyOrProblems(text);
  });
});

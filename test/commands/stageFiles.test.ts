import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeEach, describe, expect, it } from 'vitest';
import { InputError } from '../../src/commands/inputError.ts';
import { readStage, type StageFolder, writeStage } from '../../src/commands/stageFiles.ts';
import { bind, EXAMPLE, edit } from '../study/exampleStudy.ts';

const folder = mkdtempSync(join(tmpdir(), 'liftwright-stages-'));
afterAll(() => rmSync(folder, { recursive: true, force: true }));

function place(text = EXAMPLE, plantHash = 'p1'): StageFolder {
  const { study } = bind(text);
  if (!study) throw new Error('the example study must be usable');
  return { folder, study, studyName: 'a/study.yaml', plantHash };
}

/** Stand-ins for the stages' records: what is in them is none of the store's business. */
const data = { dataset: { x: Float64Array.of(1, Number.NaN, -0) } } as never;
const fitted = { predictor: { A: 1 } } as never;

/** The message with which reading is refused, or `read`. */
function attempt(at: StageFolder, stage: 'experiment' | 'fit'): string {
  try {
    readStage(at, stage);
    return 'read';
  } catch (error) {
    if (!(error instanceof InputError)) throw error;
    return error.message.replaceAll(folder, 'out');
  }
}

beforeEach(() => {
  writeStage(place(), 'experiment', data);
  writeStage(place(), 'fit', fitted);
});

describe('the files between the stages', () => {
  it('what was written is read back (round trip)', () => {
    expect(readStage(place(), 'experiment')).toEqual(data);
    expect(readStage(place(), 'fit')).toEqual(fitted);
  });

  it('the same contents make the same bytes, wherever the folder is', () => {
    const other = mkdtempSync(join(tmpdir(), 'liftwright-other-'));
    writeStage({ ...place(), folder: other }, 'experiment', data);
    const [a, b] = [folder, other].map((at) => readFileSync(join(at, 'dataset.json')));
    expect(a.equals(b)).toBe(true);
    rmSync(other, { recursive: true });
  });

  it('a missing file is refused with the verb that makes it', () => {
    rmSync(join(folder, 'predictor.json'));
    expect(attempt(place(), 'fit')).toBe(
      'out/predictor.json: must be the result of liftwright fit, got no such file; run liftwright fit a/study.yaml first',
    );
  });

  it.each([
    ['cut short', (text: string) => text.slice(0, -20)],
    ['with one digit changed', (text: string) => text.replace('"A":1', '"A":2')],
    ['empty', () => ''],
    ['of another kind', () => '{"a":1}\n{}\n'],
    ['of no kind', () => 'null\nnull\n'],
    ['of another stage', () => readFileSync(join(folder, 'dataset.json'), 'utf8')],
  ])('a file %s is refused in one line', (_, damage) => {
    const path = join(folder, 'predictor.json');
    writeFileSync(path, damage(readFileSync(path, 'utf8')));
    expect(attempt(place(), 'fit')).toBe(
      'out/predictor.json: must be a file as liftwright wrote it, got a damaged or edited one; run liftwright fit a/study.yaml again',
    );
  });

  it('a file of another version is refused', () => {
    const path = join(folder, 'predictor.json');
    writeFileSync(path, readFileSync(path, 'utf8').replace(/"liftwright":"[^"]*"/, '"liftwright":"0.0.1"'));
    expect(attempt(place(), 'fit')).toMatch(/must be written by version .*, got one of version 0\.0\.1/);
  });

  it('a stage is stale when something that it or an earlier stage depends on has changed, and only then', () => {
    const cases: readonly [string, StageFolder, experiment: string, fit: string][] = [
      ['a degree of the lifting', place(edit('degree: 3', 'degree: 4')), 'read', 'lifting'],
      ['the seed', place(edit('seed: 7', 'seed: 8')), 'seed', 'seed'],
      ['the horizon', place(edit('horizon: 25', 'horizon: 26')), 'read', 'controller.horizon'],
      ['a weight', place(edit('blocks: [1, 2]', 'disturbanceGain: 0.2')), 'read', 'read'],
      ['the noise', place(edit('noise: 0.3 %', 'noise: 0.4 %')), 'read', 'read'],
      ['the code of the plant', place(EXAMPLE, 'p2'), 'plant', 'plant'],
      ['a comment', place(`# changed\n${EXAMPLE}`), 'read', 'read'],
    ];
    for (const [what, at, experiment, fit] of cases) {
      for (const [stage, expected] of [
        ['experiment', experiment],
        ['fit', fit],
      ] as const) {
        const message = attempt(at, stage);
        if (expected === 'read') expect(message, what).toBe('read');
        else expect(message, what).toContain(`got one made with another ${expected};`);
      }
    }
  });

  it('a stage is stale when the file it was made from was made anew with other contents', () => {
    writeStage(place(), 'experiment', { dataset: { x: Float64Array.of(2) } } as never);
    expect(attempt(place(), 'fit')).toContain('must be made from the present dataset.json');
    expect(attempt(place(), 'experiment')).toBe('read');
  });
});

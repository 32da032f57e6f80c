import { readFileSync } from 'node:fs';
import { basename, dirname, extname, join, relative, resolve } from 'node:path';
import type { Plant } from '../plant/plant.ts';
import { bindStudy } from '../study/bindStudy.ts';
import { sortProblems } from '../study/problem.ts';
import { readStudy } from '../study/readStudy.ts';
import type { Study } from '../study/study.ts';
import { InputError, type Problem } from './inputError.ts';
import { loadPlant } from './plantFile.ts';
import { createProgress, type Progress } from './progress.ts';
import { type StageFolder, sha256 } from './stageFiles.ts';

/** What every verb takes from the command line. */
export interface VerbOptions {
  readonly out?: string;
  readonly seed?: string;
  readonly quiet?: boolean;
}

/** A study that is ready to be worked on. */
export interface OpenStudy extends StageFolder {
  readonly study: Study;
  readonly plant: Plant;
  /** The line of a key of the study file, or of the nearest key above it. */
  readonly lineOf: (key: string) => number;
  readonly progress: Progress;
}

/**
 * Reads the study and the plant that it names, and checks the one against the other.
 *
 * @throws InputError with ALL problems of the study file, and with the plant's if it cannot be loaded.
 */
export async function openStudy(name: string, options: VerbOptions): Promise<OpenStudy> {
  const seed = readSeed(options.seed);
  const file = resolve(name);
  const text = readText(name, file);
  const draft = readStudy(text, name);
  const path = draft.values.plant;
  if (path === undefined) throw new InputError(draft.problems);

  const plantFile = resolve(dirname(file), path);
  const loaded = await loadPlant(plantFile).catch((error: unknown) => {
    if (!(error instanceof InputError)) throw error;
    throw new InputError([...draft.problems, ...error.problems]);
  });
  const { plant, hash: plantHash } = loaded;
  const origin = { file, hash: sha256(text), plant: plantFile, seed };
  const bound = bindStudy(draft, plant, origin);
  if (bound.study === null) throw new InputError(sortProblems(bound.problems));
  const folder = options.out ?? join('out', studyName(file));
  return {
    study: bound.study,
    plant,
    plantHash,
    folder,
    studyName: name,
    lineOf: draft.lineOf,
    progress: createProgress(options.quiet !== true),
  };
}

/** The folder's name for `study.yaml`, which most studies are called; else the file's own. */
export function studyName(file: string): string {
  const own = basename(file, extname(file));
  return own === 'study' ? basename(dirname(file)) || own : own;
}

function readText(name: string, file: string): string {
  try {
    return readFileSync(file, 'utf8');
  } catch (error) {
    const { code } = error as NodeJS.ErrnoException;
    const got = code === 'ENOENT' ? 'no such file' : code === 'EISDIR' ? 'a folder' : `an error (${code})`;
    const wayOut =
      code === 'EISDIR'
        ? `try ${join(relative('', file), 'study.yaml')}`
        : 'check the path and its permissions';
    throw new InputError({ file: name, must: 'a study file that can be read', got, wayOut });
  }
}

function readSeed(text: string | undefined): number | undefined {
  if (text === undefined) return undefined;
  const seed = Number(text);
  if (/^\d+$/.test(text) && seed <= 4_294_967_295) return seed;
  const problem: Problem = {
    file: '--seed',
    must: 'an integer from 0 to 4294967295',
    got: JSON.stringify(text),
    wayOut: 'write a whole number in that range',
  };
  throw new InputError(problem);
}

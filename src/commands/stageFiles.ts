import { createHash } from 'node:crypto';
import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import type { Dataset } from '../data/dataset.ts';
import type { AcceptanceRow, LoopRun, StudyResult } from '../findings/studyResult.ts';
import type { ControllerDesign } from '../mpc/problem.ts';
import type { Predictor } from '../predictor/predictor.ts';
import type { Spectrum, TrustCurve } from '../predictor/trust.ts';
import type { Study } from '../study/study.ts';
import { decodeRecord, encodeRecord } from './encode.ts';
import { InputError } from './inputError.ts';
import { version } from './version.ts';
import { writeWhole } from './writeWhole.ts';

/** What each stage leaves for the later ones. */
export interface StageContents {
  readonly experiment: { readonly substeps: StudyResult['substeps']; readonly dataset: Dataset };
  readonly fit: {
    readonly predictor: Predictor;
    readonly plainLinear: Predictor;
    readonly linearised: Predictor | null;
  };
  readonly assess: { readonly trust: TrustCurve; readonly spectrum: Spectrum };
  readonly design: { readonly design: ControllerDesign };
  readonly simulate: {
    readonly runs: readonly LoopRun[];
    readonly acceptance: readonly AcceptanceRow[];
  };
}
export type Stage = keyof StageContents;

/** For each stage its file, the stages that it reads, and the parts of the study that it reads itself. */
export const STAGES = {
  experiment: { file: 'dataset.json', reads: [], uses: ['plant', 'seed', 'sampleTime', 'experiment'] },
  fit: {
    file: 'predictor.json',
    reads: ['experiment'],
    uses: ['coordinates', 'lifting', 'predictor', 'controller.horizon'],
  },
  assess: { file: 'trust.json', reads: ['experiment', 'fit'], uses: [] },
  design: { file: 'controller.json', reads: ['fit'], uses: ['controller', 'scenario.delay'] },
  simulate: {
    file: 'loop.json',
    reads: ['experiment', 'fit', 'design'],
    uses: ['scenario', 'accept'],
  },
} as const satisfies Record<
  Stage,
  { readonly file: string; readonly reads: readonly Stage[]; readonly uses: readonly string[] }
>;

/** The folder of a study's results, and what its files must agree with. */
export interface StageFolder {
  readonly folder: string;
  readonly study: Study;
  /** How the user named the study, for the way out. */
  readonly studyName: string;
  /** SHA-256 of the plant's code. */
  readonly plantHash: string;
}

interface StageFile {
  readonly liftwright: string;
  readonly stage: Stage;
  /** Hash of each part of the study that the stage or one that it reads was made with. */
  readonly madeWith: Readonly<Record<string, string>>;
  /** Checksum of each stage that was read. */
  readonly read: Readonly<Partial<Record<Stage, string>>>;
  readonly checksum: string;
}

export function sha256(text: string | Uint8Array): string {
  return createHash('sha256').update(text).digest('hex');
}

/** Writes what a stage made, whole or not at all; the same contents give the same bytes. */
export function writeStage<S extends Stage>(place: StageFolder, stage: S, contents: StageContents[S]): void {
  const text = encodeRecord(contents);
  const head: StageFile = {
    liftwright: version(),
    stage,
    madeWith: hashParts(place, stage),
    read: Object.fromEntries(STAGES[stage].reads.map((read) => [read, open(place, read).checksum])),
    checksum: sha256(text),
  };
  writeWhole(join(place.folder, STAGES[stage].file), `${JSON.stringify(head)}\n${text}\n`);
}

/**
 * Reads what a stage made.
 * @throws InputError when the file is missing, damaged, of another version, or made with another study or plant.
 */
export function readStage<S extends Stage>(place: StageFolder, stage: S): StageContents[S] {
  return decodeRecord(open(place, stage).text) as StageContents[S];
}

/** The contents of a stage's file as text, after every check. */
function open(place: StageFolder, stage: Stage): { readonly text: string; readonly checksum: string } {
  const path = join(place.folder, STAGES[stage].file);
  const refuse = (must: string, got: string, again: string): never => {
    const wayOut = `run liftwright ${stage} ${place.studyName}${again}`;
    throw new InputError({ file: path, must, got, wayOut });
  };
  let whole: string;
  try {
    whole = readFileSync(path, 'utf8');
  } catch {
    return refuse(`the result of liftwright ${stage}`, 'no such file', ' first');
  }
  const end = whole.indexOf('\n');
  const text = whole.slice(end + 1).trimEnd();
  const head = parseHead(whole.slice(0, Math.max(0, end)));
  if (head?.stage !== stage || head.checksum !== sha256(text)) {
    return refuse('a file as liftwright wrote it', 'a damaged or edited one', ' again');
  }
  if (head.liftwright !== version()) {
    return refuse(`written by version ${version()}`, `one of version ${head.liftwright}`, ' again');
  }
  for (const [part, hash] of Object.entries(hashParts(place, stage))) {
    if (head.madeWith[part] === hash) continue;
    refuse('made with the study as it is now', `one made with another ${part}`, ' again');
  }
  for (const read of STAGES[stage].reads) {
    if (head.read[read] === open(place, read).checksum) continue;
    refuse(`made from the present ${STAGES[read].file}`, 'one made from another', ' again');
  }
  return { text, checksum: head.checksum };
}

function parseHead(line: string): StageFile | null {
  try {
    const head = JSON.parse(line);
    return typeof head?.madeWith === 'object' && typeof head.read === 'object' ? head : null;
  } catch {
    return null;
  }
}

/** A hash for each part of the study that the stage depends on, those of the stages that it reads included. */
function hashParts(place: StageFolder, stage: Stage): Record<string, string> {
  const hashes: Record<string, string> = {};
  for (const read of STAGES[stage].reads) Object.assign(hashes, hashParts(place, read));
  for (const part of STAGES[stage].uses) {
    const value =
      part === 'plant'
        ? place.plantHash
        : part.split('.').reduce<unknown>((at, key) => (at as Record<string, unknown>)[key], place.study);
    hashes[part] = sha256(encodeRecord(value)).slice(0, 16);
  }
  return hashes;
}

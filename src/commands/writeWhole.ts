import { existsSync, mkdirSync, readdirSync, renameSync, rmSync, writeFileSync } from 'node:fs';
import { basename, dirname, join } from 'node:path';

/** A file to be written, its path relative to the folder it goes to. */
export interface OutputFile {
  readonly path: string;
  readonly bytes: string | Uint8Array;
}

/** Temporary names hold the process, so that two of them do not meet, and the name that is to be written. */
const TEMPORARY = /^\.liftwright-(\d+)-(.*)\.(part|old)$/;

const temporaryName = (path: string, ending: 'part' | 'old') =>
  join(dirname(path), `.liftwright-${process.pid}-${basename(path)}.${ending}`);

/**
 * Writes a file so that `path` holds the old bytes or the new ones, never a part: a temporary file in the same folder,
 * then a rename. A process that is killed leaves at most a temporary file, which the next write removes.
 *
 * @throws what the file system throws; the temporary file is then removed.
 */
export function writeWhole(path: string, bytes: string | Uint8Array): void {
  mkdirSync(dirname(path), { recursive: true });
  tidy(dirname(path));
  const part = temporaryName(path, 'part');
  try {
    writeFileSync(part, bytes);
    renameSync(part, path);
  } catch (error) {
    rmSync(part, { force: true });
    throw error;
  }
}

/**
 * Replaces a folder and everything in it by a set of files: written beside it under a temporary name, then swapped in by
 * two renames. A process killed between the two leaves the old set under a temporary name; the next write puts it back.
 *
 * @throws what the file system throws; the old folder then stands as it was.
 */
export function writeFolderWhole(folder: string, files: readonly OutputFile[]): void {
  mkdirSync(dirname(folder), { recursive: true });
  tidy(dirname(folder));
  const part = temporaryName(folder, 'part');
  const old = temporaryName(folder, 'old');
  try {
    mkdirSync(part);
    for (const { path, bytes } of files) {
      mkdirSync(dirname(join(part, path)), { recursive: true });
      writeFileSync(join(part, path), bytes);
    }
    if (existsSync(folder)) renameSync(folder, old);
    renameSync(part, folder);
  } catch (error) {
    rmSync(part, { recursive: true, force: true });
    if (existsSync(old) && !existsSync(folder)) renameSync(old, folder);
    throw error;
  }
  rmSync(old, { recursive: true, force: true });
}

/** Clears away what a process that no longer runs left behind; a set that it had moved aside is put back. */
function tidy(folder: string): void {
  for (const name of readdirSync(folder)) {
    const match = TEMPORARY.exec(name);
    if (!match || isRunning(Number(match[1]))) continue;
    const target = join(folder, match[2]);
    if (match[3] === 'old' && !existsSync(target)) renameSync(join(folder, name), target);
    else rmSync(join(folder, name), { recursive: true, force: true });
  }
}

function isRunning(pid: number): boolean {
  try {
    process.kill(pid, 0);
    return true;
  } catch {
    return false;
  }
}

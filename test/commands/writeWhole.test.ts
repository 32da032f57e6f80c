import { type ChildProcess, spawn } from 'node:child_process';
import { once } from 'node:events';
import {
  existsSync,
  mkdirSync,
  mkdtempSync,
  readdirSync,
  readFileSync,
  rmSync,
  writeFileSync,
} from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { pathToFileURL } from 'node:url';
import { buildSync } from 'esbuild';
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest';
import { writeFolderWhole, writeWhole } from '../../src/commands/writeWhole.ts';

const base = mkdtempSync(join(tmpdir(), 'liftwright-write-'));
const module = join(base, 'writeWhole.mjs');
let folder: string;
let count = 0;

beforeAll(() => {
  buildSync({
    entryPoints: ['src/commands/writeWhole.ts'],
    bundle: true,
    format: 'esm',
    platform: 'node',
    outfile: module,
  });
});
beforeEach(() => {
  folder = join(base, String(count++));
  mkdirSync(folder);
});
afterAll(() => rmSync(base, { recursive: true, force: true }));

/** Length of the text that the child writes over and over, each time of one other digit: long enough to be hit. */
const LENGTH = 4_000_000;

function spawnWriter(target: 'file' | 'folder'): ChildProcess {
  const call =
    target === 'file'
      ? `writeWhole('${join(folder, 'f')}', text)`
      : `writeFolderWhole('${join(folder, 'd')}', [{ path: 'a', bytes: text }, { path: 'b/c', bytes: text }])`;
  const script = `import { writeFolderWhole, writeWhole } from '${pathToFileURL(module)}';
    for (let i = 0; ; i++) { const text = String(i % 10).repeat(${LENGTH}); ${call}; }`;
  const path = join(folder, 'writer.mjs');
  writeFileSync(path, script);
  return spawn(process.execPath, [path], { stdio: ['ignore', 'ignore', 'inherit'] });
}

async function appears(path: string): Promise<void> {
  while (!existsSync(path)) await new Promise((resolve) => setTimeout(resolve, 5));
}

const isWhole = (text: string) => text.length === LENGTH && text === text[0].repeat(LENGTH);
const temporaries = () => readdirSync(folder).filter((name) => name.startsWith('.liftwright-'));

describe('writing whole or not at all', () => {
  it.each(['SIGKILL', 'SIGINT'] as const)(
    'a writer stopped by %s at any moment leaves a file of one version, whole (defining property)',
    async (signal) => {
      for (const delay of [0, 3, 7, 12, 18, 25]) {
        const child = spawnWriter('file');
        await appears(join(folder, 'f'));
        await new Promise((resolve) => setTimeout(resolve, delay));
        child.kill(signal);
        await once(child, 'exit');
        expect(isWhole(readFileSync(join(folder, 'f'), 'utf8'))).toBe(true);
      }
    },
  );

  it('a folder is of one version, whole, after its writer was killed and the next write has tidied up', async () => {
    for (const delay of [0, 3, 7, 12, 18, 25]) {
      const child = spawnWriter('folder');
      await appears(join(folder, 'd/b/c'));
      await new Promise((resolve) => setTimeout(resolve, delay));
      child.kill('SIGKILL');
      await once(child, 'exit');
      writeWhole(join(folder, 'other'), 'text');
      const [a, c] = ['d/a', 'd/b/c'].map((path) => readFileSync(join(folder, path), 'utf8'));
      expect(isWhole(a) && a === c).toBe(true);
      expect(temporaries()).toEqual([]);
    }
  });

  it('what a killed writer left behind is cleared away, and a set that it had moved aside put back', () => {
    writeFileSync(join(folder, '.liftwright-99999999-f.part'), 'half of someth');
    mkdirSync(join(folder, '.liftwright-99999999-d.old'));
    writeWhole(join(folder, 'f'), 'whole');
    expect(readdirSync(folder).sort()).toEqual(['d', 'f']);
    expect(readFileSync(join(folder, 'f'), 'utf8')).toBe('whole');
  });

  it('a folder is replaced as a set: nothing of the earlier one stays', () => {
    const target = join(folder, 'd');
    writeFolderWhole(target, [
      { path: 'a', bytes: '1' },
      { path: 'b/c', bytes: '2' },
    ]);
    writeFolderWhole(target, [{ path: 'e', bytes: new Uint8Array([51]) }]);
    expect(readdirSync(target)).toEqual(['e']);
    expect(readFileSync(join(target, 'e'), 'utf8')).toBe('3');
  });

  it('a set that cannot be written leaves the earlier folder as it was', () => {
    const target = join(folder, 'd');
    writeFolderWhole(target, [{ path: 'a', bytes: '1' }]);
    const impossible = [
      { path: 'a', bytes: '2' },
      { path: 'a/b', bytes: '3' },
    ];
    expect(() => writeFolderWhole(target, impossible)).toThrow(/EEXIST|ENOTDIR/);
    expect(readFileSync(join(target, 'a'), 'utf8')).toBe('1');
    expect(temporaries()).toEqual([]);
  });

  it('a file that cannot be written leaves what stands there as it was', () => {
    mkdirSync(join(folder, 'f'));
    expect(() => writeWhole(join(folder, 'f'), 'text')).toThrow(/EISDIR|ENOTEMPTY|EEXIST/);
    expect(readdirSync(folder)).toEqual(['f']);
  });
});

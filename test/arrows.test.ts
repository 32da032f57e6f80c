import { readdirSync, readFileSync } from 'node:fs';
import { join, posix } from 'node:path';
import { describe, expect, it } from 'vitest';

/** From the ground floor upwards: a folder may import from itself and from those before it. */
const FLOORS = [
  'numerics',
  'plant',
  'data',
  'lift',
  'predictor',
  'qp',
  'mpc',
  'loop',
  'findings',
  'export',
  'report',
  'study',
  'commands',
];
/** Folders that know nothing of control: besides themselves they may import from these only. */
const ALONE: Record<string, readonly string[]> = { numerics: [], qp: ['numerics'] };
/** The outermost layers, which read files and clocks and print. */
const OUTER = ['commands', 'cli.ts'];

const files = readdirSync('src', { recursive: true, encoding: 'utf8' })
  .map((file) => file.replaceAll('\\', '/'))
  .filter((file) => file.endsWith('.ts') && !file.includes('/assembly/'));

const read = (file: string) => readFileSync(join('src', file), 'utf8');

function* importsOf(file: string): Generator<string> {
  const code = read(file);
  for (const match of code.matchAll(/(?:from\s+|import\(\s*|import\s+)'([^']+)'/g)) yield match[1];
}

describe('the arrows between the folders', () => {
  it('every import runs from a later folder of the list to the same or an earlier one', () => {
    const backwards = [];
    for (const file of files) {
      const folder = file.split('/')[0];
      for (const target of importsOf(file)) {
        if (!target.startsWith('.')) continue;
        const to = posix.normalize(posix.join(posix.dirname(file), target)).split('/')[0];
        if (folder === 'cli.ts' || to === folder) continue;
        const allowed = ALONE[folder] ?? FLOORS.slice(0, FLOORS.indexOf(folder));
        if (!allowed.includes(to)) backwards.push(`${file} -> ${target}`);
      }
    }
    expect(backwards).toEqual([]);
  });

  it('every folder of src is on the list', () => {
    const folders = new Set(files.map((file) => file.split('/')[0]));
    expect([...folders].filter((folder) => folder !== 'cli.ts' && !FLOORS.includes(folder))).toEqual([]);
  });

  it('no file inside the core reads files, clocks, the environment or global randomness, or prints', () => {
    const worldly =
      /\bfrom 'node:|\bimport\('node:|\bconsole\.|\bprocess\.|\bDate\b|\bMath\.random\b|\bperformance\./;
    const offenders = files.filter((file) => {
      if (OUTER.includes(file.split('/')[0])) return false;
      const code = read(file).replace(/\/\*[\s\S]*?\*\/|\/\/.*/g, '');
      return worldly.test(code);
    });
    expect(offenders).toEqual([]);
  });
});

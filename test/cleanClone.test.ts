import { execFileSync, spawnSync } from 'node:child_process';
import { existsSync, mkdtempSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { parse } from 'yaml';
import { checkPlant } from '../src/plant/check.ts';
import { readStudy } from '../src/study/readStudy.ts';

const readme = readFileSync('README.md', 'utf8');
/** The fenced blocks of the README in one language. */
const blocks = (language: string) =>
  [...readme.matchAll(new RegExp(`\`\`\`${language}\n([^]*?)\`\`\``, 'g'))].map((match) => match[1]);
/** Its shell commands, one a line; `npm test` is what runs this very test and is left out. */
const commands = blocks('sh')
  .flatMap((block) => block.trim().split('\n'))
  .filter((command) => command !== 'npm test');

const inGit = spawnSync('git', ['rev-parse', '--is-inside-work-tree']).status === 0;

describe.skipIf(!inGit)('a clean clone', () => {
  const clone = join(mkdtempSync(join(tmpdir(), 'liftwright-clone-')), 'liftwright');
  const stage = '/tmp/my-stage';

  beforeAll(() => {
    // What is committed, and only that.
    execFileSync('git', ['clone', '--quiet', '--no-hardlinks', '.', clone]);
    rmSync(stage, { recursive: true, force: true });
  });
  afterAll(() => {
    rmSync(join(clone, '..'), { recursive: true, force: true });
    rmSync(stage, { recursive: true, force: true });
  });

  it('runs every command of the README in turn, the demo first, each with exit code 0', () => {
    expect(commands[0]).toBe('npm ci && npm run demo');
    const printed: string[] = [];
    for (const command of commands) {
      const prepared = command.replace('npm ci', 'npm ci --prefer-offline --no-audit --no-fund');
      const { status, stdout, stderr } = spawnSync('sh', ['-c', prepared], { cwd: clone, encoding: 'utf8' });
      expect({ command, status, stderr: status === 0 ? '' : stderr + stdout }).toEqual({
        command,
        status: 0,
        stderr: '',
      });
      printed.push(stdout);
    }
    // The summary that the README shows is the one that the demo prints, line by line.
    const shown = blocks('text').find((block) => block.startsWith('A bistable stage')) ?? 'missing';
    expect(printed[0]).toContain(shown);
    for (const file of [
      'report.html',
      'charts/closed-loop.png',
      'export/README.md',
      'export/matrices/H.mtx',
    ]) {
      expect(existsSync(join(clone, 'out/snap-through', file)), file).toBe(true);
    }
    expect(spawnSync('git', ['status', '--porcelain'], { cwd: clone, encoding: 'utf8' }).stdout).toBe('');
  }, 240_000);
});

describe('the examples of the README', () => {
  it('the minimal study reads without a problem', () => {
    const [text] = blocks('yaml');
    expect(Object.keys(parse(text))).toEqual(['plant', 'sampleTime', 'controller', 'scenario']);
    expect(readStudy(text, 'study.yaml').problems).toEqual([]);
  });

  it('the plant passes the check that every plant goes through', async () => {
    const [code] = blocks('ts');
    const { transform } = await import('esbuild');
    const { code: plain } = await transform(code.replace(/^import .*$/m, 'const definePlant = (p) => p;'), {
      loader: 'ts',
    });
    const { default: plant } = await import(`data:text/javascript,${encodeURIComponent(plain)}`);
    expect(checkPlant(plant).problems).toEqual([]);
  });
});

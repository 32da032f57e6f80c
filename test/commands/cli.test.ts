import { spawnSync } from 'node:child_process';
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
import { join, resolve } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { listKeys } from '../../src/study/describeTable.ts';

/** The compiled program, as a user runs it; `npm test` builds it first. */
const CLI = resolve('dist/cli.js');
const folder = mkdtempSync(join(tmpdir(), 'liftwright-cli-'));
afterAll(() => rmSync(folder, { recursive: true, force: true }));

const PLANT = `import { definePlant } from 'liftwright/plant';

export default definePlant({
  name: 'cart',
  description: 'A cart on a hardening spring.',
  states: [
    { name: 'position', unit: 'm', min: -1, max: 1 },
    { name: 'velocity', unit: 'm/s', min: -2, max: 2 },
  ],
  inputs: [{ name: 'force', unit: 'N', min: -3, max: 3, rate: 60 }],
  outputs: [{ name: 'position', unit: 'm', min: -1, max: 1, of: 'position' }],
  parameters: { stiffness: { unit: 'N/m', value: 1, tolerance: 0.1 } },
  derivative: (x, u, { stiffness }) => [x[1], u[0] - stiffness * (x[0] + x[0] ** 3) - x[1]],
  operatingPoint: { x: [0, 0], u: [0] },
  hazards: ['The cart pinches.'],
});
`;
const STUDY = `plant: ./plant.ts
sampleTime: 50 ms
experiment: { trajectories: 12, duration: 2 s }
lifting: { parts: [{ family: monomials, degree: 3 }] }
controller: { horizon: 10 }
scenario:
  references: { position: { shape: steps, values: [0.5, -0.5], hold: 1.5 s } }
  noise: 0.1 %
`;

function liftwright(...args: string[]) {
  const { status, stdout, stderr } = spawnSync(process.execPath, [CLI, ...args], {
    cwd: folder,
    encoding: 'utf8',
    env: { ...process.env, XDG_CACHE_HOME: join(folder, 'cache') },
  });
  return { status, stdout, stderr };
}

/** Writes a study, and a plant if it has one of its own, into a folder of its own. */
function place(name: string, study: string, plant = PLANT): string {
  mkdirSync(join(folder, name), { recursive: true });
  writeFileSync(join(folder, name, 'plant.ts'), plant);
  writeFileSync(join(folder, name, 'study.yaml'), study);
  return join(name, 'study.yaml');
}

/** Every file below a folder with its bytes; the one file of times left out. */
function bytesBelow(path: string): Map<string, string> {
  const files = readdirSync(join(folder, path), { recursive: true, withFileTypes: true });
  return new Map(
    files
      .filter((entry) => entry.isFile() && entry.name !== 'timings.json')
      .map((entry) => join(entry.parentPath, entry.name))
      .sort()
      .map((file) => [file.slice(join(folder, path).length), readFileSync(file).toString('base64')]),
  );
}

beforeAll(() => {
  if (!existsSync(CLI)) throw new Error('build the program first: npm run build');
  place('cart', STUDY);
});

describe('the command line', () => {
  it('--help and help list every verb and exit with 0', () => {
    for (const args of [['--help'], ['help']]) {
      const { status, stdout, stderr } = liftwright(...args);
      expect(status).toBe(0);
      expect(stderr).toBe('');
      for (const verb of ['run', 'experiment', 'fit', 'assess', 'design', 'simulate', 'report', 'export']) {
        expect(stdout).toMatch(new RegExp(`^ {2}${verb} `, 'm'));
      }
    }
  });

  it('help study names every key of the table', () => {
    const { status, stdout } = liftwright('help', 'study');
    expect(status).toBe(0);
    for (const { path } of listKeys()) expect(stdout).toContain(`${path}`);
  });

  it('--help loads nothing but commander: every other import of cli.ts waits for its verb', () => {
    const source = readFileSync('src/cli.ts', 'utf8');
    const eager = [...source.matchAll(/^import (?!type )[^;]*? from '([^']+)'/gm)].map(([, from]) => from);
    expect(eager).toEqual(['commander', './commands/version.ts']);
    const version = readFileSync('src/commands/version.ts', 'utf8');
    expect([...version.matchAll(/ from '([^']+)'/g)].map(([, from]) => from)).toEqual(['node:fs']);
  });

  it.each([
    [[], /Usage: liftwright/],
    [['walk', 'x.yaml'], /unknown command 'walk'/],
    [['run'], /missing required argument 'study'/],
    [['run', '--fast', 'x.yaml'], /unknown option '--fast'/],
    [['help', 'walk'], /there is no topic walk/],
    [['run', 'none.yaml'], /^none\.yaml: must be a study file that can be read, got no such file; /],
    [['run', 'cart'], /^cart: must be a study file that can be read, got a folder; try cart\/study\.yaml\n$/],
    [
      ['run', 'cart/study.yaml', '--seed', '-1'],
      /^--seed: must be an integer from 0 to 4294967295, got "-1"; /,
    ],
    [
      ['fit', 'cart/study.yaml', '--out', 'new'],
      /^new\/dataset\.json: must be the result of liftwright experiment, got no such file; run liftwright experiment cart\/study\.yaml first\n$/,
    ],
  ])('liftwright %j cannot be used: exit code 2 and one message on stderr', (args, message) => {
    const { status, stdout, stderr } = liftwright(...args);
    expect({ status, stdout }).toEqual({ status: 2, stdout: '' });
    expect(stderr).toMatch(message);
  });

  it('a study with faults: one line each, those that need the plant included, exit code 2', () => {
    const study = place(
      'bad',
      STUDY.replace('horizon: 10', 'horizon: ten').replace('position: {', 'positon: {'),
    );
    const { status, stderr } = liftwright('run', study);
    expect(status).toBe(2);
    expect(
      stderr
        .trimEnd()
        .split('\n')
        .map((line) => line.split(': must')[0]),
    ).toEqual(['bad/study.yaml:5: controller.horizon', 'bad/study.yaml:7: scenario.references.positon']);
  });

  it('a plant that cannot be used: its own file and line, exit code 2', () => {
    const study = place('bad-plant', STUDY, PLANT.replace('u[0] -', 'NaN -'));
    const { status, stderr } = liftwright('experiment', study);
    expect(status).toBe(2);
    expect(stderr).toMatch(/^bad-plant\/plant\.ts:\d+: .*derivative/);
  });

  it('an experiment that leaves no data stops the job with exit code 3 and writes nothing', () => {
    const runaway = PLANT.replace('u[0] - stiffness * (x[0] + x[0] ** 3) - x[1]', '1e6 * stiffness');
    const { status, stderr } = liftwright('run', place('runaway', STUDY, runaway));
    expect(status).toBe(3);
    expect(stderr).toMatch(/^liftwright: stopped: experiment\.trajectories: must be .+, got .+; .+\n$/);
    expect(existsSync(join(folder, 'out/runaway/dataset.json'))).toBe(false);
  });

  it('weights that leave the controller nothing to minimise stop the job with exit code 3', () => {
    const weightless = STUDY.replace(
      'horizon: 10',
      'horizon: 10, inputs: { force: { moveWeight: 0 } }, outputs: { position: { trackWeight: 0 } }',
    );
    const { status, stderr } = liftwright('run', place('weightless', weightless));
    expect(status).toBe(3);
    expect(stderr).toMatch(/^liftwright: stopped: controller: .*positive definite.*\n$/);
  });

  it('a lifting that the plant cannot serve: the line of the study file, exit code 2', () => {
    const study = place('no-physics', STUDY.replace('family: monomials, degree: 3', 'family: physics'));
    const { status, stderr } = liftwright('run', study);
    expect(status).toBe(2);
    expect(stderr).toMatch(/^no-physics\/study\.yaml:4: lifting\.parts\[1\].*: must be .+, got .+; .+\n$/);
  });

  it('a reader that closes the pipe early does not disturb the program', () => {
    const { status, stderr } = spawnSync(
      'bash',
      ['-c', `set -o pipefail; '${process.execPath}' '${CLI}' help study | head -n 1`],
      { encoding: 'utf8' },
    );
    expect({ status, stderr }).toEqual({ status: 0, stderr: '' });
  });
});

describe('a small study', () => {
  it('run does the whole job in at most 23 lines on the screen; another seed gives other data', () => {
    const first = liftwright('run', 'cart/study.yaml');
    expect(first.stderr).toBe('');
    expect([0, 1]).toContain(first.status);
    expect(first.stdout.trimEnd().split('\n').length).toBeLessThan(24);
    const files = bytesBelow('out/cart');
    for (const name of [
      '/dataset.json',
      '/predictor.json',
      '/trust.json',
      '/controller.json',
      '/loop.json',
      '/report.html',
    ]) {
      expect([...files.keys()]).toContain(name);
    }
    liftwright('experiment', 'cart/study.yaml', '--out', 'other', '--seed', '2');
    expect(bytesBelow('other').get('/dataset.json')).not.toBe(files.get('/dataset.json'));
  });

  it('same study, same seed, same bytes: the verbs one after the other write what run wrote', () => {
    for (const verb of ['experiment', 'fit', 'assess', 'design', 'simulate', 'report', 'export']) {
      const { status, stderr } = liftwright(verb, 'cart/study.yaml', '--out', 'steps');
      expect(stderr, verb).toBe('');
      expect([0, 1], verb).toContain(status);
    }
    expect(bytesBelow('steps')).toEqual(bytesBelow('out/cart'));
  });

  it('no file holds the path of this machine', () => {
    for (const [name, bytes] of bytesBelow('out/cart')) {
      expect(Buffer.from(bytes, 'base64').includes(folder), name).toBe(false);
    }
  });

  it('an acceptance limit that is missed: exit code 1, and the summary says so', () => {
    const { status, stdout } = liftwright(
      'run',
      place('strict', `${STUDY}accept: { trackingRms: 0.0001 % }\n`),
    );
    expect(status).toBe(1);
    expect(stdout).toContain('MISSED');
  });
});

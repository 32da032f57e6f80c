import { mkdirSync, mkdtempSync, readdirSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { pathToFileURL } from 'node:url';
import { transform } from 'esbuild';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { InputError } from '../../src/commands/inputError.ts';
import { loadPlant } from '../../src/commands/plantFile.ts';
import { createLocator, lineOfKey } from '../../src/commands/plantLines.ts';
import { nominalParameters } from '../../src/plant/plant.ts';

let folder: string;
let previous: string | undefined;
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'plant-file-'));
  previous = process.env.XDG_CACHE_HOME;
  process.env.XDG_CACHE_HOME = join(folder, 'cache');
});
afterAll(() => {
  if (previous === undefined) delete process.env.XDG_CACHE_HOME;
  else process.env.XDG_CACHE_HOME = previous;
  rmSync(folder, { recursive: true });
});

const GOOD = `import { definePlant, type Plant } from 'liftwright/plant';

interface Unused { readonly of: Plant }

export default definePlant({
  name: 'tank',
  description: 'A draining tank.',
  states: [{ name: 'level', unit: 'm', min: 0, max: 2 }],
  inputs: [{ name: 'valve', unit: '1', min: 0, max: 1 }],
  outputs: [{ name: 'level', unit: 'm', min: 0, max: 2, of: 'level' }],
  parameters: { drain: { unit: '1/s', value: 0.3 } },
  derivative(x, u, { drain }) {
    return [u[0] - drain * x[0]];
  },
  operatingPoint: { x: [1], u: [0.3] },
  hazards: ['It can overflow.'],
});
`;
let next = 0;
function write(text: string, name = 'plant.ts'): string {
  const file = join(folder, `${next++}`, name);
  mkdirSync(join(file, '..'), { recursive: true });
  writeFileSync(file, text);
  return file;
}

/** The message of the InputError that loading ends with. */
async function refusal(file: string): Promise<string> {
  const outcome = await loadPlant(file).then(
    () => null,
    (error: unknown) => error,
  );
  expect(outcome).toBeInstanceOf(InputError);
  return (outcome as InputError).message;
}
/** GOOD with one piece exchanged; its absence is a mistake of the test. */
function spoilt(piece: string, by: string): string {
  expect(GOOD).toContain(piece);
  return GOOD.replace(piece, by);
}

describe('loading a plant from any file', () => {
  it('compiles TypeScript outside the project, with this program’s own plant module', async () => {
    const { plant, module } = await loadPlant(write(GOOD));
    expect(plant.name).toBe('tank');
    expect(Array.from(plant.derivative([2], [1], nominalParameters(plant)))).toEqual([1 - 0.3 * 2]);
    expect(module).toMatch(/^file:.*\.mjs$/);
  });

  it('bundles what the plant imports, plain JavaScript too', async () => {
    const file = write(
      spoilt('u[0] - drain * x[0]', 'u[0] - drain * half(x[0])')
        .replace(/^.*$/m, "import { half } from './half.js';")
        .replace('definePlant(', '(')
        .replace(/interface .*\n/, ''),
      'tank.mjs',
    );
    writeFileSync(join(file, '..', 'half.js'), 'export const half = (v) => v / 2;\n');
    const { plant } = await loadPlant(file);
    expect(Array.from(plant.derivative([2], [1], { drain: 0.3 }))).toEqual([0.7]);
  });

  it('gives the same hash wherever the file lies and whatever its comments say, another one for other code', async () => {
    const { hash } = await loadPlant(write(GOOD));
    expect(hash).toMatch(/^[0-9a-f]{64}$/);
    expect((await loadPlant(write(`// A comment.\n${GOOD}`))).hash).toBe(hash);
    expect((await loadPlant(write(spoilt('0.3 } }', '0.31 } }')))).hash).not.toBe(hash);
  });

  it('sees a changed file when it is loaded again', async () => {
    const file = write(GOOD);
    await loadPlant(file);
    writeFileSync(file, spoilt('max: 2 }],\n  inputs', 'max: 3 }],\n  inputs'));
    expect((await loadPlant(file)).plant.states[0].max).toBe(3);
  });

  it('leaves nothing but whole modules in the cache', async () => {
    await loadPlant(write(GOOD));
    const names = readdirSync(join(folder, 'cache', 'liftwright'));
    expect(names.length).toBeGreaterThan(0);
    for (const name of names) expect(name).toMatch(/^[0-9a-f]{64}\.mjs$/);
  });
});

describe('a plant file that cannot be used is refused with file, line, key and the way out', () => {
  /** What is wrong, the file's text, and the message after the file's path. */
  const CASES: readonly (readonly [string, () => string, RegExp])[] = [
    [
      'a syntax error',
      () => spoilt('return [u[0]', 'return u[0]'),
      /^:13: must be TypeScript or JavaScript that compiles, got Expected .* mend it there$/,
    ],
    [
      'an import that is not there',
      () => `import './gone.ts';\n${GOOD}`,
      /^:1: must be .* compiles, got Could not resolve/,
    ],
    [
      'no default export',
      () => spoilt('export default definePlant', 'export const tank = definePlant'),
      /^: default export: must be a plant, got nothing; write export default definePlant/,
    ],
    [
      'a throw while loading',
      () => `${GOOD}\nconst table: number[] = [];\nthrow new RangeError(\`\${table.length} rows\`);\n`,
      /^:20: must be a module that loads, got an exception: RangeError: 0 rows; mend the line shown$/,
    ],
    [
      'a missing field',
      () => spoilt("  hazards: ['It can overflow.'],\n", ''),
      /^:5: hazards: must be a list of at least one sentence, got nothing/,
    ],
    [
      'a wrong type',
      () => spoilt("parameters: { drain: { unit: '1/s', value: 0.3 } }", 'parameters: 3'),
      /^:11: parameters: must be an object of parameters, got 3/,
    ],
    [
      'a range upside down',
      () => spoilt('min: 0, max: 2 }],\n  inputs', 'min: 4, max: 2 }],\n  inputs'),
      /^:8: states\.level\.min: must be below max = 2, got 4/,
    ],
    [
      'an operating point outside',
      () => spoilt('x: [1]', 'x: [7]'),
      /^:15: operatingPoint\.x\[0\]: must be a number from 0 to 2, got 7/,
    ],
    [
      'a NaN derivative',
      () => spoilt('drain * x[0]', 'drain * Math.sqrt(x[0] - 1)'),
      /^:12: derivative: must be finite .*, got NaN for level inside the ranges \(level = 0\.\d+, valve = 0\.\d+\); mend/,
    ],
    [
      'a derivative of wrong length',
      () => spoilt('drain * x[0]]', 'drain * x[0], 0]'),
      /^:12: derivative: must be a function that returns 1 number, one for each state, got 2 at the operating point/,
    ],
    [
      'a throw at a line of the derivative',
      () =>
        spoilt(
          '    return [u',
          '    const table = { a: 1 } as Record<string, number>;\n    if (x[0] > 0.5) table.b.toFixed();\n    return [u',
        ),
      /^:14: derivative: must be a function that returns for every state, got an exception at the operating point .*undefined.*; mend/,
    ],
  ];
  it.each(CASES)('%s', async (_, text, message) => {
    const file = write(text());
    const refused = await refusal(file);
    expect(refused.startsWith(file)).toBe(true);
    expect(refused.slice(file.length)).toMatch(message);
    expect(refused).not.toContain('\n');
  });

  it('a throw in a file that the plant imports: that file and its line', async () => {
    const file = write(`import { half } from './half.ts';\n${spoilt('drain * x[0]', 'drain * half(x[0])')}`);
    const helper = join(file, '..', 'half.ts');
    writeFileSync(
      helper,
      "\n\nexport function half(v: number): number {\n  throw new Error('not ' + v);\n}\n",
    );
    expect(await refusal(file)).toMatch(new RegExp(`^${helper.replaceAll('.', '\\.')}:4: derivative: `));
  });

  it('a throw that only a later state brings out: the line as well, when it comes', async () => {
    const file = write(
      spoilt('    return [u', "    if (x[0] > 2.5) throw new Error('overflow');\n    return [u"),
    );
    const { plant } = await loadPlant(file);
    expect(() => plant.derivative([3], [0], { drain: 0.3 })).toThrow(InputError);
    expect(() => plant.derivative([3], [0], { drain: 0.3 })).toThrow(
      /plant\.ts:13: derivative: .* an exception: Error: overflow; .* keep the study away/,
    );
  });

  it('several faults: one line each', async () => {
    const refused = await refusal(
      write(spoilt("'It can overflow.'", '').replace("name: 'tank'", "name: 'my tank'")),
    );
    expect(refused.split('\n').map((line) => line.replace(/^.*plant\.ts/, '').slice(0, 10))).toEqual([
      ':6: name: ',
      ':16: hazar',
    ]);
  });

  it('no such file, a folder, another ending', async () => {
    expect(await refusal(join(folder, 'none.ts'))).toMatch(/got no such file; check the path/);
    mkdirSync(join(folder, 'folder.ts'));
    expect(await refusal(join(folder, 'folder.ts'))).toMatch(/got a folder/);
    expect(await refusal(write('x', 'plant.py'))).toMatch(/must be a module ending in \.ts, .*got \.py/);
  });
});

describe('the place of an error', () => {
  it('is read from the source map when the stack is that of the compiled file, and from the stack when it is translated', async () => {
    const { code, map } = await transform('\n\nexport function f() {\n  throw new Error();\n}\n', {
      sourcefile: 'user.ts',
      sourcemap: true,
      minifyWhitespace: true,
    });
    const target = join(folder, 'compiled.mjs');
    const locate = createLocator(target, map);
    const raised = (stack: string) => Object.assign(new Error('x'), { stack });
    const column = code.indexOf('throw') + 1;
    expect(code.indexOf('\n')).toBeGreaterThan(column);
    const user = join(folder, 'user.ts');
    const other = 'Error: x\n    at node:internal/x:3:4\n    at g (/another/file.js:7:7)\n';
    for (const url of [target, pathToFileURL(target).href]) {
      expect(locate(raised(`${other}    at f (${url}:1:${column})`))).toEqual({ file: user, line: 4 });
      expect(locate(raised(`${other}    at ${url}:1:${column}`))).toEqual({ file: user, line: 4 });
    }
    expect(locate(raised(`${other}    at f (${user}:4:9)`))).toEqual({ file: user, line: 4 });
    expect(locate(raised(other))).toBeNull();
    expect(locate('a text')).toBeNull();
  });
});

describe('the line of a key', () => {
  it('is where the key stands, else where its holder stands, else unknown', () => {
    expect(lineOfKey(GOOD, 'states.level.min')).toBe(8);
    expect(lineOfKey(GOOD, 'outputs.level.of')).toBe(10);
    expect(lineOfKey(GOOD, 'parameters.drain.value')).toBe(11);
    expect(lineOfKey(GOOD, 'derivative')).toBe(12);
    expect(lineOfKey(GOOD, 'inputs.valve.rate')).toBe(9);
    expect(lineOfKey(GOOD, 'physics')).toBe(5);
    expect(lineOfKey('', 'physics')).toBeUndefined();
  });
});

import { createHash } from 'node:crypto';
import { mkdirSync, readFileSync } from 'node:fs';
import { tmpdir, userInfo } from 'node:os';
import { dirname, extname, join, resolve } from 'node:path';
import { fileURLToPath, pathToFileURL } from 'node:url';
import { type BuildFailure, build, type Plugin } from 'esbuild';
import { checkPlant } from '../plant/check.ts';
import type { Plant } from '../plant/plant.ts';
import { InputError, type Problem } from './inputError.ts';
import { createLocator, displayPath, type Locator, lineOfKey } from './plantLines.ts';
import { writeWhole } from './writeWhole.ts';

/** A plant from a file, and what identifies it. */
export interface LoadedPlant {
  readonly plant: Plant;
  /** SHA-256, hexadecimal, of the bundled code without comments: the same in whatever folder the file lies. */
  readonly hash: string;
  /** URL of the compiled module, for workers. */
  readonly module: string;
}

/** Endings that can be loaded. */
const ENDINGS = ['.ts', '.mts', '.js', '.mjs'];

/**
 * Loads any plant module on disk, wherever it lies: bundled with what it imports, `liftwright/plant` being this program's
 * own, compiled into a cache folder under the hash of its content, imported and checked by `checkPlant`.
 *
 * What the plant's functions throw later, at a state that the check did not try, comes out as an InputError with the
 * line of the user's file as well.
 *
 * @param file path of a TypeScript or JavaScript module whose default export is a plant.
 * @throws InputError when the file cannot be read, compiled, loaded or used as a plant, with the lines of the user's file.
 */
export async function loadPlant(file: string): Promise<LoadedPlant> {
  const path = resolve(file);
  const name = displayPath(path);
  const source = readSource(path, name);
  const folder = cacheFolder();
  const { code, map } = await compile(path, name, folder);
  const compiled = `${code}//# sourceMappingURL=data:application/json;base64,${Buffer.from(map).toString('base64')}\n`;
  const target = join(folder, `${sha256(compiled)}.mjs`);
  await writeWhole(target, compiled);
  const locate = createLocator(target, map);
  process.setSourceMapsEnabled(true);

  const module = pathToFileURL(target).href;
  const exported = await importModule(module, name, locate);
  const { problems, thrown } = checkPlant(exported);
  if (problems.length > 0) {
    const at = thrown === undefined ? null : locate(thrown);
    throw new InputError(
      problems.map((problem) =>
        at ? { ...problem, ...at } : { ...problem, file: name, line: lineOfKey(source, problem.key) },
      ),
    );
  }
  return { plant: guard(exported as Plant, name, locate), hash: sha256(code), module };
}

function readSource(path: string, name: string): string {
  const must = 'a plant module that can be read';
  if (!ENDINGS.includes(extname(path))) {
    const got = extname(path) || 'no ending';
    const wayOut = 'name the .ts or .js file with the plant';
    throw new InputError({ file: name, must: `a module ending in ${ENDINGS.join(', ')}`, got, wayOut });
  }
  try {
    return readFileSync(path, 'utf8');
  } catch (error) {
    const { code } = error as NodeJS.ErrnoException;
    const got = code === 'ENOENT' ? 'no such file' : code === 'EISDIR' ? 'a folder' : `an error (${code})`;
    throw new InputError({
      file: name,
      must,
      got,
      wayOut: 'check the path; it is relative to the study file',
    });
  }
}

/** Where compiled plants are kept; only this user may write there. */
function cacheFolder(): string {
  const { XDG_CACHE_HOME } = process.env;
  const folder = XDG_CACHE_HOME
    ? join(XDG_CACHE_HOME, 'liftwright')
    : join(tmpdir(), `liftwright-${userInfo().username}`);
  mkdirSync(folder, { recursive: true, mode: 0o700 });
  return folder;
}

async function compile(path: string, name: string, folder: string): Promise<{ code: string; map: string }> {
  try {
    const { outputFiles } = await build({
      entryPoints: [path],
      outfile: join(folder, 'plant.mjs'),
      bundle: true,
      format: 'esm',
      platform: 'node',
      target: 'node20',
      charset: 'utf8',
      // Without white space there are no comments with paths: the hash does not depend on where the file lies.
      minifyWhitespace: true,
      legalComments: 'none',
      sourcemap: 'external',
      write: false,
      logLevel: 'silent',
      plugins: [ownPlantModule],
    });
    const ending = (end: string) => outputFiles.find((output) => output.path.endsWith(end))!.text;
    return { code: ending('.mjs'), map: ending('.map') };
  } catch (error) {
    const { errors } = error as Partial<BuildFailure>;
    if (!errors?.length) throw error;
    throw new InputError(
      errors.map(({ text, location }): Problem => {
        const place = location
          ? { file: displayPath(resolve(location.file)), line: location.line }
          : { file: name };
        return {
          ...place,
          must: 'TypeScript or JavaScript that compiles',
          got: text,
          wayOut: 'mend it there',
        };
      }),
    );
  }
}

/** Lets a plant anywhere import `liftwright/plant`, with no package installed beside it. */
const ownPlantModule: Plugin = {
  name: 'own-plant-module',
  setup(builder) {
    const here = fileURLToPath(import.meta.url);
    const plantModule = join(dirname(here), '..', 'plant', `plant${extname(here)}`);
    builder.onResolve({ filter: /^liftwright\/plant$/ }, () => ({ path: plantModule }));
  },
};

async function importModule(url: string, name: string, locate: Locator): Promise<unknown> {
  try {
    const module = (await import(/* @vite-ignore */ url)) as { readonly default?: unknown };
    return module.default;
  } catch (error) {
    const place = locate(error) ?? { file: name };
    throw new InputError({
      ...place,
      must: 'a module that loads',
      got: `an exception: ${messageOf(error)}`,
      wayOut: 'mend the line shown',
    });
  }
}

/** The plant with every function wrapped, so that an exception names the line of the user's file. */
function guard(plant: Plant, name: string, locate: Locator): Plant {
  const wrap = <A extends readonly unknown[], R>(key: string, run: (...args: A) => R) => {
    return (...args: A): R => {
      try {
        return run(...args);
      } catch (error) {
        const place = locate(error) ?? { file: name };
        const got = `an exception: ${messageOf(error)}`;
        const wayOut = 'mend the line shown, or keep the study away from that state';
        throw new InputError({ ...place, key, must: 'a function that returns for every state', got, wayOut });
      }
    };
  };
  return {
    ...plant,
    outputs: plant.outputs.map((output) =>
      typeof output.of === 'function'
        ? { ...output, of: wrap(`outputs.${output.name}.of`, output.of) }
        : output,
    ),
    derivative: wrap('derivative', plant.derivative.bind(plant)),
    physics: plant.physics?.map((entry) => ({ ...entry, of: wrap(`physics.${entry.name}.of`, entry.of) })),
  };
}

function messageOf(error: unknown): string {
  return error instanceof Error ? `${error.name}: ${error.message}` : String(error);
}

function sha256(text: string): string {
  return createHash('sha256').update(text).digest('hex');
}

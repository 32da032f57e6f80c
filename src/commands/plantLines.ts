import { SourceMap, type SourceMapPayload } from 'node:module';
import { dirname, isAbsolute, relative, resolve } from 'node:path';
import { fileURLToPath } from 'node:url';

/** A line of a user's file, numbered from 1. */
export interface Place {
  readonly file: string;
  readonly line: number;
}

/** The line of the user's file where an error was thrown; null when it did not come from there. */
export type Locator = (error: unknown) => Place | null;

/** The path as the user would write it from here: relative when it lies below the working folder. */
export function displayPath(path: string): string {
  const below = relative('', path);
  return below === '' || below.startsWith('..') || isAbsolute(below) ? path : below;
}

/**
 * Reads the line out of an error's stack, for a module compiled to `target` with the source map `map`. A stack that has
 * been translated to the user's files already is understood too.
 */
export function createLocator(target: string, map: string): Locator {
  const payload = JSON.parse(map) as SourceMapPayload;
  const sourceMap = new SourceMap(payload);
  const sources = payload.sources.map((source) => resolve(dirname(target), source));
  return (error) => {
    const stack = error instanceof Error ? (error.stack ?? '') : '';
    for (const frame of stack.matchAll(
      /\(?((?:file:\/\/)?\/[^()\n]*?|[A-Za-z]:\\[^()\n]*?):(\d+):(\d+)\)?$/gm,
    )) {
      const path = frame[1].startsWith('file:') ? fileURLToPath(frame[1]) : frame[1];
      const line = Number(frame[2]);
      if (sources.includes(path)) return { file: displayPath(path), line };
      if (path !== target) continue;
      const entry = sourceMap.findEntry(line - 1, Number(frame[3]) - 1);
      if (!('originalSource' in entry)) continue;
      return {
        file: displayPath(resolve(dirname(target), entry.originalSource)),
        line: entry.originalLine + 1,
      };
    }
    return null;
  };
}

/**
 * The line of a plant's source where a key such as `states.gap.min` is written, as far as that can be read off the text:
 * the key, else what holds it, else the default export.
 */
export function lineOfKey(source: string, key: string): number | undefined {
  const lines = source.split('\n');
  const find = (pattern: RegExp, from: number) => {
    const index = lines.findIndex((line, i) => i >= from && pattern.test(line));
    return index < 0 ? null : index;
  };
  let at = find(/export default|module\.exports/, 0);
  let from = 0;
  for (const part of key.split(/[.[\]]+/).filter((part) => part !== '' && !/^\d+$/.test(part))) {
    const word = part.replace(/[^\w-]/g, '.');
    const next = find(new RegExp(`(?:^|[\\s{,'"])${word}['"]?\\s*[:(,}=]|name:\\s*['"]${word}['"]`), from);
    if (next === null) break;
    at = next;
    from = next;
  }
  return at === null ? undefined : at + 1;
}

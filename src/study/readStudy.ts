import { type Document, isMap, LineCounter, type Node, parseDocument, visit, type YAMLError } from 'yaml';
import type { Basis, Fields } from './kinds.ts';
import { type Problem, sortProblems } from './problem.ts';
import { createReader, describeNode, type Reader } from './reader.ts';
import { checkRules } from './rules.ts';
import { STUDY, type StudyValues, TABLE } from './table.ts';

/** A study file that was read: its values as far as they are usable, and everything that is wrong so far. */
export interface StudyDraft {
  readonly file: string;
  /** Complete when there are no problems; otherwise any part may be missing. */
  readonly values: Partial<StudyValues>;
  readonly problems: readonly Problem[];
  /** What only the plant can decide. */
  readonly names: Reader['names'];
  readonly quantities: Reader['quantities'];
  /** The line of a key, or of the nearest key above it that stands in the file. */
  readonly lineOf: (key: string) => number;
}

/**
 * Reads the text of a study file: everything that can be checked without the plant.
 *
 * @param file the name that messages show.
 * @returns a draft with ALL problems, sorted by line; never throws for anything that the text may contain.
 */
export function readStudy(text: string, file: string): StudyDraft {
  const counter = new LineCounter();
  const document = parseDocument(text, { lineCounter: counter, uniqueKeys: false, logLevel: 'error' });
  const reader = createReader(file, document, counter);
  const lineOf = (key: string): number => {
    const line = reader.lines.get(key);
    if (line !== undefined || key === '') return line ?? 1;
    return lineOf(key.replace(/(^|\.)[^.]*$/, ''));
  };
  const draft = { file, names: reader.names, quantities: reader.quantities, lineOf };

  const unresolved = findUnresolved(document, reader.lineOf, file);
  if (document.errors.length > 0 || unresolved.length > 0) {
    // What the parser says after its first error is mostly a consequence of it.
    const problems = [
      ...document.errors.slice(0, 1).map((error) => describeSyntax(error, file)),
      ...unresolved,
    ];
    return { ...draft, values: {}, problems: sortProblems(problems) };
  }
  const root = reader.resolve(document.contents);
  const spot = { key: '', line: 1 };
  if (!isMap(root)) {
    const got = root === null || describeNode(root) === 'nothing' ? 'an empty file' : describeNode(root);
    const wayOut =
      'start with plant, sampleTime, controller.horizon and scenario.references (liftwright help study)';
    reader.refuse(spot, 'a mapping of keys to values', got, wayOut);
    return { ...draft, values: {}, problems: reader.problems };
  }
  const values: Partial<StudyValues> = STUDY.read(reader, root, spot) ?? {};
  const { sampleTime, controller } = values;
  if (sampleTime !== undefined && controller?.horizon !== undefined) {
    fillDerived(values, TABLE, { sampleTime, horizon: controller.horizon });
  }
  const problems = [...reader.problems, ...checkRules(values, file, lineOf)];
  return { ...draft, values, problems: sortProblems(problems) };
}

/** A syntax error in the words of this program; the parser's own sentence follows "got". */
function describeSyntax(error: YAMLError, file: string): Problem {
  const line = error.linePos?.[0].line;
  const got = error.message.replace(/ at line \d+, column \d+:[\s\S]*$/, '');
  const wayOut =
    error.code === 'TAB_AS_INDENT'
      ? 'indent with spaces'
      : 'look for a missing colon, bracket, quotation mark or space on this line or the one above';
  return { file, line, must: 'YAML', got: `a slip: ${got.charAt(0).toLowerCase()}${got.slice(1)}`, wayOut };
}

/** Aliases without an anchor before them. */
function findUnresolved(document: Document, lineOf: (node: Node) => number, file: string): Problem[] {
  const problems: Problem[] = [];
  visit(document, {
    Alias: (_, node) => {
      if (node.resolve(document)) return;
      const wayOut = `write &${node.source} before the value that it stands for`;
      problems.push({
        file,
        line: lineOf(node),
        must: 'an alias of an anchor above',
        got: `*${node.source}`,
        wayOut,
      });
    },
  });
  return problems;
}

/** Puts the derived defaults where a group has nothing. */
function fillDerived(values: object, fields: Fields, basis: Basis): void {
  const target = values as Record<string, unknown>;
  for (const [key, { kind, presence }] of Object.entries(fields)) {
    if (presence.type === 'derived' && !(key in target)) target[key] = presence.from(basis);
    const inner = target[key];
    if (kind.below?.type === 'group' && inner !== undefined) {
      const copy = { ...(inner as object) };
      fillDerived(copy, kind.below.fields, basis);
      target[key] = copy;
    }
  }
}

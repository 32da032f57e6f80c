import type { Field, Fields, Kind } from './kinds.ts';
import { TABLE } from './table.ts';

/** One key of the study file as a page or a help text shows it. */
export interface KeyRow {
  /** Dotted path; `<output>` stands for a name of the plant, `[]` for the entries of a list. */
  readonly path: string;
  readonly must: string;
  /** As it would be written, or a few words; `required` where there is none. */
  readonly otherwise: string;
  readonly meaning: string;
}

/** Every key of the table in order, those below lists, names and variants included. */
export function listKeys(): KeyRow[] {
  return [...rowsOf(TABLE, '')];
}

function* rowsOf(fields: Fields, above: string): Generator<KeyRow> {
  for (const [key, field] of Object.entries(fields)) {
    const path = above === '' ? key : `${above}.${key}`;
    yield {
      path,
      must: shortMust(field.kind),
      otherwise: describeDefault(field),
      meaning: field.meaning,
    };
    yield* rowsBelow(field.kind, path);
  }
}

function* rowsBelow({ below }: Kind<unknown>, path: string): Generator<KeyRow> {
  if (below?.type === 'group') yield* rowsOf(below.fields, path);
  if (below?.type === 'map') yield* rowsBelow(below.of, `${path}.<${below.role}>`);
  if (below?.type === 'list') yield* rowsBelow(below.of, `${path}[]`);
  if (below?.type === 'variants') {
    for (const { name, meaning, fields } of below.variants) {
      yield { path: `${path}.${below.tag}: ${name}`, must: '', otherwise: '', meaning };
      yield* rowsOf(fields, `${path}`);
    }
  }
}

/** The kind in few words: what stands below a mapping or list has rows of its own. */
function shortMust({ must, below }: Kind<unknown>): string {
  if (below?.type === 'group') return 'a mapping';
  if (below?.type === 'map') return `a mapping by ${below.role}`;
  if (below?.type === 'list' && below.of.below)
    return must.startsWith('a list') ? 'a list' : 'an entry or a list';
  return must;
}

function describeDefault({ kind, presence }: Field<unknown>): string {
  if (presence.type === 'required') return 'required';
  if (presence.type === 'derived') return presence.text;
  if (presence.text) return presence.text;
  if (kind.below?.type === 'group' || kind.below?.type === 'map') return '';
  return kind.write(presence.value);
}

const INTRODUCTION = [
  'One YAML file a study. Quantities may carry units (2 ms, 0.5 A, 30 deg, 5 %); a bare number is in the SI unit.',
  'Paths are relative to the study file. Unknown keys are refused.',
];

/** The reference of the study file for a terminal. */
export function referenceText(): string {
  const lines = [...INTRODUCTION, ''];
  for (const { path, must, otherwise, meaning } of listKeys()) {
    if (!path.includes('.')) lines.push('');
    if (must === '') {
      lines.push(`  ${path}`, `      ${meaning}`);
      continue;
    }
    const tail = otherwise === '' ? '' : otherwise === 'required' ? '; required' : `; default ${otherwise}`;
    lines.push(`  ${path}: ${must}${tail}`, `      ${meaning}`);
  }
  return `${lines.join('\n').replace(/\n{3,}/g, '\n\n')}\n`;
}

/** The reference of the study file as Markdown tables, one a section. */
export function referenceMarkdown(): string {
  const rows = listKeys();
  const sections = Object.keys(TABLE).filter((key) => rows.some(({ path }) => path.startsWith(`${key}.`)));
  const lines = [...INTRODUCTION, '', ...markdownTable(rows.filter(({ path }) => !path.includes('.')))];
  for (const section of sections) {
    const own = rows.filter(({ path }) => path.startsWith(`${section}.`));
    lines.push('', `**${section}**`, '', ...markdownTable(own));
  }
  return `${lines.join('\n')}\n`;
}

/** A table with its columns aligned, as the formatter has it. */
function markdownTable(rows: readonly KeyRow[]): string[] {
  const cell = (text: string) => text.replaceAll('|', '\\|').replaceAll('<', '&lt;');
  const cells = [
    ['key', 'must be', 'default', 'meaning'],
    ...rows.map(({ path, must, otherwise, meaning }) => [
      `\`${path}\``,
      ...[must, otherwise, meaning].map(cell),
    ]),
  ];
  const widths = cells[0].map((_, i) => Math.max(3, ...cells.map((row) => row[i].length)));
  const line = (row: readonly string[]) => `| ${row.map((text, i) => text.padEnd(widths[i])).join(' | ')} |`;
  const [head, ...body] = cells.map(line);
  return [head, line(widths.map((width) => '-'.repeat(width))), ...body];
}

import { isMap, isScalar, isSeq, type Node, type YAMLMap } from 'yaml';
import type { Fields, Kind, Values } from './kinds.ts';
import { suggestWord } from './nearest.ts';
import { type ChannelRole, describeNode, quote, type Reader, type Spot } from './reader.ts';

interface Entry {
  readonly node: Node | null;
  readonly spot: Spot;
}

const join = (key: string, below: string) => (key === '' ? below : `${key}.${below}`);

/** The entries of a mapping by key; a second entry with the same key and a key that is no text are refused. */
function entriesOf(reader: Reader, map: YAMLMap, spot: Spot): Map<string, Entry> {
  const entries = new Map<string, Entry>();
  for (const pair of map.items) {
    const keyNode = reader.resolve(pair.key);
    const line = keyNode ? reader.lineOf(pair.key as Node) : spot.line;
    if (!isScalar(keyNode) || typeof keyNode.value !== 'string') {
      reader.refuse({ key: spot.key, line }, 'a word as key', describeNode(keyNode), 'write key: value');
      continue;
    }
    const key = join(spot.key, keyNode.value);
    const earlier = entries.get(keyNode.value);
    if (earlier) {
      const wayOut = `delete one of the two (the first is on line ${earlier.spot.line})`;
      reader.refuse({ key, line }, 'given once', 'a second entry', wayOut);
      continue;
    }
    const node = reader.resolve(pair.value);
    reader.lines.set(key, line);
    entries.set(keyNode.value, { node, spot: { ...spot, key, line } });
  }
  return entries;
}

/** Reads the fields of a group from its entries, fills in plain defaults, refuses unknown and missing keys. */
function readFields<F extends Fields>(
  reader: Reader,
  entries: ReadonlyMap<string, Entry>,
  fields: F,
  spot: Spot,
  also: readonly string[] = [],
): Values<F> {
  const keys = [...also, ...Object.keys(fields)];
  for (const [key, { spot: at }] of entries) {
    if (keys.includes(key)) continue;
    const where = spot.key === '' ? 'of the study file' : `of ${spot.key}`;
    reader.refuse(at, `a key ${where}`, quote(key), suggestWord(key, keys, 'the keys here are'));
  }
  const values: Record<string, unknown> = {};
  for (const [key, { kind, presence, meaning }] of Object.entries(fields)) {
    const entry = entries.get(key);
    if (entry) {
      values[key] = kind.read(reader, entry.node, entry.spot);
    } else if (presence.type === 'default') {
      values[key] = presence.value;
    } else if (presence.type === 'required') {
      const wayOut = `add it: ${meaning.charAt(0).toLowerCase()}${meaning.slice(1)}`;
      reader.refuse({ key: join(spot.key, key), line: spot.line }, kind.must, 'nothing', wayOut);
    }
  }
  return values as Values<F>;
}

/** A mapping with known keys. */
export function group<F extends Fields>(fields: F): Kind<Values<F>> {
  const wayOut = `indent its keys below it: ${Object.keys(fields).join(', ')}`;
  return {
    must: 'a mapping of keys to values',
    wayOut,
    below: { type: 'group', fields },
    write: () => '{}',
    read(reader, node, spot) {
      // `experiment:` with nothing below it is the same as leaving it out.
      const empty = node === null || (isScalar(node) && node.value === null);
      if (!isMap(node) && !empty) return reader.refuse(spot, this.must, describeNode(node), wayOut);
      return readFields(reader, isMap(node) ? entriesOf(reader, node, spot) : new Map(), fields, spot);
    },
  };
}

/** A mapping from the plant's names to values, with at least `least` entries. */
export function byName<T>(role: ChannelRole, of: Kind<T>, least = 0): Kind<ReadonlyMap<string, T>> {
  const article = /^[aeiou]/.test(role) ? 'an' : 'a';
  const must = `a mapping from the name of ${article} ${role} to ${of.must}`;
  const wayOut = `write the ${role}'s name, a colon and ${of.must} on a line of its own`;
  return {
    must,
    wayOut,
    below: { type: 'map', role, of },
    write: () => '{}',
    read: (reader, node, spot) => {
      if (!isMap(node) || node.items.length < least) {
        const got = isMap(node) ? 'an empty mapping' : describeNode(node);
        return reader.refuse(spot, must, got, wayOut);
      }
      const values = new Map<string, T>();
      for (const [name, entry] of entriesOf(reader, node, spot)) {
        const channel = { role, name };
        const at = { ...entry.spot, channel };
        reader.names.push({ ...channel, spot: at });
        const value = of.read(reader, entry.node, at);
        if (value !== undefined) values.set(name, value);
      }
      return values;
    },
  };
}

/** A list with at least `least` entries. */
export function list<T>(of: Kind<T>, least = 1): Kind<readonly T[]> {
  const must = `a list${least > 0 ? ` of at least ${least}` : ''}, each entry ${of.must}`;
  const wayOut = 'write the entries in brackets, separated by commas, or one a line after a hyphen';
  return {
    must,
    wayOut,
    below: { type: 'list', of },
    write: (values) => `[${values.map((value) => of.write(value)).join(', ')}]`,
    read: (reader, node, spot) => {
      if (!isSeq(node) || node.items.length < least) {
        return reader.refuse(spot, must, describeNode(node), wayOut);
      }
      const values = node.items.map((raw, i) => {
        const item = reader.resolve(raw);
        const line = raw ? reader.lineOf(raw as Node) : spot.line;
        return of.read(reader, item, { ...spot, key: `${spot.key}[${i + 1}]`, line });
      });
      return values.includes(undefined) ? undefined : (values as T[]);
    },
  };
}

/** One value, or a list of them. */
export function oneOrMore<T>(of: Kind<T>): Kind<readonly T[]> {
  const many = list(of);
  return {
    ...many,
    must: `${of.must}, or a list of them`,
    wayOut: of.wayOut,
    read: (reader, node, spot) => {
      if (isSeq(node)) return many.read(reader, node, spot);
      const value = of.read(reader, node, spot);
      return value === undefined ? undefined : [value];
    },
  };
}

export interface Variant {
  readonly meaning: string;
  readonly fields: Fields;
}

/** The value of one variant: which one, its fields' values, and where it stands. */
export type VariantValue<V extends Readonly<Record<string, Variant>>> = {
  [K in keyof V]: { readonly name: K; readonly values: Values<V[K]['fields']>; readonly spot: Spot };
}[keyof V];

/** A mapping whose `tag` decides which other keys it has. */
export function variants<V extends Readonly<Record<string, Variant>>>(
  tag: string,
  table: V,
): Kind<VariantValue<V>> {
  const names = Object.keys(table);
  const must = `a mapping with the key ${tag}`;
  const wayOut = `write ${tag}: and one of ${names.join(', ')}`;
  return {
    must,
    wayOut,
    below: {
      type: 'variants',
      tag,
      variants: names.map((name) => ({ name, ...table[name] })),
    },
    write: ({ name }) => `{ ${tag}: ${String(name)} }`,
    read: (reader, node, spot) => {
      if (!isMap(node)) return reader.refuse(spot, must, describeNode(node), wayOut);
      const entries = entriesOf(reader, node, spot);
      const entry = entries.get(tag);
      if (!entry)
        return reader.refuse(spot, must, `keys ${[...entries.keys()].join(', ') || 'none'}`, wayOut);
      const name = isScalar(entry.node) ? entry.node.value : undefined;
      if (typeof name !== 'string' || !Object.hasOwn(table, name)) {
        const suggestion = suggestWord(String(name), names, 'choose one of');
        return reader.refuse(entry.spot, `one of ${names.join(', ')}`, describeNode(entry.node), suggestion);
      }
      const before = reader.problems.length;
      const values = readFields(reader, entries, table[name].fields, spot, [tag]);
      return reader.problems.length > before ? undefined : ({ name, values, spot } as VariantValue<V>);
    },
  };
}

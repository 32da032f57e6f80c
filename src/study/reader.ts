import { type Document, isAlias, isMap, isScalar, isSeq, type LineCounter, type Node } from 'yaml';
import type { Problem } from './problem.ts';

/** What a name in the study file must be the name of, once the plant is known. */
export type ChannelRole = 'input' | 'output' | 'state' | 'parameter';

export interface ChannelName {
  readonly role: ChannelRole;
  readonly name: string;
}

/** Where a value stands, and the channel whose unit it has, if any. */
export interface Spot {
  readonly key: string;
  readonly line: number;
  readonly channel?: ChannelName;
}

/** A number in the unit of a channel (or that unit per second); the plant decides what it is worth. */
export interface ChannelQuantity {
  readonly value: number;
  /** As written; null for a bare number, which is in the channel's own unit. */
  readonly unit: string | null;
  readonly perSecond: boolean;
  readonly spot: Spot & { readonly channel: ChannelName };
}

/** Gathers, while the file is read, what is wrong and what only the plant can decide. */
export interface Reader {
  readonly problems: Problem[];
  /** Channel names that were met, to be looked up in the plant. */
  readonly names: (ChannelName & { readonly spot: Spot })[];
  readonly quantities: ChannelQuantity[];
  /** The line of every key that was read, by its path. */
  readonly lines: Map<string, number>;
  /** Notes a problem; returns `undefined`, which stands for "no value". */
  readonly refuse: (spot: Spot, must: string, got: string, wayOut: string) => undefined;
  readonly lineOf: (node: Node) => number;
  /** Follows an alias to the node that it names. */
  readonly resolve: (node: unknown) => Node | null;
}

/** A reader for one parsed document. */
export function createReader(file: string, document: Document, counter: LineCounter): Reader {
  const problems: Problem[] = [];
  return {
    problems,
    names: [],
    quantities: [],
    lines: new Map(),
    refuse: (spot, must, got, wayOut) => {
      problems.push({ file, line: spot.line, key: spot.key || undefined, must, got, wayOut });
      return undefined;
    },
    lineOf: (node) => Math.max(1, counter.linePos(node.range?.[0] ?? 0).line),
    resolve: (node) => {
      if (isAlias(node)) return node.resolve(document) ?? null;
      return (node as Node | null) ?? null;
    },
  };
}

const LONGEST = 40;

/** What stands in the file, in a few words. */
export function describeNode(node: Node | null): string {
  if (isMap(node)) return 'a mapping';
  if (isSeq(node)) return `a list of ${node.items.length}`;
  if (!isScalar(node) || node.value === null) return 'nothing';
  if (typeof node.value === 'string') return quote(node.value);
  return shorten(node.source ?? String(node.value));
}

/** A text in quotation marks, cut where it is long. */
export function quote(text: string): string {
  return JSON.stringify(shorten(text));
}

function shorten(text: string): string {
  return text.length > LONGEST ? `${text.slice(0, LONGEST - 1)}…` : text;
}

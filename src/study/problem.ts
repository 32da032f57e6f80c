/** One thing in a user's file that cannot be used, and the way out. */
export interface Problem {
  /** The file as the user would name it. */
  readonly file: string;
  /** Line in the file, from 1. */
  readonly line?: number;
  /** The key or field, dotted: `controller.horizon`. */
  readonly key?: string;
  /** Noun phrase after "must be": `an integer ≥ 1`. */
  readonly must: string;
  /** What stands there, after "got". */
  readonly got: string;
  /** What to do, an imperative. */
  readonly wayOut: string;
}

/** `file:line: key: must be X, got Y; way out`, always one line. */
export function formatProblem({ file, line, key, must, got, wayOut }: Problem): string {
  const where = [line === undefined ? file : `${file}:${line}`, ...(key ? [key] : [])].join(': ');
  return `${where}: must be ${must}, got ${got}; ${wayOut}`.replace(/\s*[\r\n]+\s*/g, ' ');
}

/** Problems in reading order: by line, those without one first; equal lines keep their order. */
export function sortProblems(problems: readonly Problem[]): Problem[] {
  return [...problems].sort((a, b) => (a.line ?? 0) - (b.line ?? 0));
}

import { formatProblem, type Problem } from '../study/problem.ts';

export type { Problem } from '../study/problem.ts';

/**
 * The user's files or arguments cannot be used: one or more problems, printed one a line, without a stack;
 * exit code 2.
 */
export class InputError extends Error {
  readonly problems: readonly Problem[];

  constructor(problems: Problem | readonly Problem[]) {
    const list = 'must' in problems ? [problems] : problems;
    super(list.map(formatProblem).join('\n'));
    this.name = 'InputError';
    this.problems = list;
  }
}

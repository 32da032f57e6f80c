/** Why a structure cannot be prepared; reads `key: must be X, got Y; way out`. */
export interface QpProblem {
  readonly key: string;
  readonly must: string;
  readonly got: string;
  readonly wayOut: string;
}

/** The matrices of a quadratic program do not make one that has exactly one optimum. */
export class UnusableQpError extends Error {
  readonly problem: QpProblem;
  /** Smallest eigenvalue of H; null when something else is wrong. */
  readonly smallestEigenvalue: number | null;

  constructor(problem: QpProblem, smallestEigenvalue: number | null = null) {
    super(`${problem.key}: must be ${problem.must}, got ${problem.got}; ${problem.wayOut}`);
    this.name = 'UnusableQpError';
    this.problem = problem;
    this.smallestEigenvalue = smallestEigenvalue;
  }
}

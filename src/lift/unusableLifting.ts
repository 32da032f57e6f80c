/** Why a lifting cannot be built or evaluated; reads `key: must be X, got Y; way out`. */
export interface LiftingProblem {
  readonly key: string;
  readonly must: string;
  readonly got: string;
  readonly wayOut: string;
}

/** The settings of a lifting, the plant's functions or the samples do not give a lifting that can be used. */
export class UnusableLiftingError extends Error {
  readonly problem: LiftingProblem;

  constructor(problem: LiftingProblem) {
    super(`${problem.key}: must be ${problem.must}, got ${problem.got}; ${problem.wayOut}`);
    this.name = 'UnusableLiftingError';
    this.problem = problem;
  }

  /** The same problem, its key told from further out. */
  within(outer: string): UnusableLiftingError {
    const { key, ...rest } = this.problem;
    return new UnusableLiftingError({ key: key === '' ? outer : `${outer}.${key}`, ...rest });
  }
}

/** @throws UnusableLiftingError always. */
export function refuseLifting(key: string, must: string, got: string | number, wayOut: string): never {
  throw new UnusableLiftingError({ key, must, got: String(got), wayOut });
}

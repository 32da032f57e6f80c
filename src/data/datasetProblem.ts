import { countSamples, type Dataset, type Role } from './dataset.ts';

/** Why a dataset cannot be used; reads `key: must be X, got Y; way out`. */
export interface DatasetProblem {
  readonly key: string;
  readonly must: string;
  readonly got: string;
  readonly wayOut: string;
}

/** What keeps a dataset from being used, as far as a look at its shape shows: a role without trajectories; else null. */
export function datasetProblem(dataset: Dataset): DatasetProblem | null {
  const roles: readonly Role[] = ['fit', 'choose', 'held-out'];
  const empty = roles.filter((role) => countSamples(dataset, role) === 0);
  if (empty.length === 0) return null;
  const { diverged, leftRange } = dataset.cuts;
  const cut = diverged + leftRange;
  return {
    key: 'experiment.trajectories',
    must: 'enough for at least one trajectory each to fit, choose and hold out',
    got: `${dataset.trajectories.length} usable (${diverged} diverged, ${leftRange} left the ranges), none to ${empty.join(', ')}`,
    wayOut:
      cut > 0
        ? 'plan more, or shorten the duration, lower amplitude or startRegion, or raise cutAt'
        : 'plan at least 3',
  };
}

import { clusterPoints } from '../numerics/kmeans.ts';
import type { FamilySetting, FamilyValues, LiftingContext } from './lifting.ts';
import { MOST_FUNCTIONS } from './limits.ts';
import { refuseLifting } from './unusableLifting.ts';

/** Settings of every family that has centres. */
export const CENTRE_SETTINGS: readonly FamilySetting[] = [
  {
    key: 'centres',
    kind: 'integer',
    min: 1,
    max: MOST_FUNCTIONS,
    default: 60,
    meaning: 'Number of centres; on a grid the largest full grid with no more than these',
  },
  {
    key: 'placement',
    kind: 'choice',
    choices: ['k-means', 'sampled', 'drawn', 'grid'],
    default: 'k-means',
    meaning:
      "Where the centres lie: at the data's k-means, at samples drawn from the data, drawn evenly from the ranges, or on a grid over the ranges",
  },
];

/** Samples that k-means looks at, at most. */
const MOST_SAMPLES = 5000;

/**
 * Centres in scaled coordinates, one list of nx numbers each.
 * @throws UnusableLiftingError when the data or the number do not give as many, or no grid.
 */
export function placeCentres({ centres, placement }: FamilyValues, context: LiftingContext): number[][] {
  const count = centres as number;
  const { nx, random } = context;
  switch (placement) {
    case 'grid':
      return placeOnGrid(count, nx);
    case 'drawn':
      return Array.from({ length: count }, () => Array.from({ length: nx }, () => 2 * random() - 1));
    case 'sampled':
      return drawSamples(count, context);
    default:
      return placeByClusters(count, context);
  }
}

/** As many equal steps on every axis as fit, the ends −1 and 1 included, the last axis fastest. */
function placeOnGrid(count: number, nx: number): number[][] {
  let side = 1;
  while ((side + 1) ** nx <= count) side++;
  if (side < 2) {
    const wayOut = 'raise it, or place them by k-means';
    refuseLifting(
      'centres',
      `at least 2^${nx} = ${2 ** nx} for a grid over ${nx} coordinates`,
      count,
      wayOut,
    );
  }
  return Array.from({ length: side ** nx }, (_, index) =>
    Array.from({ length: nx }, (_, j) => {
      const step = Math.floor(index / side ** (nx - 1 - j)) % side;
      return -1 + (2 * step) / (side - 1);
    }),
  );
}

/** Different samples, each equally likely (a partial Fisher–Yates shuffle over the distinct ones). */
function drawSamples(count: number, { nx, samples, random }: LiftingContext): number[][] {
  const distinct = new Map<string, number>();
  for (let i = 0; i * nx < samples.length; i++) {
    const key = samples.subarray(i * nx, (i + 1) * nx).join();
    if (!distinct.has(key)) distinct.set(key, i);
  }
  const rows = [...distinct.values()];
  if (rows.length < count) refuseTooFew(count, rows.length);
  return Array.from({ length: count }, (_, i) => {
    const j = i + Math.floor(random() * (rows.length - i));
    [rows[i], rows[j]] = [rows[j], rows[i]];
    return Array.from(samples.subarray(rows[i] * nx, (rows[i] + 1) * nx));
  });
}

function placeByClusters(count: number, { nx, samples, random }: LiftingContext): number[][] {
  const rows = samples.length / nx;
  const used = Math.min(rows, Math.max(MOST_SAMPLES, 10 * count));
  const points = new Float64Array(used * nx);
  for (let i = 0; i < used; i++) {
    const row = Math.floor((i * rows) / used);
    points.set(samples.subarray(row * nx, (row + 1) * nx), i * nx);
  }
  const clusters = clusterPoints(points, nx, count, random);
  if (clusters === null) return refuseTooFew(count, null);
  return Array.from({ length: count }, (_, c) => Array.from(clusters.centres.subarray(c * nx, (c + 1) * nx)));
}

function refuseTooFew(count: number, distinct: number | null): never {
  const most =
    distinct === null ? 'the number of distinct samples' : `${distinct}, the number of distinct samples`;
  return refuseLifting('centres', `at most ${most}`, count, 'lower it, or run more trajectories');
}

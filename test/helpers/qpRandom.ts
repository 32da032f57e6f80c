import { drawNormal, type Random } from '../../src/numerics/random.ts';
import type { Program } from './qpJudge.ts';

/** What is hard about a random program. */
export const KINDS = [
  'plain',
  'box',
  'degenerate',
  'duplicate',
  'parallel',
  'equality',
  'dependent equality',
  'soft',
  'condensed',
] as const;
export type Kind = (typeof KINDS)[number];

export interface RandomProgram {
  readonly kind: Kind;
  readonly condition: number;
  readonly scale: number;
  readonly program: Program;
}

/** 1 … most, small sizes far more often: `most^(u²)`. */
export function drawSize(random: Random, most: number): number {
  return Math.max(1, Math.round(most ** (random() * random())));
}

/**
 * A feasible program: bounds lie about the values that the rows take at a drawn point. H has the condition number asked for
 * and randomly turned axes.
 *
 * @param scale multiplies the point and all bounds.
 */
export function drawProgram(
  random: Random,
  kind: Kind,
  n: number,
  condition: number,
  scale: number,
): RandomProgram {
  const H = drawHessian(random, n, condition);
  const G = drawRows(random, kind, n);
  const m = G.length;
  const softness = G.map((_, i) => (kind === 'soft' && i % 2 === 0 ? 10 ** (-4 * random()) : 0));
  const point = Array.from({ length: n }, () => scale * drawNormal(random));
  const lower: number[] = [];
  const upper: number[] = [];
  // At most n equalities, all from the first rows: more would leave no freedom.
  const equalities = kind === 'equality' || kind === 'dependent equality' ? Math.ceil(n / 3) : 0;
  for (let i = 0; i < m; i++) {
    const value = G[i].reduce((sum, g, j) => sum + g * point[j], 0);
    const room = () => {
      const shape = random();
      if (shape < 0.25) return Number.POSITIVE_INFINITY;
      if (kind === 'degenerate' && shape < 0.7) return 0;
      return scale * random();
    };
    const equal = i < equalities || (kind === 'dependent equality' && i >= m - equalities);
    lower.push(equal ? value : value - room());
    upper.push(equal ? value : value + room());
  }
  // The minimum without rows lies well outside: H (point + far) = −q.
  const free = point.map((value) => value + 3 * scale * drawNormal(random));
  const q = H.map((row) => -row.reduce((sum, h, j) => sum + h * free[j], 0));
  return { kind, condition, scale, program: { H, q, G, lower, upper, softness } };
}

function drawHessian(random: Random, n: number, condition: number): number[][] {
  const values = Array.from({ length: n }, (_, i) => condition ** (n === 1 ? 0 : -i / (n - 1)));
  let H = values.map((value, i) => values.map((_, j) => (i === j ? value : 0)));
  for (let turn = 0; turn < 3; turn++) {
    const v = Array.from({ length: n }, () => drawNormal(random));
    const norm = Math.hypot(...v);
    H = reflect(
      H,
      v.map((value) => value / norm),
    );
  }
  return H.map((row, i) => row.map((_, j) => (i >= j ? H[i][j] : H[j][i])));
}

/** `(I − 2vvᵀ) H (I − 2vvᵀ)`. */
function reflect(H: readonly (readonly number[])[], v: readonly number[]): number[][] {
  const Hv = H.map((row) => row.reduce((sum, h, j) => sum + h * v[j], 0));
  const vHv = v.reduce((sum, value, i) => sum + value * Hv[i], 0);
  return H.map((row, i) =>
    row.map((h, j) => h - 2 * v[i] * Hv[j] - 2 * Hv[i] * v[j] + 4 * vHv * v[i] * v[j]),
  );
}

function drawRows(random: Random, kind: Kind, n: number): number[][] {
  const unit = (i: number) => Array.from({ length: n }, (_, j) => (i === j ? 1 : 0));
  const box = Array.from({ length: n }, (_, i) => unit(i));
  const normal = () => Array.from({ length: n }, () => drawNormal(random));
  const general = Array.from({ length: Math.max(1, Math.round(n * (0.5 + random()))) }, normal);
  const pick = () => general[Math.floor(random() * general.length)];
  switch (kind) {
    case 'box':
      return box;
    case 'duplicate':
      return [...general, ...general.map((row) => row.map((g) => g * (random() < 0.5 ? 1 : -2)))];
    case 'parallel':
      return [
        ...general,
        ...general.map(() => pick().map((g) => g + 10 ** (-4 - 5 * random()) * drawNormal(random))),
      ];
    case 'dependent equality': {
      const first = general.slice(0, Math.ceil(n / 3));
      const sums = first.map((row, i) => row.map((g, j) => 2 * g - first[(i + 1) % first.length][j]));
      return [...general, ...box, ...sums];
    }
    case 'condensed': {
      // Box, rate and lower-triangular output rows, as a horizon has them.
      const decay = 0.6 + 0.5 * random();
      const rates = box.map((row, i) => row.map((g, j) => (j === i - 1 ? -1 : g)));
      const outputs = box.map((_, i) =>
        unit(i).map((__, j) => (j <= i ? decay ** (i - j) * (1 + 0.1 * (i - j)) : 0)),
      );
      return [...box, ...rates, ...outputs];
    }
    default:
      return [...general, ...box];
  }
}

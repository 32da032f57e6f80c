import { liftRows } from './bind.ts';
import type { BoundLifting } from './lifting.ts';

/** A function that equals an earlier one on the samples; `sameAs` is −1 for one that does not vary. */
export interface Duplicate {
  readonly index: number;
  readonly sameAs: number;
}

/** How far a function counts as a duplicate: never, when it equals another one, or also up to scale and offset. */
export type DuplicateRule = 'never' | 'equal' | 'affine';

/**
 * Deviation from `a g + b`, relative to how far the function varies, below which it is that: far above the rounding of
 * any function that is not ill-posed itself, and too little for a regression to tell the two apart.
 */
const TOLERANCE = 1e-10;
/** Samples on which all pairs are compared; only pairs that agree there are compared on all samples. */
const FIRST_LOOK = 256;

/** What is compared of one function: its values on the first look, and where they are least and greatest. */
interface Column {
  readonly values: Float64Array;
  readonly least: number;
  readonly greatest: number;
  readonly range: number;
  readonly size: number;
}

/** The claim `f = a g + b` within `slack`; `g` is −1 for a function that does not vary (`a = 0`). */
interface Claim {
  readonly f: number;
  readonly g: number;
  readonly a: number;
  readonly b: number;
  readonly slack: number;
}

/**
 * Finds functions that equal an earlier, kept one on all samples: `f = a g + b` to 1e-10 of how far `f` varies. Values that
 * are not finite equal nothing. Cost: nz² short comparisons, and samples · nz when there is any duplicate.
 *
 * @param samples rows of nx, scaled, at least one. @param rule what counts for the function at an index.
 */
export function findDuplicates(
  bound: BoundLifting,
  samples: Float64Array,
  nx: number,
  rule: (index: number) => DuplicateRule,
): Duplicate[] {
  const columns = lookFirst(bound, samples, nx);
  const refuted = new Set<string>();
  for (;;) {
    const claims = claimDuplicates(columns, rule, refuted);
    const wrong = refuteClaims(claims, bound, samples, nx);
    if (wrong.length === 0) return claims.map(({ f, g }) => ({ index: f, sameAs: g }));
    for (const { f, g } of wrong) refuted.add(`${f} ${g}`);
  }
}

function lookFirst(bound: BoundLifting, samples: Float64Array, nx: number): Column[] {
  const rows = samples.length / nx;
  const count = Math.min(rows, FIRST_LOOK);
  const X = new Float64Array(count * nx);
  for (let i = 0; i < count; i++) {
    const row = Math.floor((i * rows) / count);
    X.set(samples.subarray(row * nx, (row + 1) * nx), i * nx);
  }
  const { data, cols } = liftRows(bound, X);
  return Array.from({ length: cols }, (_, j) => {
    const values = Float64Array.from({ length: count }, (_, i) => data[i * cols + j]);
    let least = 0;
    let greatest = 0;
    for (let i = 1; i < count; i++) {
      if (!(values[i] >= values[least])) least = i;
      if (!(values[i] <= values[greatest])) greatest = i;
    }
    const [min, max] = [values[least], values[greatest]];
    return { values, least, greatest, range: max - min, size: Math.max(Math.abs(min), Math.abs(max)) };
  });
}

function claimDuplicates(
  columns: readonly Column[],
  rule: (index: number) => DuplicateRule,
  refuted: ReadonlySet<string>,
): Claim[] {
  const kept: number[] = [];
  const claims: Claim[] = [];
  for (let f = 0; f < columns.length; f++) {
    const claim = claimOne(f, kept, columns, rule(f), refuted);
    if (claim) claims.push(claim);
    else kept.push(f);
  }
  return claims;
}

function claimOne(
  f: number,
  kept: readonly number[],
  columns: readonly Column[],
  rule: DuplicateRule,
  refuted: ReadonlySet<string>,
): Claim | null {
  if (rule === 'never') return null;
  const { values, range, size } = columns[f];
  if (range <= TOLERANCE * size) {
    if (rule === 'equal' || refuted.has(`${f} -1`)) return null;
    return { f, g: -1, a: 0, b: values[0], slack: TOLERANCE * size };
  }
  for (const g of kept) {
    const other = columns[g];
    if (!(other.range > TOLERANCE * other.size) || refuted.has(`${f} ${g}`)) continue;
    const a = rule === 'equal' ? 1 : (values[other.greatest] - values[other.least]) / other.range;
    const b = rule === 'equal' ? 0 : values[other.least] - a * other.values[other.least];
    const claim = { f, g, a, b, slack: TOLERANCE * range };
    if (values.every((value, i) => holds(claim, value, other.values[i]))) return claim;
  }
  return null;
}

function holds({ a, b, slack }: Claim, f: number, g: number): boolean {
  return Math.abs(f - a * g - b) <= slack;
}

/** The claims that some sample contradicts. */
function refuteClaims(
  claims: readonly Claim[],
  bound: BoundLifting,
  samples: Float64Array,
  nx: number,
): Claim[] {
  const wrong = new Set<Claim>();
  const z = new Float64Array(bound.nz);
  for (let row = 0; row < samples.length && claims.length > wrong.size; row += nx) {
    bound.liftInto(z, samples.subarray(row, row + nx));
    for (const claim of claims) {
      if (!holds(claim, z[claim.f], claim.g < 0 ? 0 : z[claim.g])) wrong.add(claim);
    }
  }
  return [...wrong];
}

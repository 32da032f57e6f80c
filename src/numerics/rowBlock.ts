/**
 * A block of sample rows `[w | y]`: regressors `w` (p entries) and targets `y` (q entries), each padded with zeros to
 * a multiple of four columns so that the kernels run on whole 4 × 4 tiles.
 */
export interface RowBlock {
  /** Rows that fit. */
  readonly capacity: number;
  readonly p: number;
  readonly q: number;
  /** Column at which the targets start: `p` rounded up to a multiple of four. */
  readonly targets: number;
  /** Entries a row, a multiple of four. */
  readonly stride: number;
  /** capacity × stride, row-major; padding columns stay zero. */
  readonly data: Float64Array;
}

/** Where an array comes from: `kernels.allocate`, or a plain constructor. */
export type Allocate = (length: number) => Float64Array;

/** Entries that a block of `capacity` rows takes. */
export function rowBlockLength(capacity: number, p: number, q: number): number {
  return capacity * (Math.ceil(p / 4) * 4 + Math.ceil(q / 4) * 4);
}

/** An empty block of `capacity` rows for `p` regressors and `q` targets. */
export function createRowBlock(capacity: number, p: number, q: number, allocate: Allocate): RowBlock {
  const targets = Math.ceil(p / 4) * 4;
  const stride = targets + Math.ceil(q / 4) * 4;
  return { capacity, p, q, targets, stride, data: allocate(rowBlockLength(capacity, p, q)) };
}

/** `squares[j] += Σₖ Y[k][j]²` over the first `count` rows, q entries. */
export function accumulateSquares(squares: Float64Array, block: RowBlock, count: number): void {
  const { q, targets, stride, data } = block;
  for (let k = 0; k < count; k++) {
    const row = k * stride + targets;
    for (let j = 0; j < q; j++) squares[j] += data[row + j] * data[row + j];
  }
}

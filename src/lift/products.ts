import type { FamilyFunctions, FamilySetting, LiftingFamily } from './lifting.ts';
import { type DegreeCounts, listMultiIndices } from './multiIndices.ts';

/** A family of products `Π_j p_{n_j}(x_j)` of polynomials in one variable. */
export interface ProductFamily {
  readonly name: string;
  readonly meaning: string;
  readonly source?: string;
  /** How `p_n` of an axis is written, n ≥ 1. */
  readonly symbol: (n: number, axis: string) => string;
  /** `[a_n, b_n]` of `p_{n+1}(x) = a_n x p_n(x) − b_n p_{n−1}(x)`, `p_0 = 1`, `p_{−1} = 0`. */
  readonly recurrence: (n: number) => readonly [number, number];
  readonly highestDegree: number;
  /** What the degree counts when that is not a setting. */
  readonly counts?: DegreeCounts;
}

/** The lifting family of products of polynomials that follow a three-term recurrence. */
export function createProductFamily(family: ProductFamily): LiftingFamily {
  const degree: FamilySetting = {
    key: 'degree',
    kind: 'integer',
    min: 1,
    max: family.highestDegree,
    default: 3,
    meaning: family.counts === 'total' ? 'Highest total degree' : 'Highest degree',
  };
  const counts: FamilySetting = {
    key: 'degreeCounts',
    kind: 'choice',
    choices: ['total', 'per-axis'],
    default: 'total',
    meaning: 'Does the degree limit the sum of the orders, or the order along each axis',
  };
  return {
    name: family.name,
    meaning: family.meaning,
    source: family.source,
    settings: family.counts ? [degree] : [degree, counts],
    build: (values, { nx, coordinates }) => {
      const over = family.counts ?? (values.degreeCounts as DegreeCounts);
      const orders = listMultiIndices(nx, values.degree as number, over);
      const names = orders.map((order) => nameProduct(order, coordinates, family.symbol));
      return { names, constants: { orders } };
    },
    functions: ({ orders }, { nx }) =>
      bindProducts(orders as readonly (readonly number[])[], nx, family.recurrence),
  };
}

function nameProduct(
  order: readonly number[],
  coordinates: readonly { readonly name: string }[],
  symbol: ProductFamily['symbol'],
): string {
  const factors = order.flatMap((n, j) => (n > 0 ? [symbol(n, coordinates[j].name)] : []));
  return factors.length > 0 ? factors.join('·') : '1';
}

/** The products of the given orders (one list of nx an entry), evaluated from a table of each axis' polynomials. */
function bindProducts(
  orders: readonly (readonly number[])[],
  nx: number,
  recurrence: ProductFamily['recurrence'],
): FamilyFunctions {
  const count = orders.length;
  const degree = Math.max(0, ...orders.flat());
  const width = degree + 1;
  const a = Float64Array.from({ length: degree }, (_, n) => recurrence(n)[0]);
  const b = Float64Array.from({ length: degree }, (_, n) => recurrence(n)[1]);
  // at[i · nx + j]: where the j-th factor of the i-th product stands in the tables.
  const at = Int32Array.from(orders.flatMap((order) => order.map((n, j) => j * width + n)));
  const values = new Float64Array(nx * width);
  const slopes = new Float64Array(nx * width);

  const tabulateValues = (x: ArrayLike<number>) => {
    for (let j = 0; j < nx; j++) {
      const row = j * width;
      values[row] = 1;
      let before = 0;
      for (let n = 0; n < degree; n++) {
        const now = values[row + n];
        values[row + n + 1] = a[n] * x[j] * now - b[n] * before;
        before = now;
      }
    }
  };
  // p'_{n+1} = a_n (p_n + x p'_n) − b_n p'_{n−1}
  const tabulateSlopes = (x: ArrayLike<number>) => {
    for (let j = 0; j < nx; j++) {
      const row = j * width;
      slopes[row] = 0;
      let before = 0;
      for (let n = 0; n < degree; n++) {
        const now = slopes[row + n];
        slopes[row + n + 1] = a[n] * (values[row + n] + x[j] * now) - b[n] * before;
        before = now;
      }
    }
  };
  return {
    count,
    evaluateInto: (out, offset, x) => {
      tabulateValues(x);
      for (let i = 0; i < count; i++) {
        let product = values[at[i * nx]];
        for (let j = 1; j < nx; j++) product *= values[at[i * nx + j]];
        out[offset + i] = product;
      }
    },
    gradientInto: (out, offset, x) => {
      tabulateValues(x);
      tabulateSlopes(x);
      for (let i = 0; i < count; i++) {
        for (let along = 0; along < nx; along++) {
          let product = slopes[at[i * nx + along]];
          for (let j = 0; j < nx; j++) if (j !== along) product *= values[at[i * nx + j]];
          out[(offset + i) * nx + along] = product;
        }
      }
    },
  };
}

import { createProductFamily } from './products.ts';

/** Products of powers `x_1^{n_1} · … · x_nx^{n_nx}` of total degree `Σ n_j ≤ degree`. */
export const monomials = createProductFamily({
  name: 'monomials',
  meaning: 'Products of powers of the coordinates up to a total degree',
  symbol: (n, axis) => (n === 1 ? axis : `${axis}^${n}`),
  recurrence: () => [1, 0],
  highestDegree: 8,
  counts: 'total',
});

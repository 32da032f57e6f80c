import { createProductFamily } from './products.ts';

/** Legendre polynomials, `(n + 1) P_{n+1}(x) = (2n + 1) x P_n(x) − n P_{n−1}(x)`: orthogonal under the uniform density on [−1, 1]. */
export const legendre = createProductFamily({
  name: 'legendre',
  meaning: 'Products of Legendre polynomials P_n; well conditioned on data spread over the ranges',
  source: 'M. Abramowitz, I. A. Stegun, Handbook of Mathematical Functions, 1964, ch. 22',
  symbol: (n, axis) => `P${n}(${axis})`,
  recurrence: (n) => [(2 * n + 1) / (n + 1), n / (n + 1)],
  highestDegree: 12,
});

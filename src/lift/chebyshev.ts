import { createProductFamily } from './products.ts';

/** Chebyshev polynomials of the first kind, `T_{n+1}(x) = 2 x T_n(x) − T_{n−1}(x)`, `T_1(x) = x`: within [−1, 1] on [−1, 1]. */
export const chebyshev = createProductFamily({
  name: 'chebyshev',
  meaning: 'Products of Chebyshev polynomials T_n of the first kind; well conditioned on data near the ends',
  source: 'M. Abramowitz, I. A. Stegun, Handbook of Mathematical Functions, 1964, ch. 22',
  symbol: (n, axis) => `T${n}(${axis})`,
  recurrence: (n) => (n === 0 ? [1, 0] : [2, 1]),
  highestDegree: 12,
});

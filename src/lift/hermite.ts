import { createProductFamily } from './products.ts';

/**
 * Probabilists' Hermite polynomials, `He_{n+1}(x) = x He_n(x) − n He_{n−1}(x)`: the convention with leading coefficient 1,
 * so that `He_1(x) = x` is the coordinate itself, and orthogonal under the standard normal density. (The physicists'
 * `H_n(x) = 2^{n/2} He_n(√2 x)` span the same space with columns whose sizes differ by a further `2^n`.)
 */
export const hermite = createProductFamily({
  name: 'hermite',
  meaning: "Products of probabilists' Hermite polynomials He_n, He_1(x) = x; worse conditioned than Legendre",
  source: 'M. Abramowitz, I. A. Stegun, Handbook of Mathematical Functions, 1964, ch. 22',
  symbol: (n, axis) => `He${n}(${axis})`,
  recurrence: (n) => [1, n],
  highestDegree: 12,
});

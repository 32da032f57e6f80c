import { familyOf } from '../lift/families.ts';
import type { LiftingPart } from '../lift/lifting.ts';

const PRODUCT = 'the product over the axes j of the polynomials of order orders[i][j] in x_j';
const DISTANCE = 's = sum over j of (x_j - centres[i][j])^2';
const MAPPED =
  'each a function f of the plant file, at the physical state: (f(x_centre + x_half x) - centre[i]) / half[i]';

/** The function number i of each family in scaled coordinates x, in plain letters; constants by the names they are exported with. */
const FORMULAS: Readonly<Record<string, string>> = {
  state: 'x_i, the scaled coordinate itself',
  constant: 'the number 1',
  monomials: `${PRODUCT}: x_j^n`,
  hermite: `${PRODUCT}: He_0 = 1, He_1 = x, He_n+1 = x He_n - n He_n-1`,
  legendre: `${PRODUCT}: P_0 = 1, P_1 = x, P_n+1 = ((2n + 1) x P_n - n P_n-1) / (n + 1)`,
  chebyshev: `${PRODUCT}: T_0 = 1, T_1 = x, T_n+1 = 2 x T_n - T_n-1`,
  'thin-plate': `r^2 ln r = s ln(s) / 2 with ${DISTANCE}, and 0 where s = 0`,
  gaussian: `exp(-s / (2 width^2)) with ${DISTANCE}`,
  'random-fourier': 'cos(phases[i] + sum over j of frequencies[i][j] x_j)',
  physics: MAPPED,
  output: MAPPED,
};

/** What the functions of a part are, in plain letters; a family that is not listed here tells its own meaning. */
export function liftingFormula({ family }: Pick<LiftingPart, 'family'>): string {
  return FORMULAS[family] ?? familyOf(family)?.meaning ?? 'a family that this version does not know';
}

import { describe, expect, it } from 'vitest';
import { FAMILIES } from '../../src/lift/families.ts';
import { contextOf } from './liftingFixture.ts';

const DEGREE = 12;

/** `p_0(x) … p_12(x)` of a family on one axis. */
function tabulate(family: string, x: number): Float64Array {
  const context = contextOf(1);
  const { build, functions } = FAMILIES[family];
  const { constants } = build({ degree: DEGREE, degreeCounts: 'per-axis' }, context);
  const { count, evaluateInto } = functions(constants, context);
  const out = new Float64Array(count);
  evaluateInto(out, 0, [x]);
  return out;
}

const horner = (coefficients: readonly number[], x: number) =>
  coefficients.reduce((sum, coefficient) => sum * x + coefficient, 0);

/*
 * M. Abramowitz, I. A. Stegun, Handbook of Mathematical Functions, 1964, tables of coefficients 22.3 (T_n), 22.9 (P_n) and
 * 22.12 (H_n): from memory; highest power first, and a common divisor.
 */
const PRINTED: readonly (readonly [
  family: string,
  n: number,
  divisor: number,
  coefficients: readonly number[],
])[] = [
  ['chebyshev', 4, 1, [8, 0, -8, 0, 1]],
  ['chebyshev', 5, 1, [16, 0, -20, 0, 5, 0]],
  ['chebyshev', 6, 1, [32, 0, -48, 0, 18, 0, -1]],
  ['legendre', 2, 2, [3, 0, -1]],
  ['legendre', 4, 8, [35, 0, -30, 0, 3]],
  ['legendre', 5, 8, [63, 0, -70, 0, 15, 0]],
  ['legendre', 6, 16, [231, 0, -315, 0, 105, 0, -5]],
  ['hermite', 3, 1, [1, 0, -3, 0]],
  ['hermite', 4, 1, [1, 0, -6, 0, 3]],
  ['hermite', 5, 1, [1, 0, -10, 0, 15, 0]],
  ['hermite', 6, 1, [1, 0, -15, 0, 45, 0, -15]],
];

describe('one-variable polynomials', () => {
  for (const [family, n, divisor, coefficients] of PRINTED) {
    it(`${family} ${n} has the coefficients printed in Abramowitz and Stegun, ch. 22`, () => {
      for (const x of [-1.3, -1, -0.5, 0, 0.1, 0.5, 1, 1.3]) {
        const expected = horner(coefficients, x) / divisor;
        const size = horner(coefficients.map(Math.abs), Math.abs(x)) / divisor;
        expect(Math.abs(tabulate(family, x)[n] - expected)).toBeLessThanOrEqual(1e-14 * size);
      }
    });
  }

  it('T5(0.5) = 0.5, P4(0.5) = −37/128, and H5(0.5) = 41 = 2^{5/2} He5(0.5 √2), in closed form', () => {
    expect(tabulate('chebyshev', 0.5)[5]).toBe(0.5);
    expect(Math.abs(tabulate('legendre', 0.5)[4] + 37 / 128)).toBeLessThan(1e-16);
    expect(Math.abs(2 ** 2.5 * tabulate('hermite', 0.5 * Math.SQRT2)[5] - 41)).toBeLessThan(1e-13);
  });

  it('T_n(cos t) = cos(n t) to degree 12, in closed form', () => {
    for (let k = 0; k <= 20; k++) {
      const t = (Math.PI * k) / 20;
      tabulate('chebyshev', Math.cos(t)).forEach((value, n) => {
        expect(Math.abs(value - Math.cos(n * t))).toBeLessThan(1e-13);
      });
    }
  });

  it('P_n(1) = 1 and P_n(−1) = (−1)^n to degree 12, in closed form', () => {
    tabulate('legendre', 1).forEach((value) => {
      expect(Math.abs(value - 1)).toBeLessThan(1e-14);
    });
    tabulate('legendre', -1).forEach((value, n) => {
      expect(Math.abs(value - (-1) ** n)).toBeLessThan(1e-14);
    });
  });

  it('monomials on one axis are the powers', () => {
    const context = contextOf(1);
    const { constants, names } = FAMILIES.monomials.build({ degree: 8 }, context);
    const out = new Float64Array(9);
    FAMILIES.monomials.functions(constants, context).evaluateInto(out, 0, [-0.5]);
    expect(Array.from(out)).toEqual([1, -0.5, 0.25, -0.125, 0.0625, -0.03125, 2 ** -6, -(2 ** -7), 2 ** -8]);
    expect(names.slice(0, 3)).toEqual(['1', 'x1', 'x1^2']);
  });
});

/** `Σ w p_m(x) p_n(x)` over a quadrature rule, all m, n ≤ 12. */
function products(family: string, rule: readonly (readonly [x: number, w: number])[]): number[][] {
  const sums = Array.from({ length: DEGREE + 1 }, () => new Array<number>(DEGREE + 1).fill(0));
  for (const [x, w] of rule) {
    const p = tabulate(family, x);
    for (let m = 0; m <= DEGREE; m++) for (let n = 0; n <= DEGREE; n++) sums[m][n] += w * p[m] * p[n];
  }
  return sums;
}

function expectOrthogonal(sums: number[][], norm: (n: number) => number): void {
  for (let m = 0; m <= DEGREE; m++) {
    for (let n = 0; n <= DEGREE; n++) {
      const expected = m === n ? norm(n) : 0;
      expect(Math.abs(sums[m][n] - expected)).toBeLessThan(1e-12 * Math.sqrt(norm(m) * norm(n)));
    }
  }
}

describe('orthogonality to degree 12, norms in closed form (Abramowitz and Stegun, table 22.2: from memory)', () => {
  it('of Legendre polynomials under the uniform density: ∫ P_n² = 2/(2n + 1)', () => {
    // Gauss–Legendre with five nodes in closed form, on 160 panels (its error falls with the tenth power of their width).
    const inner = Math.sqrt(5 - 2 * Math.sqrt(10 / 7)) / 3;
    const outer = Math.sqrt(5 + 2 * Math.sqrt(10 / 7)) / 3;
    const [wi, wo] = [(322 + 13 * Math.sqrt(70)) / 900, (322 - 13 * Math.sqrt(70)) / 900];
    const nodes = [
      [0, 128 / 225],
      [inner, wi],
      [-inner, wi],
      [outer, wo],
      [-outer, wo],
    ];
    const rule = Array.from({ length: 160 }, (_, k) =>
      nodes.map(([x, w]) => [-1 + (2 * k + 1 + x) / 160, w / 160] as const),
    ).flat();
    expectOrthogonal(products('legendre', rule), (n) => 2 / (2 * n + 1));
  });

  it('of Chebyshev polynomials under 1/√(1 − x²): ∫ T_0² = π, ∫ T_n² = π/2', () => {
    // Gauss–Chebyshev with 16 nodes, exact to degree 31.
    const rule = Array.from(
      { length: 16 },
      (_, k) => [Math.cos(((2 * k + 1) * Math.PI) / 32), Math.PI / 16] as const,
    );
    expectOrthogonal(products('chebyshev', rule), (n) => (n === 0 ? Math.PI : Math.PI / 2));
  });

  it('of Hermite polynomials under the normal density: ∫ He_n² exp(−x²/2) = √(2π) n!', () => {
    // The trapezoidal rule converges exponentially here (L. N. Trefethen, J. A. C. Weideman, SIAM Rev. 56:385–458, 2014).
    const rule = Array.from({ length: 321 }, (_, k) => {
      const x = (k - 160) / 10;
      return [x, Math.exp((-x * x) / 2) / 10] as const;
    });
    let factorial = 1;
    const factorials = Array.from({ length: DEGREE + 1 }, (_, n) => {
      factorial *= Math.max(1, n);
      return factorial;
    });
    expectOrthogonal(products('hermite', rule), (n) => Math.sqrt(2 * Math.PI) * factorials[n]);
  });
});

import { describe, expect, it } from 'vitest';
import { bindLifting } from '../../src/lift/bind.ts';
import { FAMILIES } from '../../src/lift/families.ts';
import { buildLifting } from '../../src/lift/join.ts';
import type { FamilyValues } from '../../src/lift/lifting.ts';
import { contextOf } from './liftingFixture.ts';

function functionsOf(family: string, values: FamilyValues, nx = 2) {
  const context = contextOf(nx);
  const { constants } = FAMILIES[family].build(values, context);
  const functions = FAMILIES[family].functions(constants, context);
  const centres = constants.centres as readonly (readonly number[])[];
  const at = (x: readonly number[]) => {
    const out = new Float64Array(functions.count);
    functions.evaluateInto(out, 0, x);
    return out;
  };
  const gradientAt = (x: readonly number[]) => {
    const out = new Float64Array(functions.count * nx);
    functions.gradientInto(out, 0, x);
    return out;
  };
  return { centres, at, gradientAt };
}

describe('thin-plate functions in the plane', () => {
  const { centres, at, gradientAt } = functionsOf('thin-plate', { centres: 12, placement: 'drawn' });

  it('are 0 with gradient 0 at their centre, the limit of r² log r, and small beside it', () => {
    centres.forEach((centre, i) => {
      expect(at(centre)[i]).toBe(0);
      expect(Array.from(gradientAt(centre).subarray(2 * i, 2 * i + 2))).toEqual([0, 0]);
      const beside = [centre[0] + 1e-9, centre[1]];
      expect(Math.abs(at(beside)[i])).toBeLessThan(1e-16);
      expect(Math.abs(gradientAt(beside)[2 * i])).toBeLessThan(1e-7);
    });
  });

  it('are biharmonic away from the centre with Laplacian 4 log r + 4: the mean over a circle is u + (R²/4) ∇²u', () => {
    // P. Pizzetti, Rend. Lincei 18, 1909: for ∇⁴u = 0 in the disc; the mean by the trapezoidal rule, which is exact here
    // to (R/r)^128. Centre of the circle p, radius R = r/4.
    const p = [0.83, -0.71];
    centres.forEach((centre, i) => {
      const r = Math.hypot(p[0] - centre[0], p[1] - centre[1]);
      const R = r / 4;
      let mean = 0;
      for (let k = 0; k < 64; k++) {
        const angle = (2 * Math.PI * k) / 64;
        mean += at([p[0] + R * Math.cos(angle), p[1] + R * Math.sin(angle)])[i] / 64;
      }
      const expected = at(p)[i] + ((R * R) / 4) * (4 * Math.log(r) + 4);
      expect(Math.abs(mean - expected)).toBeLessThan(1e-14 * (1 + r * r));
    });
  });

  it('have the value r² log r: 0 on the unit circle, e² at r = e, in closed form', () => {
    const [c] = centres;
    expect(Math.abs(at([c[0] + 1, c[1]])[0])).toBeLessThan(1e-15);
    expect(Math.abs(at([c[0], c[1] - Math.E])[0] / Math.E ** 2 - 1)).toBeLessThan(1e-14);
  });
});

describe('Gaussian functions', () => {
  it('are 1 at the centre, e^{−1/2} one width away, with slope −e^{−1/2}/w there, in closed form', () => {
    const width = 0.4;
    const { centres, at, gradientAt } = functionsOf('gaussian', { centres: 5, placement: 'drawn', width });
    centres.forEach((centre, i) => {
      expect(at(centre)[i]).toBe(1);
      const beside = [centre[0], centre[1] + width];
      expect(Math.abs(at(beside)[i] - Math.exp(-0.5))).toBeLessThan(1e-15);
      expect(Math.abs(gradientAt(beside)[2 * i + 1] + Math.exp(-0.5) / width)).toBeLessThan(1e-14);
    });
  });
});

describe('centres', () => {
  it('on a grid fill the largest full grid within the number, ends included', () => {
    const { centres } = functionsOf('thin-plate', { centres: 10, placement: 'grid' });
    expect(centres).toEqual([-1, 0, 1].flatMap((a) => [-1, 0, 1].map((b) => [a, b])));
    // 64^{1/3} rounds to below 4.
    const cube = functionsOf('thin-plate', { centres: 64, placement: 'grid' }, 3).centres;
    expect(new Set(cube.map(([first]) => first)).size).toBe(4);
    expect(cube).toHaveLength(64);
  });

  it('drawn evenly fill the ranges: their mean and variance are those of the uniform density, 0 and 1/3', () => {
    const { centres } = functionsOf('thin-plate', { centres: 2000, placement: 'drawn' });
    const values = centres.flat();
    const mean = values.reduce((sum, value) => sum + value, 0) / values.length;
    const variance = values.reduce((sum, value) => sum + value * value, 0) / values.length;
    // Five standard errors: √(1/3/4000) and √(4/45/4000).
    expect(Math.abs(mean)).toBeLessThan(5 * 0.0092);
    expect(Math.abs(variance - 1 / 3)).toBeLessThan(5 * 0.0048);
    expect(Math.max(...values.map(Math.abs))).toBeLessThanOrEqual(1);
  });

  it('sampled from the data are different samples', () => {
    const context = contextOf(2, { rows: 30 });
    const { constants } = FAMILIES.gaussian.build({ centres: 30, placement: 'sampled', width: 1 }, context);
    const sorted = (rows: readonly (readonly number[])[]) => rows.map((row) => row.join()).sort();
    const rows = Array.from({ length: 30 }, (_, i) => Array.from(context.samples.subarray(2 * i, 2 * i + 2)));
    expect(sorted(constants.centres as number[][])).toEqual(sorted(rows));
  });

  it('by k-means find two clouds of data that a draw from the ranges misses', () => {
    const samples = Float64Array.from({ length: 400 }, (_, i) => (i % 4 < 2 ? 0.9 : -0.8) + (i % 7) * 0.005);
    const context = contextOf(2, { samples });
    const settings = {
      constant: true,
      parts: [{ family: 'thin-plate', values: { centres: 2, placement: 'k-means' } }],
    };
    const lifting = buildLifting(settings, context);
    const centres = lifting.parts[2].constants.centres as number[][];
    const sums = centres.map(([a, b]) => a + b).sort((a, b) => a - b);
    expect(Math.abs(sums[0] + 1.6 - 0.03)).toBeLessThan(0.01);
    expect(Math.abs(sums[1] - 1.8 - 0.03)).toBeLessThan(0.01);
    expect(bindLifting(lifting, context).nz).toBe(5);
  });
});

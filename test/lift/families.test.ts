import { describe, expect, it } from 'vitest';
import { bindLifting, liftRows } from '../../src/lift/bind.ts';
import { FAMILIES } from '../../src/lift/families.ts';
import { buildLifting } from '../../src/lift/join.ts';
import type { FamilyValues, Lifting } from '../../src/lift/lifting.ts';
import { createRandom } from '../../src/numerics/random.ts';
import { contextOf } from './liftingFixture.ts';

/** Settings that differ from the defaults, for every family there is. */
const VALUES: Record<string, readonly FamilyValues[]> = {
  state: [{}],
  monomials: [{ degree: 4 }],
  hermite: [{ degree: 5, degreeCounts: 'per-axis' }, { degree: 4 }],
  legendre: [{ degree: 5, degreeCounts: 'per-axis' }, { degree: 4 }],
  chebyshev: [{ degree: 5, degreeCounts: 'per-axis' }, { degree: 4 }],
  'thin-plate': [
    { centres: 20, placement: 'k-means' },
    { centres: 20, placement: 'drawn' },
  ],
  gaussian: [
    { centres: 20, placement: 'grid', width: 0.7 },
    { centres: 20, placement: 'sampled', width: 0.3 },
  ],
  'random-fourier': [{ features: 20, lengthScale: 0.5 }],
  physics: [{}],
};

// Physical ranges far apart, so that a forgotten factor of the scaling shows.
const CENTRE = [3e-6, 4e5];
const HALF = [2e-6, 5e5];
const square = (x: ArrayLike<number>) => (x[0] / 1e-6) ** 2;
const flow = (x: ArrayLike<number>) => Math.sqrt(2e5 + x[1]) * x[0];
const context = contextOf(2, {
  centre: CENTRE,
  half: HALF,
  physics: [
    { name: 'square', of: square },
    { name: 'flow', of: flow },
  ],
  outputs: [{ name: 'power', of: (x) => x[0] * x[1], min: -1, max: 3 }],
});

const CASES = Object.entries(VALUES).flatMap(([family, list]) =>
  list.map((values) => ({ family, values, title: `${family} ${JSON.stringify(values)}` })),
);

const build = (family: string, values: FamilyValues) =>
  buildLifting({ constant: true, parts: [{ family, values }] }, context);

const random = createRandom(3);
const points = Array.from({ length: 40 }, () => [1.8 * random() - 0.9, 1.8 * random() - 0.9]);

describe('every family', () => {
  it('stands in the table under its own name and in these tests', () => {
    expect(Object.entries(FAMILIES).every(([key, { name }]) => key === name)).toBe(true);
    expect(Object.keys(VALUES)).toEqual(Object.keys(FAMILIES));
  });

  it('has settings with defaults inside their ranges, with which it builds', () => {
    for (const family of Object.keys(FAMILIES)) expect(build(family, {}).nz).toBeGreaterThanOrEqual(4);
  });

  for (const { family, values, title } of CASES) {
    it(`${title}: the Jacobian agrees with central differences`, () => {
      const lifting = build(family, values);
      const bound = bindLifting(lifting, context);
      const { nz } = lifting;
      const J = new Float64Array(nz * 2);
      const [high, low] = [new Float64Array(nz), new Float64Array(nz)];
      const h = 1e-5;
      let largest = 0;
      for (const x of points) {
        bound.jacobianInto(J, x);
        for (let j = 0; j < 2; j++) {
          bound.liftInto(high, x.with(j, x[j] + h));
          bound.liftInto(low, x.with(j, x[j] - h));
          for (let i = 0; i < nz; i++) {
            const difference = (high[i] - low[i]) / (2 * h);
            // h² times a third derivative of up to some hundreds; thin plates' grows like 1/r.
            expect(Math.abs(J[i * 2 + j] - difference)).toBeLessThan(1e-6 * (1 + Math.abs(difference)));
            largest = Math.max(largest, Math.abs(difference));
          }
        }
      }
      expect(largest).toBeGreaterThan(0.5);
    });

    it(`${title}: the values are the same bits after a journey through JSON`, () => {
      const lifting = build(family, values);
      const revived: Lifting = JSON.parse(JSON.stringify(lifting));
      expect(revived).toEqual(lifting);
      const X = Float64Array.from(points.flat());
      const before = liftRows(bindLifting(lifting, context), X).data;
      const after = liftRows(bindLifting(revived, context), X).data;
      expect(before.every(Number.isFinite)).toBe(true);
      expect(new BigUint64Array(after.buffer)).toEqual(new BigUint64Array(before.buffer));
    });

    it(`${title}: the same seed gives the same functions`, () => {
      const again = contextOf(2, { centre: CENTRE, half: HALF, physics: context.physics });
      const settings = { constant: true, parts: [{ family, values }] };
      const twin = contextOf(2, { centre: CENTRE, half: HALF, physics: context.physics });
      expect(buildLifting(settings, again)).toEqual(buildLifting(settings, twin));
    });
  }
});

describe('functions of the physical state', () => {
  it('have central-difference gradients that agree with the closed form to 1e-9', () => {
    const lifting = build('physics', {});
    const bound = bindLifting(lifting, context);
    const J = new Float64Array(lifting.nz * 2);
    const [, , , part] = lifting.parts;
    const half = part.constants.half as readonly number[];
    const at = lifting.names.indexOf('square');
    for (const x of points) {
      bound.jacobianInto(J, x);
      // d/ds ((c + h s)/1e-6)² / half
      const expected = (2 * (CENTRE[0] + HALF[0] * x[0]) * HALF[0]) / 1e-12 / half[0];
      expect(Math.abs(J[at * 2] - expected)).toBeLessThan(1e-9 * Math.abs(expected) + 1e-9);
      expect(Math.abs(J[at * 2 + 1])).toBeLessThan(1e-9);
    }
  });

  it('reach from −1 to 1 on the samples', () => {
    const bound = bindLifting(build('physics', {}), context);
    const Z = liftRows(bound, context.samples);
    for (const name of ['square', 'flow']) {
      const i = build('physics', {}).names.indexOf(name);
      const column = Array.from({ length: Z.rows }, (_, k) => Z.data[k * Z.cols + i]);
      expect(Math.abs(Math.min(...column) + 1)).toBeLessThan(1e-12);
      expect(Math.abs(Math.max(...column) - 1)).toBeLessThan(1e-12);
    }
  });
});

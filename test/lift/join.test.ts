import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { bindLifting, liftRows } from '../../src/lift/bind.ts';
import { buildLifting } from '../../src/lift/join.ts';
import type { LiftingPartSettings, LiftingSettings, PhysicsTerm } from '../../src/lift/lifting.ts';
import { UnusableLiftingError } from '../../src/lift/unusableLifting.ts';
import { contextOf } from './liftingFixture.ts';

const part = (family: string, values: LiftingPartSettings['values'] = {}) => ({ family, values });
const joined = (parts: LiftingSettings['parts'], context = contextOf(2), constant = true) =>
  buildLifting({ constant, parts }, context);

describe('the join', () => {
  for (const [family, symbol] of [
    ['hermite', 'He'],
    ['legendre', 'P'],
    ['chebyshev', 'T'],
  ]) {
    // Common practice, no source: five orders per axis in two dimensions make 36 functions.
    it(`${family}: five per axis in two dimensions make 36 functions, as is common practice, the state among them once`, () => {
      const context = contextOf(2);
      const lifting = joined([part(family, { degree: 5, degreeCounts: 'per-axis' })], context);
      expect(lifting.nz).toBe(36);
      expect(new Set(lifting.names).size).toBe(36);
      expect(lifting.names.slice(0, 3)).toEqual(['x1', 'x2', '1']);
      expect(lifting.constantIndex).toBe(2);
      expect(lifting.dropped).toEqual([
        { name: `1 (${family})`, sameAs: '1' },
        { name: `${symbol}1(x1)`, sameAs: 'x1' },
        { name: `${symbol}1(x2)`, sameAs: 'x2' },
      ]);
      const Z = liftRows(bindLifting(lifting, context), context.samples);
      for (let k = 0; k < Z.rows; k++) {
        expect(Z.data[k * 36]).toBe(context.samples[2 * k]);
        expect(Z.data[k * 36 + 1]).toBe(context.samples[2 * k + 1]);
        expect(Z.data[k * 36 + 2]).toBe(1);
      }
    });
  }

  it('counts per axis (d + 1)^n, in total C(n + d, d), in closed form', () => {
    // In two coordinates of total degree 4: 15, as in M. O. Williams, I. G. Kevrekidis, C. W. Rowley, 2015 (from memory).
    expect(joined([part('hermite', { degree: 4 })]).nz).toBe(15);
    expect(joined([part('hermite', { degree: 4, degreeCounts: 'per-axis' })]).nz).toBe(25);
    expect(joined([part('monomials', { degree: 3 })], contextOf(4)).nz).toBe(35);
    expect(joined([part('legendre', { degree: 1, degreeCounts: 'per-axis' })], contextOf(6)).nz).toBe(64);
  });

  it('puts the state first, then the constant, then outputs, then the parts in their order', () => {
    const context = contextOf(2, {
      physics: [{ name: 'sine', of: (x) => Math.sin(x[0]) }],
      outputs: [{ name: 'product', of: (x) => x[0] * x[1], min: -2, max: 2 }],
    });
    const lifting = joined([part('monomials', { degree: 2 }), part('physics'), part('state')], context);
    expect(lifting.names).toEqual(['x1', 'x2', '1', 'product', 'x1^2', 'x2^2', 'sine']);
    expect(lifting.parts.map(({ family }) => family)).toEqual([
      'state',
      'constant',
      'output',
      'monomials',
      'physics',
    ]);
    // The monomial x1·x2 is twice the output as that is scaled.
    expect(lifting.dropped.map(({ name, sameAs }) => `${name} = ${sameAs}`)).toEqual([
      '1 (monomials) = 1',
      'x1 (monomials) = x1',
      'x2 (monomials) = x2',
      'x1·x2 = product',
    ]);
  });

  it('without the constant drops whatever does not vary, and lifts all else alike', () => {
    const settings = [part('legendre', { degree: 2 })];
    const context = contextOf(2);
    const lifting = joined(settings, context, false);
    expect(lifting.names).toEqual(['x1', 'x2', 'P2(x1)', 'P1(x1)·P1(x2)', 'P2(x2)']);
    expect(lifting.constantIndex).toBe(-1);
    expect(lifting.dropped[0]).toEqual({ name: '1', sameAs: 'the constant, which is left out' });
  });

  it('of no part, or of the state alone, is the state and the constant', () => {
    for (const parts of [[], [part('state')], [part('state'), part('state')]]) {
      expect(joined(parts).names).toEqual(['x1', 'x2', '1']);
    }
  });

  it('drops functions of another part that are the same up to scale and offset: T2 = 2 x² − 1, P2 = 1.5 x² − 0.5', () => {
    const parts = ['monomials', 'chebyshev', 'legendre'].map((family) => part(family, { degree: 2 }));
    const lifting = joined(parts);
    expect(lifting.nz).toBe(6);
    const dropped = Object.fromEntries(lifting.dropped.map(({ name, sameAs }) => [name, sameAs]));
    expect(dropped).toMatchObject({ 'T2(x1)': 'x1^2', 'P2(x2)': 'x2^2', 'P1(x1)·P1(x2)': 'x1·x2' });
  });

  it('leaves functions that several others express together to the regression: T3 = 4 x³ − 3 x', () => {
    const lifting = joined([part('monomials', { degree: 3 }), part('chebyshev', { degree: 3 })]);
    expect(lifting.names).toContain('T3(x1)');
  });

  it('drops a second copy of a part whole, and tells two parts of one family apart by name', () => {
    const grid = part('thin-plate', { centres: 9, placement: 'grid' });
    const twice = joined([grid, grid]);
    expect(twice.nz).toBe(12);
    expect(twice.dropped).toHaveLength(9);
    expect(twice.parts.at(-1)?.keep).toEqual([]);
    const wider = joined([grid, part('thin-plate', { centres: 16, placement: 'grid' })]);
    // The corners of the two grids coincide.
    expect(wider.nz).toBe(3 + 9 + 12);
    expect(new Set(wider.names).size).toBe(wider.nz);
  });

  it('keeps a function that differs from another one at a single sample of 20,000', () => {
    const samples = Float64Array.from({ length: 20_000 }, (_, k) => -1 + (2 * k) / 19_999);
    const spike = (at: number) => (x: ArrayLike<number>) => x[0] + (x[0] === samples[at] ? 1e-3 : 0);
    const physics = [
      { name: 'copy', of: (x: ArrayLike<number>) => 5 - 3 * x[0] },
      { name: 'spike', of: spike(7777) },
      { name: 'same-spike', of: (x: ArrayLike<number>) => 2 * spike(7777)(x) },
      { name: 'flat-but-one', of: (x: ArrayLike<number>) => (x[0] === samples[12_345] ? 1 : 2) },
    ];
    const lifting = joined([part('physics')], contextOf(1, { samples, physics }));
    expect(lifting.names).toEqual(['x1', '1', 'spike', 'flat-but-one']);
    expect(lifting.dropped).toEqual([
      { name: 'copy', sameAs: 'x1' },
      { name: 'same-spike', sameAs: 'spike' },
    ]);
  });

  it('drops exactly the affine copies among functions of any size, 1e±9', () => {
    const bases: PhysicsTerm['of'][] = [
      (x) => Math.sin(2 * x[0]),
      (x) => Math.exp(x[1]),
      (x) => x[0] * x[1],
      (x) => Math.abs(x[0] - 0.1),
    ];
    const copy = fc.record({
      base: fc.integer({ min: 0, max: bases.length - 1 }),
      negative: fc.boolean(),
      exponent: fc.integer({ min: -9, max: 9 }),
      factor: fc.double({ min: 1, max: 10, noNaN: true }),
      offset: fc.double({ min: -100, max: 100, noNaN: true }),
    });
    fc.assert(
      fc.property(fc.array(copy, { minLength: 1, maxLength: 8 }), (copies) => {
        const physics = copies.map(({ base, negative, exponent, factor, offset }, i) => {
          const a = (negative ? -factor : factor) * 10 ** exponent;
          return { name: `f${i}`, of: (x: ArrayLike<number>) => a * (bases[base](x) + offset) };
        });
        const lifting = joined([part('physics')], contextOf(2, { physics, rows: 50 }));
        const first = new Map<number, string>();
        for (const [i, { base }] of copies.entries()) if (!first.has(base)) first.set(base, `f${i}`);
        expect(lifting.names.slice(3)).toEqual([...first.values()]);
        for (const { name, sameAs } of lifting.dropped) {
          expect(sameAs).toBe(first.get(copies[Number(name.slice(1))].base));
        }
      }),
      { numRuns: 60, seed: 1 },
    );
  });

  it('gives the same functions whatever the units: ranges times 1e±9 change nothing', () => {
    const at = (size: number) => {
      const context = contextOf(2, {
        centre: [2 * size, -size],
        half: [size, 3 * size],
        physics: [{ name: 'product', of: (x) => (x[0] / size) * (x[1] / size) }],
      });
      const lifting = joined([part('physics'), part('thin-plate', { centres: 8 })], context);
      return { lifting, Z: liftRows(bindLifting(lifting, context), context.samples) };
    };
    const one = at(1);
    for (const size of [1e-9, 1e9]) {
      const other = at(size);
      expect(other.lifting.names).toEqual(one.lifting.names);
      other.Z.data.forEach((value, i) => {
        expect(Math.abs(value - one.Z.data[i])).toBeLessThan(1e-13);
      });
    }
  });

  it('drops a physics function that does not vary, be it by the rounding of its last digits', () => {
    const physics = [
      { name: 'zero', of: () => 0 },
      { name: 'seven', of: () => 7 },
      { name: 'noise', of: (x: ArrayLike<number>) => 1e5 + 1e-11 * x[0] },
    ];
    expect(joined([part('physics')], contextOf(2, { physics })).dropped).toEqual(
      physics.map(({ name }) => ({ name, sameAs: '1' })),
    );
  });
});

describe('a lifting that cannot be built is refused with its key, what it must be, what it is and a way out', () => {
  const message = (parts: LiftingSettings['parts'], context = contextOf(2)) => {
    try {
      joined(parts, context);
    } catch (error) {
      expect(error).toBeInstanceOf(UnusableLiftingError);
      return (error as Error).message;
    }
    throw new Error('it was not refused');
  };
  const physicsOf = (of: PhysicsTerm['of']) => contextOf(2, { physics: [{ name: 'root', of }] });

  it.each([
    [
      'an unknown family',
      () => message([part('splines')]),
      /^lifting\.parts\[1\]\.family: must be one of state, monomials, .*, got splines; /,
    ],
    [
      'a part that only the join adds',
      () => message([part('output')]),
      /^lifting\.parts\[1\]\.family: must be one of/,
    ],
    [
      'a name that every object has',
      () => message([part('constructor')]),
      /^lifting\.parts\[1\]\.family: must be one of/,
    ],
    [
      'an unknown setting',
      () => message([part('monomials', { degre: 3 })]),
      /^lifting\.parts\[1\]\.degre: must be a setting of the family \(degree\), got "degre"; /,
    ],
    [
      'a degree out of range',
      () => message([part('state'), part('legendre', { degree: 13 })]),
      /^lifting\.parts\[2\]\.degree: must be an integer from 1 to 12, got 13; /,
    ],
    [
      'NaN',
      () => message([part('gaussian', { width: Number.NaN })]),
      /^lifting\.parts\[1\]\.width: must be a number from 0\.01 to 100, got NaN; /,
    ],
    [
      'an unknown choice',
      () => message([part('legendre', { degreeCounts: 'both' })]),
      /^lifting\.parts\[1\]\.degreeCounts: must be one of total, per-axis, got both; /,
    ],
    [
      'more than 2000 products',
      () => message([part('legendre', { degree: 12, degreeCounts: 'per-axis' })], contextOf(10)),
      /^lifting\.parts\[1\]\.degree: must be one that gives at most 2000 functions of 10 coordinates, got 12 \(per-axis: 137858491849 functions\); /,
    ],
    [
      'more than 2000 functions in all',
      () => message([part('random-fourier', { features: 1500 }), part('random-fourier', { features: 600 })]),
      /^lifting\.parts: must be of at most 2000 functions in all, got 2103; /,
    ],
    [
      'too few centres for a grid',
      () => message([part('thin-plate', { centres: 63, placement: 'grid' })], contextOf(6)),
      /^lifting\.parts\[1\]\.centres: must be at least 2\^6 = 64 for a grid over 6 coordinates, got 63; /,
    ],
    [
      'more k-means centres than samples',
      () => message([part('thin-plate', { centres: 20 })], contextOf(2, { rows: 19 })),
      /^lifting\.parts\[1\]\.centres: must be at most the number of distinct samples, got 20; /,
    ],
    [
      'more sampled centres than distinct samples',
      () =>
        message(
          [part('thin-plate', { centres: 2, placement: 'sampled' })],
          contextOf(1, { samples: new Float64Array(9) }),
        ),
      /^lifting\.parts\[1\]\.centres: must be at most 1, the number of distinct samples, got 2; /,
    ],
    [
      'physics where there is none',
      () => message([part('physics')]),
      /^lifting\.parts\[1\]\.family: must be one that the plant and the coordinates can serve, got physics, /,
    ],
    [
      'a physics function that is NaN on the data',
      () =>
        message(
          [part('physics')],
          physicsOf((x) => Math.sqrt(x[0])),
        ),
      /^lifting\.parts\[1\]\.root: must be finite on all data, got NaN at x1 -0\.\d+ 1, x2 -?0\.\d+ 1; /,
    ],
    [
      'no samples',
      () => message([], contextOf(2, { rows: 0 })),
      /^lifting: must be built on at least one sample, got 0; /,
    ],
  ])('%s', (_what, refuse, pattern) => {
    expect(refuse()).toMatch(pattern);
  });

  it('is refused at binding too when the plant no longer offers a function, or the family is unknown', () => {
    const physics = [{ name: 'sine', of: (x: ArrayLike<number>) => Math.sin(x[0]) }];
    const lifting = joined([part('physics')], contextOf(2, { physics }));
    expect(() => bindLifting(lifting, contextOf(2))).toThrow(
      /^lifting\.parts\[3\]\.sine: must be a function that the plant still offers, got none; /,
    );
    const strange = { ...lifting, parts: [{ ...lifting.parts[0], family: 'splines' }] };
    expect(() => bindLifting(strange, contextOf(2))).toThrow(
      /^lifting\.parts\[1\]\.family: must be a known family, got splines; /,
    );
    expect(() => bindLifting(lifting, contextOf(3, { physics }))).toThrow(RangeError);
  });
});

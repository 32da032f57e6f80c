import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { applyFactor, convertUnit, splitQuantity } from '../../src/study/units.ts';

const convert = (value: number, from: string, to: string, perSecond = false) => {
  const conversion = convertUnit(from, to, perSecond);
  return typeof conversion === 'object' ? applyFactor(value, conversion.factor) : conversion;
};

describe('units of quantities', () => {
  // Bureau International des Poids et Mesures, The International System of Units (SI), 9th ed. 2019,
  // table 7 (prefixes) and table 8 (min, h, °, L); bar = 100 kPa, section 4. From memory; all of them exact.
  it.each([
    [2, 'ms', 's', 0.002],
    [3, 'min', 's', 180],
    [1, 'h', 's', 3600],
    [30, 'deg', 'rad', Math.PI / 6],
    [30, '°', 'rad', Math.PI / 6],
    [6, 'l/min', 'm^3/s', 1e-4],
    [10, 'bar', 'Pa', 1e6],
    [5, 'µm', 'm', 5e-6],
    [1.5, 'kN', 'N', 1500],
    [4, 'mm/s', 'm/s', 0.004],
    [1, 'rpm', 'rad/s', Math.PI / 30],
    [5, '%', '1', 0.05],
    [3, 'Nm', 'N*m', 3],
    [7, 'N·m', 'J', 7],
    [2, 'Ω', 'V/A', 2],
    [1, 'g', 'kg', 0.001],
  ])('%d %s in %s has the value of the SI brochure', (value, from, to, expected) => {
    const converted = convert(value, from, to) as number;
    // Two roundings of a double.
    expect(Math.abs(converted / expected - 1)).toBeLessThanOrEqual(4 * Number.EPSILON);
  });

  it.each([
    [50, 'N/s', 'N', 50],
    [1, 'A/ms', 'A', 1000],
    [90, 'deg/s', 'rad', Math.PI / 2],
    [3, 'mm/s^2', 'm/s', 0.003],
    [20, '%/s', '1', 0.2],
  ])(
    '%d %s as a rate of a channel in %s is converted per second (closed form)',
    (value, from, to, expected) => {
      expect(Math.abs((convert(value, from, to, true) as number) / expected - 1)).toBeLessThanOrEqual(
        4 * Number.EPSILON,
      );
    },
  );

  it.each([
    ['A', 's', false, 'other-dimension'],
    ['A', 'A', true, 'other-dimension'],
    ['deg', '1', false, 'other-dimension'],
    ['rpm', 'Hz', false, 'other-dimension'],
    ['jiffies', 's', false, 'unknown'],
    ['degC', 'K', false, 'unknown'],
    ['', 's', false, 'unknown'],
    ['2', 's', false, 'unknown'],
    ['s s s) (', 's', false, 'unknown'],
  ] as const)('%s is refused for %s (per second: %s)', (from, to, perSecond, why) => {
    expect(convertUnit(from, to, perSecond)).toBe(why);
  });

  it('a channel with a unit that no table knows takes its own spelling', () => {
    expect(convert(3, 'widgets', 'widgets')).toBe(3);
    expect(convert(3, 'widgets/s', 'widgets', true)).toBe(3);
    expect(convertUnit('N', 'widgets')).toBe('other-dimension');
  });

  it('a decimal number with a milli, micro or percent is the same double as the number written out (twin)', () => {
    fc.assert(
      fc.property(fc.integer({ min: -99999, max: 99999 }), (digits) => {
        expect(convert(digits, 'ms', 's')).toBe(Number(`${digits}e-3`));
        expect(convert(digits, 'us', 's')).toBe(Number(`${digits}e-6`));
        expect(convert(digits, '%', '1')).toBe(Number(`${digits}e-2`));
      }),
    );
  });

  it('a number and its unit may stand with or without a space', () => {
    expect(splitQuantity('2ms')).toEqual({ value: 2, unit: 'ms' });
    expect(splitQuantity(' -1.5e-3  m/s ')).toEqual({ value: -0.0015, unit: 'm/s' });
    expect(splitQuantity('4 1/s')).toEqual({ value: 4, unit: '1/s' });
  });

  it.each(['ms', '2', '', '2 ', '. s', '1.2.3 s', '--1 s', '2 3 s', 'x10 s', 'NaN s'])(
    'a number and a unit is not what stands in "%s"',
    (text) => {
      expect(splitQuantity(text)).toBeNull();
    },
  );
});

/** The 64 bits of a double as 16 hexadecimal digits; all NaN alike. */
export function bitsOf(value: number): string {
  if (Number.isNaN(value)) return 'nan';
  const view = new DataView(new ArrayBuffer(8));
  view.setFloat64(0, value);
  return view.getBigUint64(0).toString(16).padStart(16, '0');
}

/** The 32 bits of a number rounded to float, as 8 hexadecimal digits. */
export function floatBitsOf(value: number): string {
  const view = new DataView(new ArrayBuffer(4));
  view.setFloat32(0, Math.fround(value));
  return view.getUint32(0).toString(16).padStart(8, '0');
}

/**
 * Doubles that printing loses most easily: signed zeros, subnormals, the ends of the range, neighbours of round numbers, and
 * decimals whose shortest form has 17 digits.
 */
export const UGLY: readonly number[] = [
  0,
  -0,
  5e-324,
  -5e-324,
  2.225073858507201e-308,
  2.2250738585072014e-308,
  1.7976931348623157e308,
  -1.7976931348623157e308,
  1 / 3,
  0.1 + 0.2,
  9007199254740994,
  123456789012345680000,
  1e21,
  1e-7,
  1.0000000000000002,
  0.9999999999999999,
  5.0e-1,
  1e22,
  1e23,
  Number.POSITIVE_INFINITY,
  Number.NEGATIVE_INFINITY,
];

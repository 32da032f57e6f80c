import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { decodeRecord, encodeRecord } from '../../src/commands/encode.ts';

const bits = (numbers: ArrayLike<number>) => {
  const view = new DataView(new ArrayBuffer(8));
  return Array.from(numbers, (value) => {
    view.setFloat64(0, value);
    return Number.isNaN(value) ? 'NaN' : view.getBigUint64(0);
  });
};

describe('records as JSON', () => {
  it('every number comes back with the same bits, NaN, infinities and minus zero included (round trip)', () => {
    fc.assert(
      fc.property(fc.float64Array(), fc.array(fc.double()), (typed, plain) => {
        const back = decodeRecord(encodeRecord({ typed, plain })) as { typed: Float64Array; plain: number[] };
        expect(back.typed).toBeInstanceOf(Float64Array);
        expect(bits(back.typed)).toEqual(bits(typed));
        expect(bits(back.plain)).toEqual(bits(plain));
      }),
    );
  });

  it('records, lists, texts, null and small integer arrays come back as they were (round trip)', () => {
    const record = {
      name: 'ψ "quoted"\n',
      none: null,
      yes: true,
      nested: [{ set: Int8Array.of(-1, 0, 1) }, []],
    };
    expect(decodeRecord(encodeRecord(record))).toEqual(record);
  });

  it('undefined fields and functions are left out, as in JSON itself', () => {
    expect(encodeRecord({ a: 1, b: undefined, c: () => 1 })).toBe('{"a":1}');
  });
});

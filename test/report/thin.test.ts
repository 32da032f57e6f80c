import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { thinCloud, thinSeries } from '../../src/report/thin.ts';

const round = (value: number) => Number(value.toPrecision(6));
const finite = fc.double({ noNaN: true, noDefaultInfinity: true, min: -1e6, max: 1e6 });

describe('thinning', () => {
  it('keeps the extremes and both ends of a series, in order, within four points a bucket (defining properties)', () => {
    fc.assert(
      fc.property(fc.array(finite, { minLength: 1, maxLength: 400 }), (y) => {
        const x = y.map((_, k) => k / 100);
        const thin = thinSeries(x, y, 10);
        const kept = thin.map((point) => point.y as number);
        expect(Math.max(...kept)).toBe(round(Math.max(...y)));
        expect(Math.min(...kept)).toBe(round(Math.min(...y)));
        expect(thin[0]).toEqual({ x: 0, y: round(y[0]) });
        expect(thin.at(-1)).toEqual({ x: round(x[x.length - 1]), y: round(y[y.length - 1]) });
        expect(thin.length).toBeLessThanOrEqual(40);
        for (let k = 1; k < thin.length; k++) expect(thin[k].x).toBeGreaterThan(thin[k - 1].x);
      }),
    );
  });

  it('keeps a spike of one sample among 100,000', () => {
    const y = new Float64Array(100_000);
    y[54_321] = 7;
    const x = y.map((_, k) => k);
    expect(thinSeries(x, y)).toContainEqual({ x: 54_321, y: 7 });
  });

  it('makes a gap where a value is not finite, also among many', () => {
    const y = Float64Array.from({ length: 5000 }, (_, k) => (k >= 2500 ? Number.NaN : 1));
    const thin = thinSeries(
      y.map((_, k) => k),
      y,
      100,
    );
    expect(thin.filter((point) => point.x >= 2500).every((point) => point.y === null)).toBe(true);
    expect(thin.some((point) => point.y === 1)).toBe(true);
  });

  it('a cloud keeps its extent, loses points only where others lie, and takes no more than its cells', () => {
    const point = fc.record({ x: finite, y: finite });
    const cells = { across: 7, up: 5 };
    fc.assert(
      fc.property(fc.array(point, { minLength: 1, maxLength: 300 }), (points) => {
        const thin = thinCloud(points, cells);
        for (const key of ['x', 'y'] as const) {
          const of = (rows: readonly { x: number; y: number | null }[]) =>
            rows.map((row) => row[key] as number);
          expect(Math.max(...of(thin))).toBe(round(Math.max(...of(points))));
          expect(Math.min(...of(thin))).toBe(round(Math.min(...of(points))));
        }
        expect(thin.length).toBeLessThanOrEqual(cells.across * cells.up + 4);
        expect(thin.length).toBeGreaterThan(0);
      }),
    );
  });

  it('leaves out points that are not finite; of none remains none', () => {
    const cells = { across: 3, up: 3 };
    expect(thinCloud([], cells)).toEqual([]);
    expect(thinCloud([{ x: Number.NaN, y: 1 }], cells)).toEqual([]);
  });
});

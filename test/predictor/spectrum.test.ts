import { describe, expect, it } from 'vitest';
import { fromRows } from '../../src/numerics/matrix.ts';
import { plainLifting } from '../../src/predictor/rivals.ts';
import { computeSpectrum } from '../../src/predictor/spectrum.ts';
import { channels } from './synthetic.ts';

const lifting = plainLifting(channels('x', 2));
const spectrumOf = (A: number[][], B: number[][], sampleTime = 0.1) =>
  computeSpectrum({ A: fromRows(A), B: fromRows(B), lifting, sampleTime });

describe('the spectrum of a predictor', () => {
  it('gives the time constants of two poles, −Ts / ln λ (closed form), the constant at 1 left out', () => {
    const { radius, fastest, slowest, real } = spectrumOf(
      [
        [0.9, 0, 0.3],
        [0, 0.5, 0],
        [0, 0, 1],
      ],
      [[1], [1], [0]],
    );
    expect(Array.from(real).sort()).toEqual([0.5, 0.9, 1]);
    expect(radius).toBe(1);
    expect(fastest).toBeCloseTo(-0.1 / Math.log(0.5), 12);
    expect(slowest).toBeCloseTo(-0.1 / Math.log(0.9), 12);
  });

  it('counts the oscillation of a pair in the fastest and its decay in the slowest (closed form)', () => {
    const [r, phi] = [0.98, 0.7];
    const { fastest, slowest, radius } = spectrumOf(
      [
        [r * Math.cos(phi), -r * Math.sin(phi), 0],
        [r * Math.sin(phi), r * Math.cos(phi), 0],
        [0, 0, 1],
      ],
      [[0], [1], [0]],
    );
    expect(fastest).toBeCloseTo(0.1 / Math.hypot(Math.log(r), phi), 12);
    expect(slowest).toBeCloseTo(-0.1 / Math.log(r), 12);
    expect(radius).toBe(1);
  });

  it('leaves out a mode that the input does not move and one that no state shows', () => {
    const { fastest, slowest } = spectrumOf(
      [
        [0.8, 0, 0],
        [0, 0.01, 0],
        [0, 0, 0.2],
      ],
      [[1], [0], [1]],
    );
    expect(fastest).toBeCloseTo(-0.1 / Math.log(0.8), 12);
    expect(slowest).toBeCloseTo(-0.1 / Math.log(0.8), 12);
  });

  it('leaves out a mode whose share in the step response is below 2 % of the largest', () => {
    const A = [
      [0.8, 0, 0],
      [0, 0.3, 0],
      [0, 0, 1],
    ];
    // Shares b / (1 − λ): 5 against b2 / 0.7.
    expect(spectrumOf(A, [[1], [0.06], [0]]).fastest).toBeCloseTo(-0.1 / Math.log(0.8), 12);
    expect(spectrumOf(A, [[1], [0.08], [0]]).fastest).toBeCloseTo(-0.1 / Math.log(0.3), 12);
  });

  it('has no slowest decay when the only mode grows, and reports the radius', () => {
    const { slowest, radius } = spectrumOf(
      [
        [1.2, 0, 0],
        [0, 0.3, 0],
        [0, 0, 1],
      ],
      [[1], [0], [0]],
    );
    expect(slowest).toBe(Number.POSITIVE_INFINITY);
    expect(radius).toBe(1.2);
  });

  it('refuses a NaN instead of never returning', () => {
    const A = [
      [Number.NaN, 0, 0],
      [0, 1, 0],
      [0, 0, 1],
    ];
    expect(() => spectrumOf(A, [[0], [0], [0]])).toThrow(RangeError);
  });
});

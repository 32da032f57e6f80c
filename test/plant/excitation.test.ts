import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { createRandom } from '../../src/numerics/random.ts';
import { excite, SIGNAL_SHAPES } from '../../src/plant/excitation/excite.ts';
import { shapeInput } from '../../src/plant/excitation/shapeInput.ts';

const settings = fc.record({
  shape: fc.constantFrom(...SIGNAL_SHAPES),
  count: fc.integer({ min: 1, max: 400 }),
  sampleTime: fc.double({ min: 1e-5, max: 1, noNaN: true }),
  hold: fc.double({ min: 0, max: 3, noNaN: true }),
  highest: fc.double({ min: 1e-3, max: 1e5, noNaN: true }),
  input: fc.constant(0),
  inputs: fc.constant(1),
  seed: fc.nat(),
});
const values = (shape: (typeof SIGNAL_SHAPES)[number], count: number, more = {}) =>
  excite(
    shape,
    { count, sampleTime: 0.01, hold: 0.05, highest: 10, input: 0, inputs: 1, ...more },
    createRandom(1),
  );

describe('the signal shapes', () => {
  it('give as many values as asked for, all within [−1, 1], for any settings', () => {
    fc.assert(
      fc.property(settings, ({ shape, seed, ...rest }) => {
        const signal = excite(shape, rest, createRandom(seed));
        expect(signal.length).toBe(rest.count);
        expect(signal.every((value) => value >= -1 && value <= 1)).toBe(true);
      }),
      { seed: 1 },
    );
  });

  it('are the same numbers for the same seed', () => {
    for (const shape of SIGNAL_SHAPES) expect(values(shape, 100)).toEqual(values(shape, 100));
  });

  it('hold steps and bits as long as asked, here five samples', () => {
    for (const shape of ['random-steps', 'binary-sequence'] as const) {
      const signal = values(shape, 200);
      for (let k = 0; k < 200; k++) expect(signal[k]).toBe(signal[k - (k % 5)]);
      expect(new Set(signal).size).toBeGreaterThan(1);
    }
  });

  it('a binary sequence holds one more 1 than −1 over its period, closed form', () => {
    // 31 bits of one sample each fill the period of a five-bit register once.
    const signal = values('binary-sequence', 31, { hold: 0.01 });
    expect(signal.every((value) => Math.abs(value) === 1)).toBe(true);
    expect(signal.reduce((sum, value) => sum + value, 0)).toBe(1);
  });

  it('a multisine reaches 1, has no mean, and holds its harmonics up to the highest frequency only', () => {
    const count = 256;
    // 20 Hz over 2.56 s: harmonics 1 … 51.
    const signal = values('multisine', count, { highest: 20 });
    expect(Math.abs(Math.max(...signal.map(Math.abs)) - 1)).toBeLessThan(1e-12);
    const power = (k: number) => {
      let [c, s] = [0, 0];
      for (const [i, value] of signal.entries()) {
        c += value * Math.cos((2 * Math.PI * k * i) / count);
        s += value * Math.sin((2 * Math.PI * k * i) / count);
      }
      return Math.hypot(c, s) / count;
    };
    const first = power(1);
    for (let k = 0; k <= 128; k++) {
      if (k >= 1 && k <= 51) expect(Math.abs(power(k) / first - 1)).toBeLessThan(1e-9);
      else expect(power(k)).toBeLessThan(1e-12);
    }
  });

  it('multisines of several inputs are orthogonal, defining property of harmonics', () => {
    const [a, b, c] = [0, 1, 2].map((input) => values('multisine', 300, { input, inputs: 3 }));
    const product = (p: Float64Array, q: Float64Array) => p.reduce((sum, value, i) => sum + value * q[i], 0);
    for (const [p, q] of [
      [a, b],
      [a, c],
      [b, c],
    ]) {
      expect(Math.abs(product(p, q))).toBeLessThan(1e-10 * Math.sqrt(product(p, p) * product(q, q)));
    }
  });

  it('a chirp swings as often as the mean of its two frequencies says, closed form', () => {
    // 1/T = 0.1 Hz to 10 Hz in 10 s: 50.5 swings, 101 changes of sign.
    const signal = values('chirp', 1000);
    const changes = signal.filter((value, k) => k > 0 && value * signal[k - 1] < 0).length;
    expect(Math.abs(changes - 101)).toBeLessThanOrEqual(1);
  });
});

describe('a signal shaped into an input', () => {
  const input = fc
    .record({
      min: fc.double({ min: -1e6, max: 1e6, noNaN: true }),
      width: fc.double({ min: 1e-6, max: 1e6, noNaN: true }),
      rate: fc.option(fc.double({ min: 1e-9, max: 1e9, noNaN: true }), { nil: undefined }),
    })
    .map(({ min, width, rate }) => ({
      name: 'u',
      unit: '1',
      min,
      max: min + width,
      ...(rate ? { rate } : {}),
    }));

  it('keeps range, rate and amplitude for any signal and settings', () => {
    fc.assert(
      fc.property(
        input,
        fc.array(fc.double({ min: -1, max: 1, noNaN: true }), { minLength: 1, maxLength: 60 }),
        fc.double({ min: 1e-3, max: 1, noNaN: true }),
        fc.double({ min: 0, max: 1, noNaN: true }),
        fc.double({ min: 1e-5, max: 1, noNaN: true }),
        (channel, signal, amplitude, place, sampleTime) => {
          const { min, max, rate = Number.POSITIVE_INFINITY } = channel;
          const shaped = shapeInput(signal, channel, amplitude, min + place * (max - min), sampleTime);
          const rounding = 4 * Number.EPSILON * Math.max(Math.abs(min), Math.abs(max));
          expect(shaped.every((u) => u >= min && u <= max)).toBe(true);
          expect(Math.max(...shaped) - Math.min(...shaped)).toBeLessThanOrEqual(
            amplitude * (max - min) + rounding,
          );
          for (let k = 1; k < shaped.length; k++) {
            expect(Math.abs(shaped[k] - shaped[k - 1])).toBeLessThanOrEqual(rate * sampleTime + rounding);
          }
        },
      ),
      { seed: 2 },
    );
  });

  it('is centred on the operating input as nearly as the range allows', () => {
    const channel = { name: 'u', unit: 'A', min: 0, max: 10 };
    expect(Array.from(shapeInput([-1, 0, 1], channel, 0.4, 5, 1))).toEqual([3, 5, 7]);
    expect(Array.from(shapeInput([-1, 0, 1], channel, 0.4, 9.5, 1))).toEqual([6, 8, 10]);
    expect(Array.from(shapeInput([-1, 0, 1], channel, 1, 2, 1))).toEqual([0, 5, 10]);
  });

  it('approaches a step at the rate, and takes its first value at once', () => {
    const channel = { name: 'u', unit: 'A', min: -1, max: 1, rate: 5 };
    expect(Array.from(shapeInput([-1, 1, 1, 1, 1, 1], channel, 1, 0, 0.1))).toEqual([-1, -0.5, 0, 0.5, 1, 1]);
  });
});

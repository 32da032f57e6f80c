import type { Random } from '../../numerics/random.ts';

/**
 * Phases that keep the peak of `F` equal harmonics low: `φ_k = −π k (k − 1) / F`, k = 1 … F.
 * Source: M. Schroeder, IEEE Trans. Inf. Theory 16:85–89, 1970, flat spectrum.
 */
export function schroederPhases(F: number): Float64Array {
  return Float64Array.from({ length: F }, (_, i) => (-Math.PI * (i + 1) * i) / F);
}

/**
 * One period of `Σ_k cos(2π h_k i / count + φ_k)` with Schroeder's phases, not scaled.
 *
 * @param harmonics the integers `h_k`, each ≤ count / 2.
 */
export function sumOfHarmonics(count: number, harmonics: readonly number[]): Float64Array {
  const phases = schroederPhases(harmonics.length);
  const values = new Float64Array(count);
  for (const [k, harmonic] of harmonics.entries()) {
    for (let i = 0; i < count; i++) {
      // The product is reduced modulo the period first: large arguments cost the cosine digits.
      values[i] += Math.cos((2 * Math.PI * ((harmonic * i) % count)) / count + phases[k]);
    }
  }
  return values;
}

/**
 * A multisine over the whole signal: the harmonics of `1 / (count · sampleTime)` up to `highest`, equal amplitudes,
 * Schroeder's phases, scaled to a peak of 1, turned round by a random number of samples. With several inputs, the
 * harmonics are dealt out in turn, so that the inputs are orthogonal over the signal.
 *
 * @param highest Hz; not beyond half the sampling rate, and at least one harmonic for each input.
 * @param input index of this input among `inputs`.
 * @returns `count` values in [−1, 1].
 */
export function multisine(
  count: number,
  sampleTime: number,
  highest: number,
  input: number,
  inputs: number,
  random: Random,
): Float64Array {
  const wanted = Math.max(inputs, Math.floor(highest * count * sampleTime));
  const last = Math.min(wanted, Math.floor(count / 2));
  const harmonics: number[] = [];
  for (let k = input + 1; k <= last; k += inputs) harmonics.push(k);
  const period = sumOfHarmonics(count, harmonics);
  const peak = period.reduce((most, value) => Math.max(most, Math.abs(value)), 0);
  const turn = Math.floor(random() * count);
  return period.map((_, i) => (peak > 0 ? period[(i + turn) % count] / peak : 0));
}

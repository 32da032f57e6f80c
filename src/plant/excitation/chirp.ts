import type { Random } from '../../numerics/random.ts';

/**
 * A sine whose frequency rises linearly: `sin(2π (f₀ t + (f₁ − f₀) t² / (2T)) + φ)` from `f₀ = 1/T`, one swing in the
 * whole signal, to `f₁ = highest`; `φ` is drawn.
 *
 * @param highest Hz; lowered to half the sampling rate when it is beyond it.
 * @returns `count` values in [−1, 1].
 */
export function chirp(count: number, sampleTime: number, highest: number, random: Random): Float64Array {
  const T = count * sampleTime;
  const from = 1 / T;
  const to = Math.min(highest, 0.5 / sampleTime);
  const phase = random();
  return Float64Array.from({ length: count }, (_, k) => {
    const t = k * sampleTime;
    return Math.sin(2 * Math.PI * (from * t + ((to - from) * t * t) / (2 * T) + phase));
  });
}

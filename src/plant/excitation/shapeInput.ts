import type { InputChannel } from '../plant.ts';

/**
 * Turns a signal in [−1, 1] into an input of the plant: the band of width `amplitude` times the input range, centred
 * on `centre` as nearly as the range allows, each change no faster than the actuator's rate.
 *
 * @param signal values in [−1, 1], one a sample.
 * @param amplitude share of the range, (0, 1]; 1 is the whole range, wherever the centre.
 * @param centre in the input's unit, usually the input of the operating point.
 * @returns the input in its unit: within [min, max], and `|u_k − u_{k−1}| ≤ rate · sampleTime` to rounding.
 */
export function shapeInput(
  signal: ArrayLike<number>,
  input: InputChannel,
  amplitude: number,
  centre: number,
  sampleTime: number,
): Float64Array {
  const half = ((input.max - input.min) / 2) * amplitude;
  const middle = Math.min(Math.max(centre, input.min + half), input.max - half);
  const largestMove = (input.rate ?? Number.POSITIVE_INFINITY) * sampleTime;
  const shaped = new Float64Array(signal.length);
  for (let k = 0; k < signal.length; k++) {
    let u = middle + half * signal[k];
    if (k > 0) u = Math.min(Math.max(u, shaped[k - 1] - largestMove), shaped[k - 1] + largestMove);
    shaped[k] = Math.min(Math.max(u, input.min), input.max);
  }
  return shaped;
}

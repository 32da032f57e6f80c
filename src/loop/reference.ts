import type { ReferenceSettings } from './scenario.ts';

/** Value of one output's reference at a time ≥ 0, seconds. */
export function referenceAt(settings: ReferenceSettings, time: number): number {
  const { shape, values, times } = settings;
  switch (shape) {
    case 'constant':
      return values[0];
    case 'steps':
      // A hair of a sample is added, so that k·Ts that rounds below a switching time still counts as on it.
      return values[Math.min(values.length - 1, Math.floor(time / settings.time + 1e-9))];
    case 'sine':
      return values[0] + values[1] * Math.sin((2 * Math.PI * time) / settings.time);
    case 'ramp':
      return values[0] + (values[1] - values[0]) * Math.min(1, time / settings.time);
    case 'points':
      return interpolate(times, values, time);
  }
}

/** Straight lines between the points, the end values beyond them. */
function interpolate(times: readonly number[], values: readonly number[], time: number): number {
  if (time <= times[0]) return values[0];
  for (let i = 1; i < times.length; i++) {
    if (time > times[i]) continue;
    const share = (time - times[i - 1]) / (times[i] - times[i - 1]);
    return values[i - 1] + share * (values[i] - values[i - 1]);
  }
  return values[values.length - 1];
}

/** Seconds that a stretch takes when another one follows it: two periods of a sine, the rise of a ramp and as long again. */
export function durationOf({ shape, values, time, times }: ReferenceSettings): number {
  switch (shape) {
    case 'constant':
      return 0;
    case 'steps':
      return values.length * time;
    case 'sine':
    case 'ramp':
      return 2 * time;
    case 'points':
      return times[times.length - 1];
  }
}

/**
 * The references of all outputs at `count` samples, count × ny. Several for one output follow one another, the last one
 * goes on to the end. An output without one rests at `rest`, ny values.
 */
export function sampleReferences(
  references: readonly ReferenceSettings[],
  outputs: readonly { readonly name: string }[],
  rest: readonly number[],
  sampleTime: number,
  count: number,
): Float64Array {
  const ny = outputs.length;
  const r = new Float64Array(count * ny);
  for (let j = 0; j < ny; j++) {
    const stretches = references.filter(({ output }) => output === outputs[j].name);
    let start = 0;
    let current = 0;
    for (let k = 0; k < count; k++) {
      const time = k * sampleTime;
      while (
        current + 1 < stretches.length &&
        time >= start + durationOf(stretches[current]) - 1e-9 * sampleTime
      ) {
        start += durationOf(stretches[current++]);
      }
      r[k * ny + j] =
        stretches.length > 0 ? referenceAt(stretches[current], Math.max(0, time - start)) : rest[j];
    }
  }
  return r;
}

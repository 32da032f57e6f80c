import type { Dataset } from '../data/dataset.ts';

/**
 * The numbers of a dataset as bytes, for a checksum: a line of JSON (sample time, channels with their units, role and steps
 * of each trajectory, cuts), then each trajectory's `x` and `u` in turn, doubles with the least significant byte first. The
 * same numbers give the same bytes on every machine.
 */
export function datasetBytes(dataset: Dataset): Uint8Array {
  const { sampleTime, coordinates, inputs, trajectories, cuts } = dataset;
  const channel = ({ name, unit, min, max }: Dataset['coordinates'][number]) => [name, unit, min, max];
  const head = new TextEncoder().encode(
    `${JSON.stringify({
      sampleTime,
      coordinates: coordinates.map(channel),
      inputs: inputs.map(channel),
      trajectories: trajectories.map(({ role, steps, cut }) => [role, steps, cut ?? '']),
      cuts,
    })}\n`,
  );
  const numbers = trajectories.reduce((sum, { x, u }) => sum + x.length + u.length, 0);
  const bytes = new Uint8Array(head.length + 8 * numbers);
  bytes.set(head);
  const view = new DataView(bytes.buffer);
  let at = head.length;
  for (const { x, u } of trajectories) {
    for (const values of [x, u]) {
      for (let k = 0; k < values.length; k++, at += 8) view.setFloat64(at, values[k], true);
    }
  }
  return bytes;
}

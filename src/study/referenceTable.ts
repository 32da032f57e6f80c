import { absent, required } from './fields.ts';
import { list, variants } from './groups.ts';
import { channelQuantity, quantity } from './kinds.ts';

const time = quantity('s', { above: 0 });
const level = channelQuantity();

/** One stretch of a reference, by its shape. */
export const REFERENCE = variants('shape', {
  constant: {
    meaning: 'One value throughout',
    fields: {
      value: required(level, 'The value'),
    },
  },
  steps: {
    meaning: 'Values in turn',
    fields: {
      values: required(list(level), 'The values in turn'),
      hold: required(time, 'Time for which each is held'),
    },
  },
  sine: {
    meaning: 'A sine about a centre',
    fields: {
      centre: absent(level, 'The centre', '0'),
      amplitude: required(level, 'Largest distance from the centre'),
      period: required(time, 'Time of one period'),
    },
  },
  ramp: {
    meaning: 'From one value to another at constant speed',
    fields: {
      from: required(level, 'Value at the start'),
      to: required(level, 'Value at the end'),
      over: required(time, 'Time that it takes'),
    },
  },
  points: {
    meaning: 'Points joined by straight lines',
    fields: {
      times: required(list(quantity('s', { min: 0 }), 2), 'Times of the points, ascending'),
      values: required(list(level, 2), 'Values at the points, as many as times'),
    },
  },
});

import { describe, expect, it } from 'vitest';
import { checkPlant } from '../../src/plant/check.ts';

const good = () => ({
  name: 'tank',
  description: 'A draining tank.',
  states: [{ name: 'level', unit: 'm', min: 0, max: 2 }],
  inputs: [{ name: 'valve', unit: '1', min: 0, max: 1, rate: 2 }],
  outputs: [{ name: 'level', unit: 'm', min: 0, max: 2, of: 'level' }],
  parameters: { drain: { unit: '1/s', value: 0.3, tolerance: 0.1 } },
  derivative: (x: number[], u: number[], p: Record<string, number>): unknown => [u[0] - p.drain * x[0]],
  physics: [{ name: 'root', of: (x: number[]): unknown => Math.sqrt(x[0]) }],
  operatingPoint: { x: [1], u: [0.3] },
  hazards: ['It can overflow.'],
});
type Faulty = Record<string, unknown>;

/** Every fault in one field, the key that must be named, and what the message must say. */
const FAULTS: readonly (readonly [string, (plant: Faulty) => unknown, string, RegExp])[] = [
  ['a list instead of a plant', () => [], 'default export', /a plant, got an empty list/],
  ['no default export', () => undefined, 'default export', /got nothing; write export default definePlant/],
  ['no name', ({ name: _, ...rest }) => rest, 'name', /got nothing/],
  ['a name with a blank', (plant) => ({ ...plant, name: 'my tank' }), 'name', /got "my tank"/],
  ['no states', (plant) => ({ ...plant, states: [] }), 'states', /got an empty list/],
  ['states that are a text', (plant) => ({ ...plant, states: 'level' }), 'states', /got "level"/],
  ['a state that is a number', (plant) => ({ ...plant, states: [3] }), 'states[0]', /a channel, got 3/],
  [
    'min above max',
    (plant) => ({ ...plant, states: [{ name: 'level', unit: 'm', min: 3, max: 2 }] }),
    'states.level.min',
    /below max = 2, got 3/,
  ],
  [
    'min equal to max',
    (plant) => ({ ...plant, inputs: [{ name: 'valve', unit: '1', min: 1, max: 1 }] }),
    'inputs.valve.min',
    /below max/,
  ],
  [
    'a range that is NaN',
    (plant) => ({ ...plant, states: [{ name: 'level', unit: 'm', min: Number.NaN, max: 2 }] }),
    'states.level.min',
    /a finite number, got NaN/,
  ],
  [
    'a range without end',
    (plant) => ({ ...plant, states: [{ name: 'level', unit: 'm', min: 0, max: Number.POSITIVE_INFINITY }] }),
    'states.level.max',
    /got Infinity/,
  ],
  [
    'no unit',
    (plant) => ({ ...plant, states: [{ name: 'level', min: 0, max: 2 }] }),
    'states.level.unit',
    /SI unit/,
  ],
  [
    'a name used twice',
    (plant) => ({ ...plant, inputs: [good().inputs[0], good().inputs[0]] }),
    'inputs.valve',
    /used once, got "valve"/,
  ],
  [
    'a rate of zero',
    (plant) => ({ ...plant, inputs: [{ ...good().inputs[0], rate: 0 }] }),
    'inputs.valve.rate',
    /> 0, got 0/,
  ],
  [
    'an output of an unknown state',
    (plant) => ({ ...plant, outputs: [{ ...good().outputs[0], of: 'depth' }] }),
    'outputs.level.of',
    /state \(level\).*got "depth"/,
  ],
  ['no parameters', ({ parameters: _, ...rest }) => rest, 'parameters', /got nothing/],
  [
    'a parameter that is a number',
    (plant) => ({ ...plant, parameters: { drain: 1 } }),
    'parameters.drain',
    /got 1/,
  ],
  [
    'a parameter that is a text',
    (plant) => ({ ...plant, parameters: { drain: { unit: '1/s', value: '1' } } }),
    'parameters.drain.value',
    /got "1"/,
  ],
  [
    'a tolerance in per cent',
    (plant) => ({ ...plant, parameters: { drain: { unit: '1/s', value: 1, tolerance: 5 } } }),
    'parameters.drain.tolerance',
    /got 5; write 0.05/,
  ],
  ['no derivative', ({ derivative: _, ...rest }) => rest, 'derivative', /a function .* got nothing/],
  [
    'physics without a function',
    (plant) => ({ ...plant, physics: [{ name: 'root' }] }),
    'physics.root.of',
    /got nothing/,
  ],
  ['physics that is an object', (plant) => ({ ...plant, physics: {} }), 'physics', /got an object/],
  ['no operating point', ({ operatingPoint: _, ...rest }) => rest, 'operatingPoint', /got nothing/],
  [
    'an operating point outside',
    (plant) => ({ ...plant, operatingPoint: { x: [5], u: [0.3] } }),
    'operatingPoint.x[0]',
    /from 0 to 2, got 5/,
  ],
  [
    'an operating point of NaN',
    (plant) => ({ ...plant, operatingPoint: { x: [Number.NaN], u: [0.3] } }),
    'operatingPoint.x[0]',
    /got NaN/,
  ],
  [
    'an operating point too long',
    (plant) => ({ ...plant, operatingPoint: { x: [1], u: [0.3, 0] } }),
    'operatingPoint.u',
    /1 number, got a list of 2/,
  ],
  ['no hazards', (plant) => ({ ...plant, hazards: [] }), 'hazards', /what can hurt/],
  [
    'a derivative too long',
    (plant) => ({ ...plant, derivative: () => [1, 2] }),
    'derivative',
    /returns 1 number, one for each state, got 2 at the operating point.*return the derivatives of level/,
  ],
  [
    'a derivative that is a number',
    (plant) => ({ ...plant, derivative: () => 1 }),
    'derivative',
    /got 1 at the operating point/,
  ],
  [
    'a derivative without return',
    (plant) => ({ ...plant, derivative: () => undefined }),
    'derivative',
    /got nothing at/,
  ],
  [
    'NaN at the operating point',
    (plant) => ({ ...plant, derivative: () => [Number.NaN] }),
    'derivative',
    /got NaN for level at the operating point \(level = 1, valve = 0.3\)/,
  ],
  [
    'NaN in a part of the range only',
    (plant) => ({ ...plant, derivative: (x: number[]) => [Math.sqrt(1.7 - x[0])] }),
    'derivative',
    /got NaN for level inside the ranges \(level = 1\.[789]\d*, valve = /,
  ],
  [
    'a misspelt parameter',
    (plant) => ({
      ...plant,
      derivative: (x: number[], _: number[], p: Record<string, number>) => [p.drian * x[0]],
    }),
    'derivative',
    /got NaN/,
  ],
  [
    'a changed state',
    (plant) => ({ ...plant, derivative: (x: number[]) => [x.fill(0)[0]] }),
    'derivative',
    /leaves its arguments as they are, got changed arguments/,
  ],
  [
    'a changed input',
    (plant) => ({ ...plant, derivative: (_: number[], u: number[]) => [u.fill(0)[0]] }),
    'derivative',
    /changed arguments/,
  ],
  [
    'a changed parameter',
    (plant) => ({
      ...plant,
      derivative: (_: number[], __: number[], p: object) => [Object.assign(p, { drain: 1 }).drain],
    }),
    'derivative',
    /changed arguments/,
  ],
  [
    'a physics function that changes the state',
    (plant) => ({ ...plant, physics: [{ name: 'root', of: (x: number[]) => x.fill(0)[0] }] }),
    'physics.root.of',
    /changed arguments/,
  ],
  [
    'a throw',
    (plant) => ({
      ...plant,
      derivative: () => {
        throw new TypeError('no such thing');
      },
    }),
    'derivative',
    /an exception at the operating point .*no such thing/,
  ],
  [
    'physics that is NaN',
    (plant) => ({ ...plant, physics: [{ name: 'root', of: (x: number[]) => Math.sqrt(x[0] - 0.5) }] }),
    'physics.root.of',
    /a finite number, got NaN inside/,
  ],
  [
    'physics that throws',
    (plant) => ({
      ...plant,
      physics: [
        {
          name: 'root',
          of: () => {
            throw new Error('ouch');
          },
        },
      ],
    }),
    'physics.root.of',
    /ouch/,
  ],
  [
    'an output that is a text',
    (plant) => ({ ...plant, outputs: [{ ...good().outputs[0], of: () => 'high' }] }),
    'outputs.level.of',
    /got "high"/,
  ],
];

describe('the check of a plant', () => {
  it('finds nothing in a plant that keeps to the contract', () => {
    expect(checkPlant(good())).toEqual({ problems: [] });
  });

  it('lets typed arrays, output functions and a plant without physics pass', () => {
    const plant = {
      ...good(),
      physics: undefined,
      outputs: [{ name: 'volume', unit: 'm^3', min: 0, max: 4, of: (x: number[]) => 2 * x[0] }],
      derivative: (x: number[]) => Float64Array.of(-x[0]),
    };
    expect(checkPlant(plant).problems).toEqual([]);
  });

  it.each(FAULTS)('names %s, its key and the way out', (_, spoil, key, message) => {
    const { problems } = checkPlant(spoil(good()));
    expect(problems.map((problem) => problem.key)).toEqual([key]);
    const [{ must, got, wayOut }] = problems;
    expect(`${key}: must be ${must}, got ${got}; ${wayOut}`).toMatch(message);
    for (const part of [must, got, wayOut]) expect(part).not.toMatch(/[.;]$|\n/);
  });

  it('names all faulty fields at once', () => {
    const { problems } = checkPlant({ ...good(), name: '', hazards: [], derivative: 3 });
    expect(problems.map(({ key }) => key)).toEqual(['name', 'derivative', 'hazards']);
  });

  it('hands over what a function threw', () => {
    const thrown = new Error('ouch');
    const plant = {
      ...good(),
      derivative: () => {
        throw thrown;
      },
    };
    expect(checkPlant(plant).thrown).toBe(thrown);
  });
});

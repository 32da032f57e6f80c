import { describe, expect, it } from 'vitest';
import { FAMILIES } from '../../src/lift/families.ts';
import { bind, EXAMPLE, edit } from './exampleStudy.ts';

const FAMILY_NAMES = Object.values(FAMILIES)
  .map(({ name }) => name)
  .join(', ');
const MOST_DEGREE = FAMILIES.monomials.settings.find(({ key }) => key === 'degree')?.max;
const STEPS = 'shape: steps, values: [5 mm, -5 mm], hold: 0.5 s';
const WITHOUT_SCENARIO = /scenario:[\s\S]*(?=accept:)/;

/**
 * The catalogue of what goes wrong in a study file: the edit that breaks the example, and the one line that the user
 * must see after the file's name. Common practice, no source: name the file, the line, the key, what it must be,
 * what it is, the way out.
 */
const CASES: readonly (readonly [what: string, text: string, line: string])[] = [
  [
    'an empty file',
    '',
    '1: must be a mapping of keys to values, got an empty file; start with plant, sampleTime, controller.horizon and scenario.references (liftwright help study)',
  ],
  [
    'a file with only a comment',
    '# nothing yet\n',
    '1: must be a mapping of keys to values, got an empty file; start with plant, sampleTime, controller.horizon and scenario.references (liftwright help study)',
  ],
  [
    'a list',
    '- plant: ./plant.ts\n',
    '1: must be a mapping of keys to values, got a list of 1; start with plant, sampleTime, controller.horizon and scenario.references (liftwright help study)',
  ],
  [
    'a word',
    'study\n',
    '1: must be a mapping of keys to values, got "study"; start with plant, sampleTime, controller.horizon and scenario.references (liftwright help study)',
  ],
  [
    'an unclosed bracket',
    edit('[random-steps, chirp]', '[random-steps, chirp'),
    '7: must be YAML, got a slip: flow sequence in block collection must be sufficiently indented and end with a ]; look for a missing colon, bracket, quotation mark or space on this line or the one above',
  ],
  [
    'an unclosed quotation mark',
    edit('A valve', '"A valve'),
    '32: must be YAML, got a slip: missing closing "quote; look for a missing colon, bracket, quotation mark or space on this line or the one above',
  ],
  [
    'a tab as indentation',
    edit('  horizon: 25', '\thorizon: 25'),
    '17: must be YAML, got a slip: tabs are not allowed as indentation; indent with spaces',
  ],
  [
    'a colon without a space',
    edit('seed: 7', 'seed:7'),
    '3: must be YAML, got a slip: implicit keys need to be on a single line; look for a missing colon, bracket, quotation mark or space on this line or the one above',
  ],
  [
    'an alias without its anchor',
    edit('seed: 7', 'seed: *chosen'),
    '3: must be an alias of an anchor above, got *chosen; write &chosen before the value that it stands for',
  ],
  [
    'two documents',
    edit('seed: 7', '---\nseed: 7'),
    '3: must be YAML, got a slip: source contains multiple documents; please use YAML.parseAllDocuments(); look for a missing colon, bracket, quotation mark or space on this line or the one above',
  ],
  [
    'an unknown key',
    edit('seed: 7', 'sead: 7'),
    '3: sead: must be a key of the study file, got "sead"; did you mean seed?',
  ],
  [
    'an unknown key that is like nothing',
    edit('seed: 7', 'colour: 7'),
    '3: colour: must be a key of the study file, got "colour"; the keys here are: title, plant, seed, sampleTime, coordinates, experiment, lifting, predictor, controller, scenario, accept',
  ],
  [
    'an unknown key of a section',
    edit('highest:', 'highst:'),
    '10: experiment.highst: must be a key of experiment, got "highst"; did you mean highest?',
  ],
  [
    'an unknown key of a channel',
    edit('limit: soft', 'kind: soft'),
    '22: controller.outputs.velocity.kind: must be a key of controller.outputs.velocity, got "kind"; the keys here are: trackWeight, min, max, limit, slackWeight, fromStep',
  ],
  [
    'a key written twice',
    edit('seed: 7', 'seed: 7\nseed: 8'),
    '4: seed: must be given once, got a second entry; delete one of the two (the first is on line 3)',
  ],
  [
    'a missing plant',
    edit('plant: ./plant.ts\n', ''),
    '1: plant: must be the path of a plant module, got nothing; add it: path of the plant module, relative to the study file',
  ],
  [
    'a missing horizon',
    edit('  horizon: 25\n', ''),
    '16: controller.horizon: must be an integer from 1 to 1000, got nothing; add it: steps that the controller looks ahead',
  ],
  [
    'a missing section',
    EXAMPLE.replace(WITHOUT_SCENARIO, ''),
    '1: scenario: must be a mapping of keys to values, got nothing; add it: the closed-loop run on the true plant; give at least one reference',
  ],
  [
    'an empty section that needs a key',
    EXAMPLE.replace(WITHOUT_SCENARIO, 'scenario:\n'),
    '23: scenario.references: must be a mapping from the name of an output to a mapping with the key shape, or a list of them, got nothing; add it: what each output is to follow; of several for one output, each starts when the one before it has ended',
  ],
  [
    'no reference',
    edit('{ shape: steps, values: [5 mm, -5 mm], hold: 0.5 s }', '')
      .replace('    position: \n', '')
      .replace('references:', 'references: {}'),
    "24: scenario.references: must be a mapping from the name of an output to a mapping with the key shape, or a list of them, got an empty mapping; write the output's name, a colon and a mapping with the key shape, or a list of them on a line of its own",
  ],
  [
    'a word for a time',
    edit('2 ms', 'fast'),
    '4: sampleTime: must be a time > 0, got "fast"; write seconds or a quantity with a unit of time, such as 5 ms',
  ],
  [
    'a time in a unit of something else',
    edit('2 ms', '2 mA'),
    '4: sampleTime: must be a time > 0, got "2 mA"; write seconds or a quantity with a unit of time, such as 5 ms',
  ],
  [
    'a time in a unit that nobody knows',
    edit('2 ms', '2 jiffies'),
    '4: sampleTime: must be a time > 0, got "2 jiffies"; write seconds or a quantity with a unit of time, such as 5 ms',
  ],
  [
    'a time of zero',
    edit('2 ms', '0'),
    '4: sampleTime: must be a time > 0, got 0; write seconds or a quantity with a unit of time, such as 5 ms',
  ],
  [
    'a negative time',
    edit('2 ms', '-2 ms'),
    '4: sampleTime: must be a time > 0, got "-2 ms"; write seconds or a quantity with a unit of time, such as 5 ms',
  ],
  [
    'a number in quotation marks',
    edit('2 ms', '"0.002"'),
    '4: sampleTime: must be a time > 0, got "0.002"; write seconds or a quantity with a unit of time, such as 5 ms',
  ],
  [
    'NaN',
    edit('2 ms', '.nan'),
    '4: sampleTime: must be a time > 0, got .nan; write seconds or a quantity with a unit of time, such as 5 ms',
  ],
  [
    'infinity',
    edit('2 ms', '.inf'),
    '4: sampleTime: must be a time > 0, got .inf; write seconds or a quantity with a unit of time, such as 5 ms',
  ],
  [
    'a number beyond all numbers',
    edit('2 ms', '1e999'),
    '4: sampleTime: must be a time > 0, got 1e999; write seconds or a quantity with a unit of time, such as 5 ms',
  ],
  [
    'nothing after the colon',
    edit('sampleTime: 2 ms', 'sampleTime:'),
    '4: sampleTime: must be a time > 0, got nothing; write seconds or a quantity with a unit of time, such as 5 ms',
  ],
  [
    'a list for a number',
    edit('2 ms', '[2 ms]'),
    '4: sampleTime: must be a time > 0, got a list of 1; write seconds or a quantity with a unit of time, such as 5 ms',
  ],
  [
    'a fraction for a whole number',
    edit('horizon: 25', 'horizon: 2.5'),
    '17: controller.horizon: must be an integer from 1 to 1000, got 2.5; write a whole number in that range, without a unit',
  ],
  [
    'a horizon of zero',
    edit('horizon: 25', 'horizon: 0'),
    '17: controller.horizon: must be an integer from 1 to 1000, got 0; write a whole number in that range, without a unit',
  ],
  [
    'a whole number with a unit',
    edit('horizon: 25', 'horizon: 25 s'),
    '17: controller.horizon: must be an integer from 1 to 1000, got "25 s"; write a whole number in that range, without a unit',
  ],
  [
    'a negative seed',
    edit('seed: 7', 'seed: -1'),
    '3: seed: must be an integer from 0 to 4294967295, got -1; write a whole number in that range, without a unit',
  ],
  [
    'a number for a title',
    edit('A valve', '2024'),
    '1: title: must be a text, got 2024; write a few words, in quotation marks if they contain a colon',
  ],
  [
    'a signal that does not exist',
    edit('chirp', 'chrip'),
    '6: experiment.signals[2]: must be one of random-steps, binary-sequence, multisine, chirp, got "chrip"; did you mean chirp?',
  ],
  [
    'a list without entries',
    edit('[random-steps, chirp]', '[]'),
    '6: experiment.signals: must be a list of at least 1, each entry one of random-steps, binary-sequence, multisine, chirp, got a list of 0; write the entries in brackets, separated by commas, or one a line after a hyphen',
  ],
  [
    'a word for a list',
    edit('[random-steps, chirp]', 'chirp'),
    '6: experiment.signals: must be a list of at least 1, each entry one of random-steps, binary-sequence, multisine, chirp, got "chirp"; write the entries in brackets, separated by commas, or one a line after a hyphen',
  ],
  [
    'a hold shorter than a sample',
    edit('hold: 10 ms', 'hold: 1 ms'),
    '9: experiment.hold: must be a time of at least one sample (0.002 s), got 0.001 s; hold the input for a sample or longer',
  ],
  [
    'a frequency above half the sample rate',
    edit('50 Hz', '300 Hz'),
    '10: experiment.highest: must be a frequency ≤ 250 Hz, half the sample rate, got 300 Hz; lower it or shorten the sample time',
  ],
  [
    'trajectories shorter than the horizon',
    edit('duration: 0.3 s', 'duration: 40 ms'),
    '8: experiment.duration: must be a time of at least 26 samples (0.052 s), so that errors can be seen over the horizon, got 0.04 s; lengthen the trajectories or shorten the horizon',
  ],
  [
    'more samples than the memory holds',
    edit('trajectories: 50', 'trajectories: 50000'),
    '7: experiment.trajectories: must be so many that all trajectories together have at most 5000000 samples, got 50000 of 150 samples; take fewer or shorter trajectories',
  ],
  [
    'shares that leave nothing to hold out',
    edit('trajectories: 50', 'fitShare: 90 %'),
    '5: experiment.chooseShare: must be a share that leaves something to hold out beside fitShare (0.9), got 0.15; lower one of the two so that their sum is below 1',
  ],
  [
    'a start region beyond the cut',
    edit('trajectories: 50', 'startRegion: 2'),
    '7: experiment.startRegion: must be a number ≤ cutAt (1.5), got 2; raise cutAt, or every trajectory may be cut at once',
  ],
  [
    'a share above one',
    edit('trajectories: 50', 'amplitude: 120 %'),
    '7: experiment.amplitude: must be a number > 0 and ≤ 1, got "120 %"; write a number without a unit, or a percentage such as 5 %',
  ],
  [
    'a family that does not exist',
    edit('monomials', 'monomial'),
    `13: lifting.parts[1].family: must be one of ${FAMILY_NAMES}, got "monomial"; did you mean monomials?`,
  ],
  [
    'a setting that the family has not',
    edit('degree: 3', 'degre: 3'),
    '13: lifting.parts[1].degre: must be a key of lifting.parts[1], got "degre"; did you mean degree?',
  ],
  [
    'a setting outside its range',
    edit('degree: 3', 'degree: -3'),
    `13: lifting.parts[1].degree: must be an integer from 1 to ${MOST_DEGREE}, got -3; write a whole number in that range, without a unit`,
  ],
  [
    'a part without a family',
    edit('{ family: monomials, degree: 3 }', '{ degree: 3 }'),
    `13: lifting.parts[1]: must be a mapping with the key family, got keys degree; write family: and one of ${FAMILY_NAMES}`,
  ],
  [
    'a part that is a word',
    edit('{ family: monomials, degree: 3 }', 'monomials'),
    `13: lifting.parts[1]: must be a mapping with the key family, got "monomials"; write family: and one of ${FAMILY_NAMES}`,
  ],
  [
    'a ridge that is neither a number nor auto',
    edit('1e-6', 'some'),
    '15: predictor.ridge: must be auto or a number from 0 to 1000000, got "some"; write auto, or a number without a unit, or a percentage such as 5 %',
  ],
  [
    'a negative ridge',
    edit('1e-6', '-1e-6'),
    '15: predictor.ridge: must be auto or a number from 0 to 1000000, got -1e-6; write auto, or a number without a unit, or a percentage such as 5 %',
  ],
  [
    'blocks longer than the horizon',
    edit('[1, 2]', '[20, 20]'),
    '18: controller.blocks: must be lengths whose sum is ≤ the horizon (25), got a sum of 40; shorten the blocks or lengthen the horizon',
  ],
  [
    'a block of length zero',
    edit('[1, 2]', '[1, 0]'),
    '18: controller.blocks[2]: must be an integer ≥ 1, got 0; write a whole number in that range, without a unit',
  ],
  [
    'a channel that the plant has not',
    edit('current: { max', 'curent: { max'),
    '20: controller.inputs.curent: must be the name of an input of valve, got "curent"; did you mean current?',
  ],
  [
    'an output named as an input',
    edit('current: { max: 1500 mA, rate: 300 A/s }', 'position: { moveWeight: 1 }'),
    '20: controller.inputs.position: must be the name of an input of valve, got "position"; its inputs are: current',
  ],
  [
    'a limit in a unit of something else',
    edit('1500 mA', '1500 mV'),
    '20: controller.inputs.current.max: must be a quantity in A or a unit of the same dimension, got "1500 mV"; write a bare number for A, or correct the unit',
  ],
  [
    'a limit beyond the actuator',
    edit('1500 mA', '1500'),
    "20: controller.inputs.current.max: must be within the plant's own limits, -2 to 2 A, got 1500 A; tighten it: the actuator cannot do more",
  ],
  [
    'a rate that is no rate',
    edit('300 A/s', '300 A'),
    '20: controller.inputs.current.rate: must be a quantity in A/s or a unit of the same dimension, got "300 A"; write a bare number for A/s, or correct the unit',
  ],
  [
    'a rate beyond the actuator',
    edit('300 A/s', '1 A/ms'),
    "20: controller.inputs.current.rate: must be a rate > 0 and ≤ 400 A/s, the plant's own, got 1000 A/s; correct the number or its unit",
  ],
  [
    'a rate of zero',
    edit('300 A/s', '0'),
    "20: controller.inputs.current.rate: must be a rate > 0 and ≤ 400 A/s, the plant's own, got 0 A/s; correct the number or its unit",
  ],
  [
    'limits the wrong way round',
    edit('min: -0.5', 'min: 0.6'),
    '22: controller.outputs.velocity.min: must be less than max (0.5 m/s), got 0.6 m/s; swap the two or correct one',
  ],
  [
    'a limit that is a word',
    edit('500 mm/s', 'fast'),
    '22: controller.outputs.velocity.max: must be a quantity in the channel\'s unit, got "fast"; write a number or a quantity such as 0.5 A; a bare number is in the channel\'s SI unit',
  ],
  [
    'a hard limit without a number',
    edit('{ min: -0.5, max: 500 mm/s, limit: soft }', '{ limit: hard }'),
    '22: controller.outputs.velocity.limit: must be given with min or max, got neither; add the limit that is hard',
  ],
  [
    'a limit from beyond the horizon',
    edit('limit: soft', 'fromStep: 30'),
    '22: controller.outputs.velocity.fromStep: must be an integer ≤ the horizon (25), got 30; impose it earlier',
  ],
  [
    'yes for true',
    edit('blocks: [1, 2]', 'preview: yes'),
    '18: controller.preview: must be true or false, got "yes"; write true or false, without quotation marks',
  ],
  [
    'a negative weight',
    edit('rate: 300 A/s', 'moveWeight: -1'),
    '20: controller.inputs.current.moveWeight: must be a number ≥ 0, got -1; write a number without a unit, or a percentage such as 5 %',
  ],
  [
    'a reference without a shape',
    edit('shape: steps, ', ''),
    '25: scenario.references.position: must be a mapping with the key shape, got keys values, hold; write shape: and one of constant, steps, sine, ramp, points',
  ],
  [
    'a reference of a shape that does not exist',
    edit('shape: steps', 'shape: staircase'),
    '25: scenario.references.position.shape: must be one of constant, steps, sine, ramp, points, got "staircase"; choose one of: constant, steps, sine, ramp, points',
  ],
  [
    'a reference without its hold',
    edit(', hold: 0.5 s', ''),
    '25: scenario.references.position.hold: must be a time > 0, got nothing; add it: time for which each is held',
  ],
  [
    'a reference beyond the working range',
    edit('[5 mm, -5 mm]', '[5, -5 mm]'),
    "25: scenario.references.position.values[1]: must be within the output's working range, -0.01 to 0.01 m, got 5 m; check the unit, or widen the range in the plant's file",
  ],
  [
    'a reference in a unit of something else',
    edit('[5 mm, -5 mm]', '[5 mA, -5 mm]'),
    '25: scenario.references.position.values[1]: must be a quantity in m or a unit of the same dimension, got "5 mA"; write a bare number for m, or correct the unit',
  ],
  [
    'a reference that is held for less than a sample',
    edit('hold: 0.5 s', 'hold: 1 ms'),
    '25: scenario.references.position.hold: must be a time of at least one sample (0.002 s), got 0.001 s; lengthen it or shorten the sample time',
  ],
  [
    'a sine whose crest leaves the working range',
    edit(STEPS, 'shape: sine, centre: 5 mm, amplitude: 6 mm, period: 1 s'),
    "25: scenario.references.position.amplitude: must be within the output's working range, -0.01 to 0.01 m, got 0.011 m; check the unit, or widen the range in the plant's file",
  ],
  [
    'a sine faster than half the sample rate',
    edit(STEPS, 'shape: sine, amplitude: 6 mm, period: 3 ms'),
    '25: scenario.references.position.period: must be a time of at least 2 samples (0.004 s), got 0.003 s; lengthen it or shorten the sample time',
  ],
  [
    'a constant reference that another one is to follow',
    edit(`{ ${STEPS} }`, `[{ shape: constant, value: 0 }, { ${STEPS} }]`),
    '25: scenario.references.position[1].shape: must be one that ends, where another follows, got constant; put it last, or write steps with one value and a hold',
  ],
  [
    'points that go back in time',
    edit(STEPS, 'shape: points, times: [0, 2, 1], values: [0, 1 mm, 0]'),
    '25: scenario.references.position.times: must be ascending, got 1 s after 2 s; put the points in order of time',
  ],
  [
    'points without a value each',
    edit(STEPS, 'shape: points, times: [0, 2], values: [0, 1 mm, 0]'),
    '25: scenario.references.position.values: must be a list as long as times (2), got 3 entries; give one value a time',
  ],
  [
    'a start outside the working range',
    edit('start: { position: 1 mm }', 'start: { position: 1 }'),
    "26: scenario.start.position: must be within the state's working range, -0.01 to 0.01 m, got 1 m; check the unit, or start inside the range",
  ],
  [
    'a start of a state that the plant has not',
    edit('start: { position: 1 mm }', 'start: { speed: 1 }'),
    '26: scenario.start.speed: must be the name of a state of valve, got "speed"; its states are: position, velocity',
  ],
  [
    'a factor on a parameter that the plant has not',
    edit('noise: 0.3 %', 'parameterFactors: { masss: 1.1 }'),
    '29: scenario.parameterFactors.masss: must be the name of a parameter of valve, got "masss"; did you mean mass?',
  ],
  [
    'a factor of zero',
    edit('noise: 0.3 %', 'parameterFactors: { mass: 0 }'),
    '29: scenario.parameterFactors.mass: must be a number > 0, got 0; write a number without a unit, or a percentage such as 5 %',
  ],
  [
    'a delay of half a sample',
    edit('noise: 0.3 %', 'delay: 0.5'),
    '29: scenario.delay: must be an integer from 0 to 100, got 0.5; write a whole number in that range, without a unit',
  ],
  [
    'a temperature with an offset',
    edit('1500 mA', '20 degC'),
    '20: controller.inputs.current.max: must be a quantity in A or a unit of the same dimension, got "20 degC"; write a bare number for A, or correct the unit',
  ],
  [
    'a run of more steps than anybody waits for',
    edit('noise: 0.3 %', 'duration: 1 h'),
    '29: scenario.duration: must be a time of 1 to 1000000 samples (0.002 s each), got 3600 s; change it or the sample time',
  ],
  [
    'a key that is a list',
    edit('seed: 7', '? [a, b]\n: 7'),
    '3: must be a word as key, got a list of 2; write key: value',
  ],
];

describe('a study that cannot be used', () => {
  it.each(CASES)('%s gives its one line', (_, text, line) => {
    expect(bind(text).lines).toEqual([`study.yaml:${line}`]);
  });

  it('several faults are all told at once, one a line, in the order of the file', () => {
    const text = edit('seed: 7', 'sead: 7')
      .replace('trajectories: 50', 'trajectories: many')
      .replace('current: { max', 'curent: { max')
      .replace('500 mm/s', '500 mm')
      .replace('worstExcess: 5 %', 'worstExcess: -5 %');
    expect(bind(text).lines.map((line) => line.split(': must')[0])).toEqual([
      'study.yaml:3: sead',
      'study.yaml:7: experiment.trajectories',
      'study.yaml:20: controller.inputs.curent',
      'study.yaml:22: controller.outputs.velocity.max',
      'study.yaml:31: accept.worstExcess',
    ]);
  });

  it('an anchor and its alias are as good as the value written twice', () => {
    const text = edit('hold: 10 ms', 'hold: &t 10 ms').replace('hold: 0.5 s', 'hold: *t');
    expect(bind(text).lines).toEqual([]);
    expect(bind(text).study?.scenario.references[0].time).toBe(0.01);
  });
});

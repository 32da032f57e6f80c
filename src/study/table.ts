import { absent, derived, optional, required } from './fields.ts';
import { byName, group, list, oneOrMore } from './groups.ts';
import type { Values } from './kinds.ts';
import {
  channelQuantity,
  choice,
  integer,
  type Kind,
  number,
  quantity,
  text,
  toggle,
  wordOr,
} from './kinds.ts';
import { LIFTING_PART } from './liftingTable.ts';
import { REFERENCE } from './referenceTable.ts';

/**
 * THE table of the study file: every key, its kind with range and unit, its default, its meaning. Validation,
 * defaults, help text and the reference in the README are all made from it. Defaults without a word are the
 * ones that served in closed loop on seven actuators.
 */

const time = quantity('s', { above: 0 });
const timeFromZero = quantity('s', { min: 0 });
const share = number({ above: 0, max: 1 });
const weight = number({ min: 0 });

const COORDINATES = group({
  read: optional(
    choice(['state', 'delays']),
    'state',
    'What the lifting reads: the whole measured state, or present and past outputs and inputs',
  ),
  outputLags: optional(integer({ min: 0, max: 50 }), 2, 'Past samples of each output, with read: delays'),
  inputLags: optional(integer({ min: 0, max: 50 }), 2, 'Past samples of each input, with read: delays'),
});

const SIGNALS = ['random-steps', 'binary-sequence', 'multisine', 'chirp'] as const;

const EXPERIMENT = group({
  signals: optional(
    list(choice(SIGNALS)),
    ['random-steps', 'multisine'],
    'Shapes of the excitation; the trajectories take them in turn',
  ),
  trajectories: optional(integer({ min: 3, max: 100_000 }), 100, 'Number of trajectories'),
  duration: derived(
    time,
    '100 samples, or twice the horizon',
    ({ sampleTime, horizon }) => sampleTime * Math.max(100, 2 * horizon),
    'Length of one trajectory',
  ),
  amplitude: optional(share, 1, 'Share of the input range that is used'),
  hold: derived(
    time,
    '5 samples',
    ({ sampleTime }) => 5 * sampleTime,
    'Time for which a random step or a bit of the binary sequence is held',
  ),
  highest: derived(
    quantity('Hz', { above: 0 }),
    'a tenth of the sample rate',
    ({ sampleTime }) => 0.1 / sampleTime,
    'Highest frequency of multisine and chirp',
  ),
  startRegion: optional(
    number({ min: 0, max: 10 }),
    1,
    'Initial states are drawn from the state ranges, stretched about their middle by this factor',
  ),
  cutAt: optional(
    number({ above: 0, max: 100 }),
    1.5,
    'A trajectory is cut where it leaves the state ranges stretched by this factor',
  ),
  fitShare: optional(share, 0.6, 'Share of the trajectories that the regression uses'),
  chooseShare: optional(
    share,
    0.15,
    'Share on which the ridge is chosen; the rest is held out for the assessment',
  ),
});

const LIFTING = group({
  parts: absent(
    list(LIFTING_PART),
    'Parts that are joined to the lifting; the state itself is always in it',
    "the plant's physics functions if it offers any, else thin-plate functions",
  ),
  constant: optional(toggle(), true, 'Is the constant function included'),
});

const PREDICTOR = group({
  route: optional(
    choice(['auto', 'gram', 'orthogonal']),
    'auto',
    'Route of the regression: streamed normal equations, or an orthogonal factorisation; auto decides by conditioning',
  ),
  ridge: optional(
    wordOr('auto', number({ min: 0, max: 1e6 })),
    null,
    'Ridge on standardised functions; auto chooses it by the error over the horizon on trajectories kept for that',
  ),
  tolerance: optional(
    share,
    0.1,
    'Prediction error (root mean square, share of the half ranges) that still counts as trusted',
  ),
});

const INPUT = group({
  min: absent(channelQuantity(), "Lower limit, within the plant's own", "the plant's"),
  max: absent(channelQuantity(), "Upper limit, within the plant's own", "the plant's"),
  rate: absent(channelQuantity(true), "Limit on the rate of change, within the plant's own", "the plant's"),
  moveWeight: optional(weight, 0.02, 'Weight on the change from sample to sample'),
  levelWeight: optional(weight, 0, 'Weight on the distance from the steady-state input'),
});

const OUTPUT = group({
  trackWeight: absent(weight, 'Weight on the distance from the reference', '1 with a reference, 0 without'),
  min: absent(channelQuantity(), 'Lower limit'),
  max: absent(channelQuantity(), 'Upper limit'),
  limit: optional(
    choice(['soft', 'hard']),
    'soft',
    'May the limit give way at a price (soft), or never (hard, which can leave no solution)',
  ),
  slackWeight: optional(number({ above: 0 }), 1e4, 'Price of breaking a soft limit, on the squared excess'),
  fromStep: optional(integer({ min: 1 }), 1, 'First step ahead at which the limit is imposed'),
});

const CONTROLLER = group({
  horizon: required(integer({ min: 1, max: 1000 }), 'Steps that the controller looks ahead'),
  blocks: optional(
    list(integer({ min: 1 })),
    [1],
    'Steps for which each planned input is held (move blocking); the last one repeats',
  ),
  inputs: optional(byName('input', INPUT), new Map(), 'Limits and weights of each input'),
  outputs: optional(byName('output', OUTPUT), new Map(), 'Limits and weights of each output'),
  terminal: optional(
    choice(['none', 'riccati']),
    'none',
    'Weight at the end of the horizon: that of the last step, or the one of the endless horizon from the Riccati equation',
  ),
  preview: optional(toggle(), true, 'Does the controller see the reference ahead'),
  delay: optional(
    wordOr('auto', integer({ min: 0, max: 100 })),
    null,
    "Input delay that the controller reckons with, in samples; auto takes the scenario's",
  ),
  disturbanceGain: optional(
    number({ min: 0, max: 1 }),
    0.1,
    'Gain of the disturbance estimate, which removes offset; 0 switches it off',
  ),
});

const DISTURBANCE = group({
  value: required(channelQuantity(), 'Constant disturbance that is added to the input'),
  from: optional(timeFromZero, 0, 'When it is switched on'),
});

const SCENARIO = group({
  references: required(
    byName('output', oneOrMore(REFERENCE), 1),
    'What each output is to follow; of several for one output, each starts when the one before it has ended',
  ),
  duration: absent(
    time,
    'Length of the closed-loop run',
    'as long as the references take, at least 200 samples',
  ),
  start: optional(
    byName('state', channelQuantity()),
    new Map(),
    'Initial value of each state',
    "the plant's operating point",
  ),
  delay: optional(integer({ min: 0, max: 100 }), 0, 'Delay of the true input path, in samples'),
  noise: optional(
    number({ min: 0, max: 1 }),
    0,
    'Standard deviation of the measurement noise, share of the half range of each measured signal',
  ),
  disturbances: optional(byName('input', oneOrMore(DISTURBANCE)), new Map(), 'Disturbances on the inputs'),
  parameterFactors: optional(
    byName('parameter', number({ above: 0 })),
    new Map(),
    "Factors on the true plant's parameters; the experiment keeps the nominal ones",
  ),
});

const ACCEPT = group({
  worstExcess: absent(number({ min: 0 }), 'Worst excess over any limit, share of the range', 'not asked'),
  offset: absent(number({ min: 0 }), 'Offset that remains on any output, share of the range', 'not asked'),
  trackingRms: absent(
    number({ min: 0 }),
    'Tracking error of any output that has a reference (root mean square), share of the range',
    'not asked',
  ),
  settling: absent(time, 'Time to settle within 2 % of a step of the reference', 'not asked'),
});

export const TABLE = {
  title: absent(
    text('a text', 'write a few words, in quotation marks if they contain a colon'),
    'What the study is about, for the report',
    "the plant's name",
  ),
  plant: required(
    text('the path of a plant module', 'write the path relative to this file, such as ./plant.ts'),
    'Path of the plant module, relative to the study file',
  ),
  seed: optional(
    integer({ min: 0, max: 4_294_967_295 }),
    1,
    'Seed of all random numbers: same study, same seed, same files',
  ),
  sampleTime: required(time, 'Time from one control decision to the next'),
  coordinates: optional(COORDINATES, defaultsOf(COORDINATES), 'What is measured and lifted'),
  experiment: optional(EXPERIMENT, defaultsOf(EXPERIMENT), 'How data are gathered from the plant'),
  lifting: optional(LIFTING, defaultsOf(LIFTING), 'The functions that the state is lifted to'),
  predictor: optional(PREDICTOR, defaultsOf(PREDICTOR), 'How the predictor is fitted and judged'),
  controller: required(CONTROLLER, 'The controller; give at least its horizon'),
  scenario: required(SCENARIO, 'The closed-loop run on the true plant; give at least one reference'),
  accept: optional(ACCEPT, defaultsOf(ACCEPT), 'Limits on the result; exit code 1 when one is missed'),
};

/** What an input has when the study says nothing about it. */
export const INPUT_DEFAULTS = defaultsOf(INPUT);

/** The study file as a whole. */
export const STUDY = group(TABLE);

/** The settings of a lifting family of which only the name is given. */
export function defaultFamilyValues(family: string): Record<string, number | string> {
  const { below } = LIFTING_PART;
  const fields =
    below?.type === 'variants' ? below.variants.find(({ name }) => name === family)?.fields : undefined;
  if (!fields) throw new TypeError(`there is no lifting family ${family}`);
  return defaultsOf(group(fields)) as Record<string, number | string>;
}

/** A group in which nothing was written. */
function defaultsOf<T>(kind: Kind<T>): T {
  if (kind.below?.type !== 'group') throw new TypeError('only a group has defaults of its own');
  const values: Record<string, unknown> = {};
  for (const [key, { presence }] of Object.entries(kind.below.fields)) {
    if (presence.type === 'default') values[key] = presence.value;
  }
  return values as T;
}

/** The values of a study file before the plant is known. */
export type StudyValues = Values<typeof TABLE>;

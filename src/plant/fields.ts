import { describeValue } from './describeValue.ts';

/** One thing in a plant that cannot be used: reads `key: must be X, got Y; way out`. */
export interface PlantProblem {
  readonly key: string;
  readonly must: string;
  readonly got: string;
  readonly wayOut: string;
}

type Fields = Readonly<Record<string, unknown>>;
type Report = (key: string, must: string, got: unknown, wayOut: string) => void;

/** Names of channels stand in study files and, with `-` as `_`, in C: letters, digits, `-` and `_`. */
const NAME = /^[A-Za-z][A-Za-z0-9_-]*$/;
const NAME_RULE = 'a name of letters, digits, - and _, beginning with a letter';

const isFields = (value: unknown): value is Fields =>
  typeof value === 'object' && value !== null && !Array.isArray(value);
const isFiniteNumber = (value: unknown): value is number => Number.isFinite(value);

/** What is wrong with the fields of a plant module's export; its functions are not called. */
export function fieldProblems(exported: unknown): PlantProblem[] {
  const problems: PlantProblem[] = [];
  const report: Report = (key, must, got, wayOut) => {
    problems.push({ key, must, got: describeValue(got), wayOut });
  };
  if (!isFields(exported)) {
    report('default export', 'a plant', exported, 'write export default definePlant({ … })');
    return problems;
  }
  checkName(exported.name, 'name', report);
  checkText(exported.description, 'description', report, 'say in one sentence what the plant is');
  checkChannels(exported.states, 'states', report);
  checkChannels(exported.inputs, 'inputs', report);
  checkChannels(exported.outputs, 'outputs', report);
  checkRates(exported.inputs, report);
  // What is read against a list is checked only when the list itself is right: one fault, one message.
  const sound = (list: string) => !problems.some(({ key }) => key.startsWith(list));
  if (sound('states')) checkReadouts(exported.outputs, exported.states, report);
  checkParameters(exported.parameters, report);
  if (typeof exported.derivative !== 'function') {
    report('derivative', 'a function (x, u, p) → ẋ', exported.derivative, 'write the equations of the plant');
  }
  checkPhysics(exported.physics, report);
  checkOperatingPoint(exported, sound, report);
  checkHazards(exported.hazards, report);
  return problems;
}

function checkName(value: unknown, key: string, report: Report): void {
  if (typeof value !== 'string' || !NAME.test(value)) {
    report(key, NAME_RULE, value, 'give it such a name');
  }
}

function checkText(value: unknown, key: string, report: Report, wayOut: string): void {
  if (typeof value !== 'string' || value.trim() === '') report(key, 'a text', value, wayOut);
}

function checkChannels(value: unknown, key: string, report: Report): void {
  if (!Array.isArray(value) || value.length === 0) {
    report(key, 'a list of at least one channel', value, 'list { name, unit, min, max } for each');
    return;
  }
  const seen = new Set<unknown>();
  for (const [i, channel] of value.entries()) {
    if (!isFields(channel)) {
      report(`${key}[${i}]`, 'a channel', channel, 'write { name, unit, min, max }');
      continue;
    }
    checkName(channel.name, `${key}[${i}].name`, report);
    const at = typeof channel.name === 'string' ? `${key}.${channel.name}` : `${key}[${i}]`;
    if (seen.has(channel.name)) report(at, 'a name used once', channel.name, 'rename one of them');
    seen.add(channel.name);
    checkText(channel.unit, `${at}.unit`, report, 'name its SI unit, 1 for a pure number');
    for (const end of ['min', 'max']) {
      if (!isFiniteNumber(channel[end])) {
        report(`${at}.${end}`, 'a finite number', channel[end], 'give the working range in its unit');
      }
    }
    if (isFiniteNumber(channel.min) && isFiniteNumber(channel.max) && !(channel.min < channel.max)) {
      report(`${at}.min`, `below max = ${channel.max}`, channel.min, 'exchange or mend them');
    }
  }
}

function checkRates(inputs: unknown, report: Report): void {
  for (const input of channelsOf(inputs)) {
    if (input.rate !== undefined && !(isFiniteNumber(input.rate) && input.rate > 0)) {
      const wayOut = 'give the fastest change per second, or leave rate out';
      report(`inputs.${input.name}.rate`, 'a number > 0', input.rate, wayOut);
    }
  }
}

function checkReadouts(outputs: unknown, states: unknown, report: Report): void {
  const names = channelsOf(states).map(({ name }) => name);
  for (const { name, of } of channelsOf(outputs)) {
    if (typeof of === 'function' || names.includes(of)) continue;
    const must = `the name of a state (${names.join(', ')}) or a function (x, p) → number`;
    report(`outputs.${name}.of`, must, of, 'say what the output reads');
  }
}

function checkParameters(value: unknown, report: Report): void {
  if (!isFields(value)) {
    report('parameters', 'an object of parameters', value, 'write { mass: { unit, value } }, or {} for none');
    return;
  }
  for (const [name, parameter] of Object.entries(value)) {
    const at = `parameters.${name}`;
    if (!isFields(parameter)) {
      report(at, 'a parameter', parameter, 'write { unit, value }');
      continue;
    }
    checkText(parameter.unit, `${at}.unit`, report, 'name its SI unit, 1 for a pure number');
    if (!isFiniteNumber(parameter.value))
      report(`${at}.value`, 'a finite number', parameter.value, 'give its value');
    const { tolerance } = parameter;
    if (tolerance !== undefined && !(isFiniteNumber(tolerance) && tolerance >= 0 && tolerance < 1)) {
      report(`${at}.tolerance`, 'a number ≥ 0 and < 1', tolerance, 'write 0.05 for ±5 %');
    }
  }
}

function checkPhysics(value: unknown, report: Report): void {
  if (value === undefined) return;
  if (!Array.isArray(value)) {
    report('physics', 'a list of functions', value, 'list { name, of } for each, or leave physics out');
    return;
  }
  const seen = new Set<unknown>();
  for (const [i, entry] of value.entries()) {
    if (!isFields(entry)) {
      report(`physics[${i}]`, 'a named function', entry, 'write { name, of }');
      continue;
    }
    const named = typeof entry.name === 'string' && entry.name.trim() !== '';
    const at = named ? `physics.${entry.name}` : `physics[${i}]`;
    checkText(entry.name, `physics[${i}].name`, report, 'name it');
    if (seen.has(entry.name)) report(at, 'a name used once', entry.name, 'rename one of them');
    seen.add(entry.name);
    if (typeof entry.of !== 'function') {
      report(`${at}.of`, 'a function (x, p) → number', entry.of, 'write its formula');
    }
  }
}

function checkOperatingPoint(plant: Fields, sound: (list: string) => boolean, report: Report): void {
  const { operatingPoint } = plant;
  if (!isFields(operatingPoint)) {
    report('operatingPoint', 'a state and an input', operatingPoint, 'write { x: […], u: […] }');
    return;
  }
  for (const [key, list] of [
    ['x', 'states'],
    ['u', 'inputs'],
  ] as const) {
    if (!sound(list)) continue;
    const channels = channelsOf(plant[list]);
    const values = operatingPoint[key];
    const at = `operatingPoint.${key}`;
    const must = `${channels.length} number${channels.length === 1 ? '' : 's'}`;
    if (!Array.isArray(values) || values.length !== channels.length) {
      report(at, must, values, `give one for each of ${channels.map(({ name }) => name).join(', ')}`);
      continue;
    }
    for (const [i, { name, min, max }] of channels.entries()) {
      if (isFiniteNumber(values[i]) && !(values[i] < (min as number)) && !(values[i] > (max as number)))
        continue;
      report(`${at}[${i}]`, `a number from ${min} to ${max}`, values[i], `move it into the range of ${name}`);
    }
  }
}

function checkHazards(value: unknown, report: Report): void {
  const texts = Array.isArray(value) && value.every((text) => typeof text === 'string' && text.trim() !== '');
  if (!texts || value.length === 0) {
    report('hazards', 'a list of at least one sentence', value, 'say what can hurt people or the machine');
  }
}

/** The entries of a list that are objects at all. */
function channelsOf(value: unknown): readonly Fields[] {
  return Array.isArray(value) ? value.filter(isFields) : [];
}

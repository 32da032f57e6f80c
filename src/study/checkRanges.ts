import type { Channel, Plant } from '../plant/plant.ts';
import { convertQuantity, findChannel, unitName } from './channels.ts';
import type { Problem } from './problem.ts';
import type { ChannelQuantity, Spot } from './reader.ts';
import type { StudyDraft } from './readStudy.ts';
import type { StudyValues } from './table.ts';

type Values = Partial<StudyValues>;
type Refuse = (spot: Spot, must: string, got: string, wayOut: string) => void;
/** A level in the unit of its channel, and where it comes from. */
interface Level {
  readonly value: number;
  readonly spot: ChannelQuantity['spot'];
}

const show = (value: number) => String(Number(value.toPrecision(6)));
const suffix = ({ unit }: Channel) => (unit === '1' ? '' : ` ${unit}`);

/**
 * Limits against each other and against the plant's, references and initial states against the working ranges.
 * Silent about quantities that could not be converted: those have their message already.
 */
export function checkRanges({ file, values, lineOf }: StudyDraft, plant: Plant): Problem[] {
  const problems: Problem[] = [];
  // One message a key: a sine that leaves the range does so on both sides.
  const refuse: Refuse = ({ key, line }, must, got, wayOut) => {
    if (problems.every((problem) => problem.key !== key))
      problems.push({ file, line, key, must, got, wayOut });
  };
  const levelOf = (quantity: ChannelQuantity | null | undefined): Level | null => {
    const value = quantity ? convertQuantity(quantity, plant) : null;
    return quantity && value !== null ? { value, spot: quantity.spot } : null;
  };
  checkInputs(values, plant, levelOf, refuse);
  checkOutputs(values, plant, levelOf, lineOf, refuse);
  for (const level of referenceLevels(values, levelOf)) {
    const wayOut = "check the unit, or widen the range in the plant's file";
    checkWithin(level, plant, "the output's working range", wayOut, refuse);
  }
  for (const quantity of values.scenario?.start?.values() ?? []) {
    const wayOut = 'check the unit, or start inside the range';
    checkWithin(levelOf(quantity), plant, "the state's working range", wayOut, refuse);
  }
  return problems;
}

type LevelOf = (quantity: ChannelQuantity | null | undefined) => Level | null;

function checkWithin(level: Level | null, plant: Plant, what: string, wayOut: string, refuse: Refuse): void {
  const channel = level && findChannel(plant, level.spot.channel);
  if (!channel || (level.value >= channel.min && level.value <= channel.max)) return;
  const must = `within ${what}, ${show(channel.min)} to ${show(channel.max)}${suffix(channel)}`;
  refuse(level.spot, must, `${show(level.value)}${suffix(channel)}`, wayOut);
}

function checkOrder(min: Level | null, max: Level | null, plant: Plant, refuse: Refuse): void {
  const channel = min && findChannel(plant, min.spot.channel);
  if (!channel || !max || min.value < max.value) return;
  const must = `less than max (${show(max.value)}${suffix(channel)})`;
  refuse(min.spot, must, `${show(min.value)}${suffix(channel)}`, 'swap the two or correct one');
}

function checkInputs(values: Values, plant: Plant, levelOf: LevelOf, refuse: Refuse): void {
  for (const [name, input] of values.controller?.inputs ?? []) {
    const [min, max, rate] = [levelOf(input.min), levelOf(input.max), levelOf(input.rate)];
    for (const level of [min, max]) {
      checkWithin(level, plant, "the plant's own limits", 'tighten it: the actuator cannot do more', refuse);
    }
    checkOrder(min, max, plant, refuse);
    const channel = plant.inputs.find((other) => other.name === name);
    const fastest = channel?.rate ?? Number.POSITIVE_INFINITY;
    if (channel && rate && !(rate.value > 0 && rate.value <= fastest)) {
      const unit = unitName(channel, true);
      const most = Number.isFinite(fastest) ? ` and ≤ ${show(fastest)} ${unit}, the plant's own` : '';
      refuse(rate.spot, `a rate > 0${most}`, `${show(rate.value)} ${unit}`, 'correct the number or its unit');
    }
  }
}

function checkOutputs(
  values: Values,
  plant: Plant,
  levelOf: LevelOf,
  lineOf: StudyDraft['lineOf'],
  refuse: Refuse,
): void {
  const horizon = values.controller?.horizon ?? Number.POSITIVE_INFINITY;
  for (const [name, { min, max, limit, fromStep }] of values.controller?.outputs ?? []) {
    checkOrder(levelOf(min), levelOf(max), plant, refuse);
    const at = (key: string): Spot => ({ key, line: lineOf(key) });
    const key = `controller.outputs.${name}`;
    if (limit === 'hard' && min === null && max === null) {
      refuse(at(`${key}.limit`), 'given with min or max', 'neither', 'add the limit that is hard');
    }
    if (fromStep > horizon) {
      refuse(
        at(`${key}.fromStep`),
        `an integer ≤ the horizon (${horizon})`,
        String(fromStep),
        'impose it earlier',
      );
    }
  }
}

/** Every value that a reference reaches; of a sine its two crests. */
function* referenceLevels(values: Values, levelOf: LevelOf): Generator<Level | null> {
  for (const entries of values.scenario?.references?.values() ?? []) {
    for (const entry of entries) {
      if (entry.name === 'sine') {
        const amplitude = levelOf(entry.values.amplitude);
        const centre = entry.values.centre === null ? 0 : levelOf(entry.values.centre)?.value;
        if (!amplitude || centre === undefined) continue;
        const crests = [centre + amplitude.value, centre - amplitude.value];
        for (const value of crests) yield { value, spot: amplitude.spot };
      } else if (entry.name === 'constant') yield levelOf(entry.values.value);
      else if (entry.name === 'ramp') yield* [levelOf(entry.values.from), levelOf(entry.values.to)];
      else yield* entry.values.values.map(levelOf);
    }
  }
}

import { durationOf } from '../loop/reference.ts';
import type { ReferenceSettings } from '../loop/scenario.ts';
import type { InputChannel, Plant } from '../plant/plant.ts';
import type { ChannelQuantity } from './reader.ts';
import type { Study, StudyOrigin } from './study.ts';
import type { StudyValues } from './table.ts';
import { defaultFamilyValues, INPUT_DEFAULTS } from './table.ts';

type InUnits = (quantity: ChannelQuantity) => number;
type ReferenceEntry =
  StudyValues['scenario']['references'] extends ReadonlyMap<string, readonly (infer T)[]> ? T : never;

/** The study as the stages read it, from values without problems. */
export function assembleStudy(
  values: StudyValues,
  plant: Plant,
  inUnits: InUnits,
  { file, hash, plant: plantPath, seed }: StudyOrigin,
): Study {
  const { sampleTime, coordinates, experiment, predictor, accept } = values;
  const references = [...values.scenario.references].flatMap(([output, entries]) =>
    entries.map((entry) => toReference(output, entry, inUnits)),
  );
  return {
    file,
    hash,
    title: values.title ?? plant.name,
    plant: plantPath,
    seed: seed ?? values.seed,
    sampleTime,
    coordinates,
    experiment,
    lifting: {
      constant: values.lifting.constant,
      parts:
        values.lifting.parts?.map(({ name, values: settings }) => ({
          family: name,
          values: settings as Record<string, number | string>,
        })) ?? defaultParts(plant),
    },
    // The controller's matrices are constant, and so is the predictor's effect of the input.
    predictor: { form: 'linear', ...predictor },
    controller: toController(values.controller, plant, references, inUnits),
    scenario: {
      duration: values.scenario.duration ?? Math.max(200 * sampleTime, longestOf(references)),
      start: mapValues(values.scenario.start, inUnits),
      references,
      delay: values.scenario.delay,
      noise: values.scenario.noise,
      disturbances: [...values.scenario.disturbances].flatMap(([input, entries]) =>
        entries.map(({ value, from }) => ({ input, value: inUnits(value), from })),
      ),
      parameterFactors: mapValues(values.scenario.parameterFactors, (factor) => factor),
    },
    accept,
  };
}

function mapValues<T>(map: ReadonlyMap<string, T>, change: (value: T) => number): Record<string, number> {
  return Object.fromEntries([...map].map(([name, value]) => [name, change(value)]));
}

/** Physics functions where the plant knows them, else the family that served best without such knowledge. */
function defaultParts(plant: Plant): Study['lifting']['parts'] {
  const family = plant.physics?.length ? 'physics' : 'thin-plate';
  return [{ family, values: defaultFamilyValues(family) }];
}

function toReference(output: string, entry: ReferenceEntry, inUnits: InUnits): ReferenceSettings {
  const base = { output, shape: entry.name, time: 0, times: [] };
  switch (entry.name) {
    case 'constant':
      return { ...base, values: [inUnits(entry.values.value)] };
    case 'steps':
      return { ...base, values: entry.values.values.map(inUnits), time: entry.values.hold };
    case 'sine': {
      const centre = entry.values.centre === null ? 0 : inUnits(entry.values.centre);
      return { ...base, values: [centre, inUnits(entry.values.amplitude)], time: entry.values.period };
    }
    case 'ramp':
      return {
        ...base,
        values: [inUnits(entry.values.from), inUnits(entry.values.to)],
        time: entry.values.over,
      };
    case 'points':
      return { ...base, values: entry.values.values.map(inUnits), times: entry.values.times };
  }
}

function toController(
  { inputs, outputs, ...rest }: StudyValues['controller'],
  plant: Plant,
  references: readonly ReferenceSettings[],
  inUnits: InUnits,
): Study['controller'] {
  const tracked = new Set(references.map(({ output }) => output));
  const orElse = (quantity: ChannelQuantity | null | undefined, other: number) =>
    quantity ? inUnits(quantity) : other;
  const { moveWeight, levelWeight } = INPUT_DEFAULTS;
  const perInput = <T>(value: (input: InputChannel) => T): Record<string, T> =>
    Object.fromEntries(plant.inputs.map((input) => [input.name, value(input)]));
  return {
    ...rest,
    track: Object.fromEntries(
      plant.outputs.map(({ name }) => [name, outputs.get(name)?.trackWeight ?? (tracked.has(name) ? 1 : 0)]),
    ),
    move: perInput(({ name }) => inputs.get(name)?.moveWeight ?? moveWeight),
    level: perInput(({ name }) => inputs.get(name)?.levelWeight ?? levelWeight),
    inputLimits: perInput(({ name, min, max }) => ({
      min: orElse(inputs.get(name)?.min, min),
      max: orElse(inputs.get(name)?.max, max),
    })),
    rateLimits: Object.fromEntries(
      plant.inputs.flatMap(({ name, rate }) => {
        const limit = orElse(inputs.get(name)?.rate, rate ?? Number.POSITIVE_INFINITY);
        return Number.isFinite(limit) ? [[name, limit]] : [];
      }),
    ),
    outputLimits: [...outputs].flatMap(([output, { min, max, limit, slackWeight, fromStep }]) =>
      min === null && max === null
        ? []
        : [
            {
              output,
              min: orElse(min, Number.NEGATIVE_INFINITY),
              max: orElse(max, Number.POSITIVE_INFINITY),
              hard: limit === 'hard',
              weight: slackWeight,
              fromStep,
            },
          ],
    ),
  };
}

/** Seconds until the references of the busiest output have run their course; a sine is given two periods. */
function longestOf(references: readonly ReferenceSettings[]): number {
  const perOutput = new Map<string, number>();
  for (const reference of references) {
    const { output } = reference;
    perOutput.set(output, (perOutput.get(output) ?? 0) + durationOf(reference));
  }
  return Math.max(...perOutput.values());
}

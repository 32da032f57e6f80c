import { bindLifting } from './bind.ts';
import { constant } from './constant.ts';
import { findDuplicates } from './duplicates.ts';
import { FAMILIES } from './families.ts';
import type {
  DroppedFunction,
  FamilySetting,
  FamilyValues,
  Lifting,
  LiftingContext,
  LiftingFamily,
  LiftingPart,
  LiftingPartSettings,
  LiftingSettings,
} from './lifting.ts';
import { MOST_FUNCTIONS } from './limits.ts';
import { output } from './output.ts';
import { state } from './state.ts';
import { refuseLifting, UnusableLiftingError } from './unusableLifting.ts';

/** A part with all functions of its family, before duplicates are dropped. */
interface WholePart {
  readonly family: LiftingFamily;
  readonly names: readonly string[];
  readonly constants: LiftingPart['constants'];
}

/**
 * The lifting `psi` of these settings: the state, the constant if it is asked for, outputs that are functions of the state,
 * then the parts in their order. A function that equals an earlier one up to scale and offset on the samples is dropped by
 * name (functions that several others express together are left to the regression to name); the state always stays, and an
 * output stays unless its scaled value equals an earlier one's itself, since it must be read out by a selection.
 *
 * @throws UnusableLiftingError: an unknown family or setting, a value out of its range, more than 2000 functions, too few
 * samples, physics functions that the plant does not offer or that are not finite on the samples.
 */
export function buildLifting(settings: LiftingSettings, context: LiftingContext): Lifting {
  const { nx } = context;
  if (context.samples.length === 0) {
    refuseLifting('lifting', 'built on at least one sample', 0, 'give some trajectories the role of fitting');
  }
  const whole: WholePart[] = [{ family: state, ...state.build({}, context) }];
  if (settings.constant) whole.push({ family: constant, ...constant.build({}, context) });
  if (context.outputs.length > 0) whole.push({ family: output, ...output.build({}, context) });
  for (const [i, part] of settings.parts.entries()) {
    if (part.family !== state.name) whole.push(buildPart(part, context, `lifting.parts[${i + 1}]`));
  }
  const count = whole.reduce((sum, { names }) => sum + names.length, 0);
  if (!(count <= MOST_FUNCTIONS)) {
    refuseLifting('lifting.parts', `of at most ${MOST_FUNCTIONS} functions in all`, count, 'shorten them');
  }
  const named = nameApart(whole);
  const names = named.flatMap((part) => part.names);
  const all = bindLifting(assemble(named, nx, []), context);
  const duplicates = findDuplicates(all, context.samples, nx, (index) => {
    const family = familyAt(named, index);
    return family === output ? 'equal' : family === state || family === constant ? 'never' : 'affine';
  });
  const dropped = duplicates.map(({ index, sameAs }) => ({
    name: names[index],
    sameAs: sameAs >= 0 ? names[sameAs] : settings.constant ? '1' : 'the constant, which is left out',
  }));
  return assemble(named, nx, dropped);
}

function buildPart(part: LiftingPartSettings, context: LiftingContext, key: string): WholePart {
  const family = Object.hasOwn(FAMILIES, part.family) ? FAMILIES[part.family] : undefined;
  if (!family) {
    const must = `one of ${Object.keys(FAMILIES).join(', ')}`;
    return refuseLifting(`${key}.family`, must, part.family, 'write one of them');
  }
  try {
    return { family, ...family.build(completeValues(part.values, family.settings), context) };
  } catch (error) {
    throw error instanceof UnusableLiftingError ? error.within(key) : error;
  }
}

/** The values with defaults for what is missing; each known and within its range. */
function completeValues(given: FamilyValues, settings: readonly FamilySetting[]): FamilyValues {
  for (const key of Object.keys(given)) {
    if (settings.every((setting) => setting.key !== key)) {
      const known = settings.map((setting) => setting.key).join(', ') || 'none';
      refuseLifting(key, `a setting of the family (${known})`, `"${key}"`, 'leave it out');
    }
  }
  return Object.fromEntries(
    settings.map((setting) => {
      const value = given[setting.key] ?? setting.default;
      if (!isWithin(value, setting)) {
        refuseLifting(setting.key, describeSetting(setting), value, 'write such a value');
      }
      return [setting.key, value];
    }),
  );
}

function isWithin(value: number | string, { kind, min, max, choices }: FamilySetting): boolean {
  if (kind === 'choice') return typeof value === 'string' && (choices ?? []).includes(value);
  if (typeof value !== 'number' || (kind === 'integer' && !Number.isInteger(value))) return false;
  return value >= (min ?? Number.NEGATIVE_INFINITY) && value <= (max ?? Number.POSITIVE_INFINITY);
}

function describeSetting({ kind, min, max, choices }: FamilySetting): string {
  if (kind === 'choice') return `one of ${(choices ?? []).join(', ')}`;
  return `${kind === 'integer' ? 'an integer' : 'a number'} from ${min ?? '-inf'} to ${max ?? 'inf'}`;
}

/** Names used once in the whole lifting: a second one tells its family, and if need be the part's place. */
function nameApart(parts: readonly WholePart[]): WholePart[] {
  const taken = new Set<string>();
  return parts.map((part, i) => ({
    ...part,
    names: part.names.map((name) => {
      const candidates = [name, `${name} (${part.family.name})`, `${name} (${part.family.name} ${i + 1})`];
      const free = candidates.find((candidate) => !taken.has(candidate)) ?? `${name} (${taken.size})`;
      taken.add(free);
      return free;
    }),
  }));
}

function familyAt(parts: readonly WholePart[], index: number): LiftingFamily {
  let end = 0;
  for (const { family, names } of parts) {
    end += names.length;
    if (index < end) return family;
  }
  throw new RangeError(`there is no function ${index}`);
}

function assemble(whole: readonly WholePart[], nx: number, dropped: readonly DroppedFunction[]): Lifting {
  const standIns = new Map(dropped.map(({ name, sameAs }) => [name, sameAs]));
  const names = whole.flatMap((part) => part.names.filter((name) => !standIns.has(name)));
  const parts = whole.map((part): LiftingPart => {
    const keep = part.names.flatMap((name, i) => (standIns.has(name) ? [] : [i]));
    // Where each output is read, also one that equals an earlier function.
    const reads = part.names.map((name) => names.indexOf(standIns.get(name) ?? name));
    const constants = part.family === output ? { ...part.constants, reads } : part.constants;
    return { family: part.family.name, names: keep.map((i) => part.names[i]), keep, constants };
  });
  return {
    nx,
    nz: names.length,
    names,
    parts,
    dropped,
    constantIndex: parts.some(({ family }) => family === constant.name) ? nx : -1,
  };
}

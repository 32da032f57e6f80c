import { FAMILIES } from '../lift/families.ts';
import type { FamilySetting, LiftingFamily } from '../lift/lifting.ts';
import { optional } from './fields.ts';
import { type Variant, variants } from './groups.ts';
import { choice, type Field, type Fields, integer, type Kind, number } from './kinds.ts';

/** A family's setting as a row of the table. */
function toField(setting: FamilySetting): Field<unknown> {
  const { kind, min, max, choices, meaning } = setting;
  const of: Kind<number | string> =
    kind === 'choice'
      ? (choice(choices ?? []) as Kind<number | string>)
      : ((kind === 'integer' ? integer : number)({ min, max }) as Kind<number | string>);
  return optional(of, setting.default, meaning.replace(/\.$/, ''));
}

function toVariant({ meaning, settings }: LiftingFamily): Variant {
  const fields: Fields = Object.fromEntries(settings.map((setting) => [setting.key, toField(setting)]));
  return { meaning: meaning.replace(/\.$/, ''), fields };
}

/** One part of the lifting: the rows come from the families themselves. */
export const LIFTING_PART = variants(
  'family',
  Object.fromEntries(Object.values(FAMILIES).map((family) => [family.name, toVariant(family)])),
);

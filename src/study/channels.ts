import type { Channel, Plant } from '../plant/plant.ts';
import type { ChannelName, ChannelQuantity, ChannelRole } from './reader.ts';
import { applyFactor, convertUnit } from './units.ts';

/** The names that a role has in a plant. */
export function namesOf(plant: Plant, role: ChannelRole): string[] {
  if (role === 'parameter') return Object.keys(plant.parameters);
  return channelsOf(plant, role).map(({ name }) => name);
}

function channelsOf(plant: Plant, role: ChannelRole): readonly Channel[] {
  return { input: plant.inputs, output: plant.outputs, state: plant.states, parameter: [] }[role];
}

/** The channel of that role and name, if the plant has it. */
export function findChannel(plant: Plant, { role, name }: ChannelName): Channel | undefined {
  return channelsOf(plant, role).find((channel) => channel.name === name);
}

/** The number in the channel's unit (per second for rates); null if the unit does not fit or the channel is unknown. */
export function convertQuantity(quantity: ChannelQuantity, plant: Plant): number | null {
  const { value, unit, perSecond, spot } = quantity;
  const channel = findChannel(plant, spot.channel);
  if (!channel) return null;
  if (unit === null) return value;
  const conversion = convertUnit(unit, channel.unit, perSecond);
  if (typeof conversion !== 'object') return null;
  const converted = applyFactor(value, conversion.factor);
  return Number.isFinite(converted) ? converted : null;
}

/** The unit in which a bare number for this channel is read. */
export function unitName({ unit }: Channel, perSecond: boolean): string {
  if (unit === '1') return perSecond ? '1/s' : '1 (a pure number)';
  return perSecond ? `${unit}/s` : unit;
}

import type { AxisSpec } from '../spec.ts';

/** Room between two panels, as a share of a panel of weight 1. */
const GAP = 0.1;

/**
 * Axes that stand above one another over one time axis, the first on top, with room between them. The drawing library
 * stacks from the bottom, hence the reversal.
 */
export function stackPanels(panels: Readonly<Record<string, AxisSpec>>): Record<string, AxisSpec> {
  const gap: AxisSpec = {
    type: 'linear',
    position: 'left',
    min: 0,
    max: 1,
    title: '',
    weight: GAP,
    gap: true,
  };
  const ids = Object.keys(panels).reverse();
  return Object.fromEntries(
    ids.flatMap((id, i) => [
      ...(i > 0 ? [[`gap${i}`, gap] as const] : []),
      [id, { ...panels[id], weight: panels[id].weight ?? 1 }] as const,
    ]),
  );
}

/** The time axis of a run that takes `end` seconds. */
export function timeAxis(end: number): AxisSpec {
  return {
    type: 'linear',
    position: 'bottom',
    min: 0,
    max: Number(end.toPrecision(6)) || 1,
    title: 'time, s',
  };
}

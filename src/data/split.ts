import type { Random } from '../numerics/random.ts';
import type { Role } from './dataset.ts';

/** An order of 0 … n − 1 drawn uniformly (R. Fisher, F. Yates, 1938; D. Knuth, TAOCP 2, algorithm P). */
export function shuffledIndices(n: number, random: Random): number[] {
  const order = Array.from({ length: n }, (_, i) => i);
  for (let i = n - 1; i > 0; i--) {
    const j = Math.floor(random() * (i + 1));
    [order[i], order[j]] = [order[j], order[i]];
  }
  return order;
}

/**
 * Deals whole trajectories to the roles by shares, at random: `round(fitShare · n)` to fit, `round(chooseShare · n)` to
 * choose, the rest held out. With three trajectories or more every role gets at least one, taken from the largest.
 *
 * @returns one role for each of the `n` trajectories. With fewer than three, some role is left empty.
 */
export function dealRoles(n: number, fitShare: number, chooseShare: number, random: Random): Role[] {
  const counts = {
    fit: Math.min(n, Math.round(fitShare * n)),
    choose: 0,
    'held-out': 0,
  };
  counts.choose = Math.min(n - counts.fit, Math.round(chooseShare * n));
  counts['held-out'] = n - counts.fit - counts.choose;
  const roles: readonly Role[] = ['fit', 'choose', 'held-out'];
  for (const role of roles) {
    const largest = roles.reduce((a, b) => (counts[b] > counts[a] ? b : a));
    if (counts[role] === 0 && counts[largest] > 1) {
      counts[role]++;
      counts[largest]--;
    }
  }
  const dealt: Role[] = new Array(n);
  const order = shuffledIndices(n, random);
  let next = 0;
  for (const role of roles) for (let i = 0; i < counts[role]; i++) dealt[order[next++]] = role;
  return dealt;
}

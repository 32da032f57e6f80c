// Shared by the benches: warm-up, counted runs in turn, minimum, median and maximum, and the machine's own line.
import { arch, cpus, platform } from 'node:os';

/** True when only the machinery is to be tried, at tiny sizes. */
export const smoke = process.argv.includes('--smoke');

/** @param {string} title */
export function heading(title) {
  console.log(
    `\n${title}\nNode ${process.version}, ${platform()} ${arch()}, ${cpus().length} × ${cpus()[0].model.trim()}`,
  );
}

/** @param {number[]} values @param {number} q */
export function quantile(values, q) {
  const sorted = [...values].sort((a, b) => a - b);
  return sorted[Math.min(sorted.length - 1, Math.floor(q * sorted.length))];
}

let sink = 0;

/**
 * Times each function `runs` times, in turn (A B A B …) so that a drift of the machine's speed hits all alike.
 * What a function returns is kept, so that no work can be optimised away.
 * @param {Record<string, () => unknown>} functions
 * @returns {Record<string, number[]>} seconds, one entry a run
 */
export function timeInTurn(functions, runs = smoke ? 2 : 11, warmUp = smoke ? 1 : 3) {
  /** @type {Record<string, number[]>} */
  const times = Object.fromEntries(Object.keys(functions).map((name) => [name, []]));
  for (let run = -warmUp; run < runs; run++) {
    for (const [name, f] of Object.entries(functions)) {
      const start = process.hrtime.bigint();
      const value = f();
      const seconds = Number(process.hrtime.bigint() - start) * 1e-9;
      sink += Number(value) || 0;
      if (run >= 0) times[name].push(seconds);
    }
  }
  return times;
}

process.on('exit', () => {
  if (Number.isNaN(sink)) console.log('a benched function returned NaN');
});

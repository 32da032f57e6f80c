import type { Problem } from './problem.ts';
import type { Spot } from './reader.ts';
import type { StudyValues } from './table.ts';

type Fault = Pick<Problem, 'must' | 'got' | 'wayOut'>;

/** Where keys depend on each other. */
interface Rule {
  /** The key that is to blame. */
  readonly key: string;
  /** The numbers that the rule compares; without one of them it says nothing. */
  readonly needs: readonly string[];
  /** What is wrong, or null. Written so that NaN is wrong. */
  readonly check: (...numbers: number[]) => Fault | null;
}

/** More numbers than these would not fit the memory of an ordinary machine, or an ordinary patience. */
const MOST_SAMPLES = 5_000_000;
const MOST_LOOP_STEPS = 1_000_000;
/** Durations are rounded to whole samples: relative slack for `0.3 / 0.01 = 29.999…`. */
const ROUNDING = 1e-9;

const show = (value: number) => String(Number(value.toPrecision(6)));
const samples = (time: number, sampleTime: number) => (time / sampleTime) * (1 + ROUNDING);

/** What single numbers of a study must be to each other. */
const RULES: readonly Rule[] = [
  {
    key: 'experiment.duration',
    needs: ['experiment.duration', 'sampleTime', 'controller.horizon'],
    check: (duration, sampleTime, horizon) => {
      const least = Math.max(10, horizon + 1);
      if (samples(duration, sampleTime) >= least) return null;
      return {
        must: `a time of at least ${least} samples (${show(least * sampleTime)} s), so that errors can be seen over the horizon`,
        got: `${show(duration)} s`,
        wayOut: 'lengthen the trajectories or shorten the horizon',
      };
    },
  },
  {
    key: 'experiment.trajectories',
    needs: ['experiment.trajectories', 'experiment.duration', 'sampleTime'],
    check: (trajectories, duration, sampleTime) => {
      const count = (trajectories * duration) / sampleTime;
      if (count <= MOST_SAMPLES) return null;
      return {
        must: `so many that all trajectories together have at most ${MOST_SAMPLES} samples`,
        got: `${trajectories} of ${show(duration / sampleTime)} samples`,
        wayOut: 'take fewer or shorter trajectories',
      };
    },
  },
  {
    key: 'experiment.hold',
    needs: ['experiment.hold', 'sampleTime'],
    check: (hold, sampleTime) =>
      samples(hold, sampleTime) >= 1
        ? null
        : {
            must: `a time of at least one sample (${show(sampleTime)} s)`,
            got: `${show(hold)} s`,
            wayOut: 'hold the input for a sample or longer',
          },
  },
  {
    key: 'experiment.highest',
    needs: ['experiment.highest', 'sampleTime'],
    check: (highest, sampleTime) =>
      highest * sampleTime <= 0.5 * (1 + ROUNDING)
        ? null
        : {
            must: `a frequency ≤ ${show(0.5 / sampleTime)} Hz, half the sample rate`,
            got: `${show(highest)} Hz`,
            wayOut: 'lower it or shorten the sample time',
          },
  },
  {
    key: 'experiment.startRegion',
    needs: ['experiment.startRegion', 'experiment.cutAt'],
    check: (startRegion, cutAt) =>
      startRegion <= cutAt
        ? null
        : {
            must: `a number ≤ cutAt (${show(cutAt)})`,
            got: show(startRegion),
            wayOut: 'raise cutAt, or every trajectory may be cut at once',
          },
  },
  {
    key: 'experiment.chooseShare',
    needs: ['experiment.fitShare', 'experiment.chooseShare'],
    check: (fit, choose) =>
      fit + choose < 1 - ROUNDING
        ? null
        : {
            must: `a share that leaves something to hold out beside fitShare (${show(fit)})`,
            got: show(choose),
            wayOut: 'lower one of the two so that their sum is below 1',
          },
  },
  {
    key: 'scenario.duration',
    needs: ['scenario.duration', 'sampleTime'],
    check: (duration, sampleTime) => {
      const count = samples(duration, sampleTime);
      if (count >= 1 && count <= MOST_LOOP_STEPS) return null;
      return {
        must: `a time of 1 to ${MOST_LOOP_STEPS} samples (${show(sampleTime)} s each)`,
        got: `${show(duration)} s`,
        wayOut: 'change it or the sample time',
      };
    },
  },
];

/** All that is wrong in how keys of the file depend on each other; silent about values that are missing. */
export function checkRules(
  values: Partial<StudyValues>,
  file: string,
  lineOf: (key: string) => number,
): Problem[] {
  const numberAt = (path: string) => {
    const value = path
      .split('.')
      .reduce<unknown>((at, key) => (at as Record<string, unknown> | undefined)?.[key], values);
    return typeof value === 'number' ? value : undefined;
  };
  const problems: Problem[] = RULES.flatMap(({ key, needs, check }) => {
    const numbers = needs.map(numberAt);
    if (numbers.includes(undefined)) return [];
    const fault = check(...(numbers as number[]));
    return fault ? [{ file, line: lineOf(key), key, ...fault }] : [];
  });
  const refuse = (key: string, line: number, fault: Fault) => problems.push({ file, line, key, ...fault });
  checkBlocks(values, (fault) => refuse('controller.blocks', lineOf('controller.blocks'), fault));
  checkReferences(values, ({ key, line }, below, fault) => refuse(`${key}.${below}`, line, fault));
  return problems;
}

function checkBlocks({ controller }: Partial<StudyValues>, refuse: (fault: Fault) => void): void {
  const total = controller?.blocks?.reduce((sum, length) => sum + length, 0);
  if (controller?.horizon === undefined || total === undefined || total <= controller.horizon) return;
  refuse({
    must: `lengths whose sum is ≤ the horizon (${controller.horizon})`,
    got: `a sum of ${total}`,
    wayOut: 'shorten the blocks or lengthen the horizon',
  });
}

function checkReferences(
  { scenario, sampleTime }: Partial<StudyValues>,
  refuse: (spot: Spot, below: string, fault: Fault) => void,
): void {
  for (const entries of scenario?.references?.values() ?? []) {
    const endless = entries.slice(0, -1).find(({ name }) => name === 'constant');
    if (!endless) continue;
    const wayOut = 'put it last, or write steps with one value and a hold';
    refuse(endless.spot, 'shape', { must: 'one that ends, where another follows', got: 'constant', wayOut });
  }
  for (const entry of [...(scenario?.references?.values() ?? [])].flat()) {
    const tooShort = (time: number, least: number) =>
      sampleTime !== undefined && !(samples(time, sampleTime) >= least);
    const atLeast = (time: number, least: number): Fault => ({
      must: `a time of at least ${least === 1 ? 'one sample' : `${least} samples`} (${show(least * (sampleTime ?? 0))} s)`,
      got: `${show(time)} s`,
      wayOut: 'lengthen it or shorten the sample time',
    });
    if (entry.name === 'steps' && tooShort(entry.values.hold, 1)) {
      refuse(entry.spot, 'hold', atLeast(entry.values.hold, 1));
    }
    if (entry.name === 'sine' && tooShort(entry.values.period, 2)) {
      refuse(entry.spot, 'period', atLeast(entry.values.period, 2));
    }
    if (entry.name !== 'points') continue;
    const { times, values } = entry.values;
    if (values.length !== times.length) {
      const must = `a list as long as times (${times.length})`;
      refuse(entry.spot, 'values', {
        must,
        got: `${values.length} entries`,
        wayOut: 'give one value a time',
      });
    }
    const fall = times.findIndex((time, i) => i > 0 && !(time > times[i - 1]));
    if (fall > 0) {
      const got = `${show(times[fall])} s after ${show(times[fall - 1])} s`;
      refuse(entry.spot, 'times', { must: 'ascending', got, wayOut: 'put the points in order of time' });
    }
  }
}

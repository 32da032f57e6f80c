import { describe, expect, it } from 'vitest';
import { judge } from '../../src/commands/loops.ts';
import type { LoopRun } from '../../src/findings/studyResult.ts';
import type { Study } from '../../src/study/study.ts';
import { valve } from '../study/exampleStudy.ts';

const accept = { worstExcess: 0.05, offset: 0.01, trackingRms: 0.1, settling: 0.5 };

/** A run on the valve, whose position ranges over 0.02 m. */
function run(over: {
  diverged?: boolean;
  worst?: number;
  rms?: number;
  settling?: number | null;
  offset?: number | null;
}): LoopRun {
  const { diverged = false, worst = 0.04, rms = 0.001, settling = 0.3, offset = -1e-4 } = over;
  const tracking = { output: 'position', unit: 'm', rms, settling, offset, referenceSteps: 2 };
  return {
    name: 'lifted',
    record: { diverged },
    report: { limits: [{ worstOfRange: 0.01 }, { worstOfRange: worst }], tracking: [tracking] },
  } as unknown as LoopRun;
}

const verdicts = (lifted: LoopRun, limits = accept) =>
  judge({ study: { accept: limits } as Study, plant: valve }, lifted).map(({ met }) => met);

describe('acceptance limits', () => {
  it('each is held against the worst of the run, as a share of the range of its channel (worked by hand)', () => {
    expect(judge({ study: { accept } as Study, plant: valve }, run({}))).toEqual([
      { name: 'worst excess over a limit', limit: 0.05, reached: 0.04, unit: '1', met: true },
      { name: 'offset left', limit: 0.01, reached: 0.005, unit: '1', met: true },
      { name: 'rms tracking error', limit: 0.1, reached: 0.05, unit: '1', met: true },
      { name: 'settling time', limit: 0.5, reached: 0.3, unit: 's', met: true },
    ]);
  });

  it('a limit that is passed is missed, one reached exactly is met', () => {
    expect(verdicts(run({ worst: 0.05, rms: 0.0021 }))).toEqual([true, true, false, true]);
  });

  it('an output that never settles misses any settling time', () => {
    expect(verdicts(run({ settling: null }))).toEqual([true, true, true, false]);
  });

  it('a run that diverged or is not a number meets nothing that it is asked for', () => {
    expect(verdicts(run({ diverged: true }))).toEqual([false, false, false, false]);
    expect(verdicts(run({ worst: Number.NaN, rms: Number.NaN }))).toEqual([false, true, false, true]);
  });

  it('what is not asked for is not judged', () => {
    const none = { worstExcess: null, offset: null, trackingRms: null, settling: null } as never;
    expect(verdicts(run({}), none)).toEqual([]);
  });
});

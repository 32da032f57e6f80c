import { describe, expect, it } from 'vitest';
import type { CondensedQp } from '../../src/mpc/problem.ts';
import { createWarmStart } from '../../src/mpc/warmStart.ts';
import type { QpSolver } from '../../src/qp/qp.ts';

/** Three stages of one input limit. */
const qp = {
  m: 3,
  rows: [0, 1, 2].map((step) => ({ kind: 'input', channel: 0, step })),
} as unknown as CondensedQp;

function withSpy() {
  const given: number[][] = [];
  const solver = { setWorkingSet: (set: Int8Array) => given.push(Array.from(set)) } as unknown as QpSolver;
  return { given, warm: createWarmStart(qp, solver) };
}

describe('the warm start', () => {
  it('keeps the working set while nothing moves', () => {
    const { given, warm } = withSpy();
    for (let k = 0; k < 3; k++) {
      warm.prepare();
      warm.learn(Int8Array.of(1, 0, 0));
    }
    warm.prepare();
    expect(given.at(-1)).toEqual([1, 0, 0]);
  });

  it('shifts it by one stage once the limits are seen to move towards the present', () => {
    const { given, warm } = withSpy();
    for (const set of [
      [0, 0, 1],
      [0, 1, 0],
    ]) {
      warm.prepare();
      warm.learn(Int8Array.from(set));
    }
    warm.prepare();
    expect(given.at(-1)).toEqual([1, 0, 0]);
  });

  it('is cold after reset', () => {
    const { given, warm } = withSpy();
    warm.prepare();
    warm.learn(Int8Array.of(1, 1, 1));
    warm.reset();
    warm.prepare();
    expect(given.at(-1)).toEqual([0, 0, 0]);
  });
});

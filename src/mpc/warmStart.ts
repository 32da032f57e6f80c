import type { QpSolver } from '../qp/qp.ts';
import type { CondensedQp } from './problem.ts';

/** Chooses the working set from which the next solve starts. */
export interface WarmStart {
  /** Hands the solver its start, from the working set of the solve before. */
  readonly prepare: () => void;
  /** Looks at the working set that the solve ended with. */
  readonly learn: (workingSet: Int8Array) => void;
  readonly reset: () => void;
}

/**
 * The last working set, as it was or shifted by one stage: whichever would have been nearer to the truth at the step
 * before. On a transient the limits move towards the present with each sample; at rest they stay where they are.
 */
export function createWarmStart(qp: CondensedQp, solver: QpSolver): WarmStart {
  const { m } = qp;
  const from = nextStageRows(qp);
  const last = new Int8Array(m);
  const shifted = new Int8Array(m);
  let shiftPays = false;
  const shiftInto = () => {
    for (let i = 0; i < m; i++) shifted[i] = last[from[i]];
  };
  return {
    prepare() {
      shiftInto();
      solver.setWorkingSet(shiftPays ? shifted : last);
    },
    learn(workingSet) {
      let missesKept = 0;
      let missesShifted = 0;
      for (let i = 0; i < m; i++) {
        if (workingSet[i] !== last[i]) missesKept++;
        if (workingSet[i] !== shifted[i]) missesShifted++;
      }
      shiftPays = missesShifted < missesKept;
      last.set(workingSet);
    },
    reset() {
      last.fill(0);
      shiftPays = false;
    },
  };
}

/** For each row the row of the same limit one stage later, or itself at the end of the horizon. */
function nextStageRows({ rows }: CondensedQp): Int32Array {
  const at = new Map<string, number>();
  const key = (kind: string, channel: number, step: number) => `${kind} ${channel} ${step}`;
  rows.forEach(({ kind, channel, step }, i) => {
    at.set(key(kind, channel, step), i);
  });
  return Int32Array.from(rows, ({ kind, channel, step }, i) => at.get(key(kind, channel, step + 1)) ?? i);
}

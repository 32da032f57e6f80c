import type { Trajectory } from '../../src/data/dataset.ts';
import type { StudyResult } from '../../src/findings/studyResult.ts';
import type { EffortReport, LimitReport, LoopRecord, TrackingReport } from '../../src/loop/record.ts';

export type Change = (result: StudyResult) => StudyResult;
export type Part<K extends keyof StudyResult> = Partial<StudyResult[K]>;

export const within =
  <K extends keyof StudyResult>(key: K, part: Part<K>): Change =>
  (result) => ({ ...result, [key]: { ...(result[key] as object), ...part } });
export const fitted = (part: Partial<StudyResult['predictor']['fit']>): Change => {
  return (result) => ({
    ...result,
    predictor: { ...result.predictor, fit: { ...result.predictor.fit, ...part } },
  });
};
export const qp = (part: Partial<StudyResult['design']['qp']>): Change => {
  return (result) => ({ ...result, design: { ...result.design, qp: { ...result.design.qp, ...part } } });
};
export const problem = (part: Partial<StudyResult['design']['problem']>): Change => {
  return (result) => ({
    ...result,
    design: { ...result.design, problem: { ...result.design.problem, ...part } },
  });
};
export const notes = (part: Partial<StudyResult['design']['notes']>): Change => {
  return (result) => ({
    ...result,
    design: { ...result.design, notes: { ...result.design.notes, ...part } },
  });
};
export const runAt = (index: number, change: (run: StudyResult['runs'][number]) => object): Change => {
  return (result) => ({
    ...result,
    runs: result.runs.map((run, i) => (i === index ? { ...run, ...change(run) } : run)),
  });
};
export const record = (part: Partial<LoopRecord>, index = 0) =>
  runAt(index, (run) => ({ record: { ...run.record, ...part } }));
export const cost = (total: number, index = 0) =>
  runAt(index, (run) => ({ record: { ...run.record, cost: { ...run.record.cost, total } } }));
export const limit = (index: number, part: Partial<LimitReport>) =>
  runAt(0, ({ report }) => ({
    report: { ...report, limits: report.limits.map((row, i) => (i === index ? { ...row, ...part } : row)) },
  }));
export const effort = (part: Partial<EffortReport>) =>
  runAt(0, ({ report }) => ({ report: { ...report, effort: [{ ...report.effort[0], ...part }] } }));
export const tracking = (part: Partial<TrackingReport>) =>
  runAt(0, ({ report }) => ({ report: { ...report, tracking: [{ ...report.tracking[0], ...part }] } }));
export const solves = (notOptimal: number, part: Partial<LoopRecord> = {}) =>
  runAt(0, (run) => ({
    record: { ...run.record, ...part },
    report: { ...run.report, notOptimal },
  }));
export const all = (...changes: Change[]): Change => {
  return (result) => changes.reduce((made, change) => change(made), result);
};
export const terminal = problem({ terminal: 'riccati' });
export const radiusFor = (growth: number) => within('spectrum', { radius: growth ** (1 / 8) });

/** One fitting trajectory whose states and inputs are the given ones. */
export function data(x: (k: number) => number[], u: (k: number) => number, steps = 400): Change {
  const trajectory: Trajectory = {
    role: 'fit',
    steps,
    x: Float64Array.from(Array.from({ length: steps + 1 }, (_, k) => x(k)).flat()),
    u: Float64Array.from({ length: steps }, (_, k) => u(k)),
  };
  return within('dataset', { trajectories: [trajectory] });
}
// Rough values that any generator would do for: the fractional part of k times the golden ratio (its square, …).
export const rough = (k: number) => 2 * ((k * k * 0.6180339887498949) % 1) - 1;
/** Angle over a share of its range from its lower end, speed over all of its range. */
export const states = (share: number) => (k: number) => [
  -1 + 2.5 * share * ((k % 101) / 101),
  4 * Math.sin(k / 3) ** 2 * (k % 2 ? 1 : -1),
];
export const infeasible = (count: number, fallback: 'shifted-plan' | 'held'): Partial<LoopRecord> => ({
  status: Array.from({ length: 40 }, (_, k) => (k < count ? 'infeasible' : 'optimal')),
  fallback: Array.from({ length: 40 }, (_, k) => (k < count ? fallback : 'none')),
});
export const cuts = (diverged: number, leftRange: number) =>
  within('dataset', { cuts: { diverged, leftRange } });

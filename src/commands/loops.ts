import { describeRegion, outsideRegion } from '../data/region.ts';
import type { AcceptanceRow, LoopRun } from '../findings/studyResult.ts';
import { assessLoop } from '../loop/assess.ts';
import { simulateLoop } from '../loop/simulate.ts';
import type { Controller } from '../mpc/controller.ts';
import { createController } from '../mpc/online.ts';
import type { ControllerDesign } from '../mpc/problem.ts';
import type { Predictor } from '../predictor/predictor.ts';
import { createExactSolver } from '../qp/exact.ts';
import type { Study } from '../study/study.ts';
import { NumericalStop } from './numericalStop.ts';
import type { OpenStudy } from './openStudy.ts';
import { bindPredictor, designFor, liftedCoordinates, stopping } from './pipeline.ts';
import type { StageContents } from './stageFiles.ts';

/** The loops' records, and how long each decision of each of them took, which belongs in no record. */
export interface Loops {
  readonly contents: StageContents['simulate'];
  /** Milliseconds, by the name of the run. */
  readonly solveTimes: ReadonlyMap<string, readonly number[]>;
}

/**
 * The closed loop on the true plant under the lifted controller and under the same controller on its rivals' predictors:
 * same weights, limits, scenario and noise, all judged by the problem of the lifted one.
 */
export function makeLoops(
  open: OpenStudy,
  { dataset, substeps }: StageContents['experiment'],
  fitted: StageContents['fit'],
  { design }: StageContents['design'],
  onShare: (share: number) => void,
): Loops {
  const { study, plant } = open;
  const region = describeRegion(liftedCoordinates(open, dataset));
  const planned = [prepare(open, 'lifted', design), ...prepareRivals(open, fitted)];
  const solveTimes = new Map<string, readonly number[]>();
  const runs = planned.map(({ name, predictor, controller }, i): LoopRun => {
    const outcome = simulateLoop({
      name,
      plant,
      controller,
      outputsSeen: predictor.outputs.map((output) => output.name),
      problem: design.problem,
      scenario: study.scenario,
      coordinates: study.coordinates,
      substeps: substeps.count,
      seed: study.seed,
      isOutside: (x) => outsideRegion(region, x),
      onProgress: (done, steps) => onShare((i + done / steps) / planned.length),
      clock: () => performance.now(),
    });
    solveTimes.set(name, outcome.solveTimes);
    return { name, record: outcome.record, report: assessLoop(outcome.record, design.problem, plant) };
  });
  return { contents: { runs, acceptance: judge(open, runs[0]) }, solveTimes };
}

interface PreparedLoop {
  readonly name: LoopRun['name'];
  readonly predictor: Predictor;
  readonly controller: Controller;
}

/** @throws NumericalStop when the quadratic program is not strictly convex. */
function prepare(open: OpenStudy, name: LoopRun['name'], design: ControllerDesign): PreparedLoop {
  const { predictor } = design.problem;
  const solver = stopping(open, () => createExactSolver(design.qp));
  const controller = createController(
    design,
    bindPredictor(open, predictor),
    solver,
    open.plant.operatingPoint.u,
  );
  return { name, predictor, controller };
}

/** The rivals that read out what the study tracks and whose predictors make a controller at all; the others are left out. */
function prepareRivals(open: OpenStudy, { plainLinear, linearised }: StageContents['fit']): PreparedLoop[] {
  const rivals: readonly (readonly [LoopRun['name'], Predictor | null])[] = [
    ['plain-linear', plainLinear],
    ['linearised', linearised],
  ];
  return rivals.flatMap(([name, predictor]) => {
    if (!predictor || !canTrack(predictor, open.study)) return [];
    try {
      return [prepare(open, name, designFor(open, predictor))];
    } catch (error) {
      if (error instanceof NumericalStop) return [];
      throw error;
    }
  });
}

/** Can a controller on this predictor track everything that the study tracks? */
function canTrack({ outputs }: Predictor, { controller }: Study): boolean {
  return Object.entries(controller.track).every(
    ([name, weight]) => weight === 0 || outputs.some((output) => output.name === name),
  );
}

/** The acceptance limits that the study asks for, each against the worst that the lifted run reached. */
export function judge(
  { study, plant }: Pick<OpenStudy, 'study' | 'plant'>,
  { record, report }: LoopRun,
): AcceptanceRow[] {
  const { worstExcess, offset, trackingRms, settling } = study.accept;
  const rangeOf = (name: string) => {
    const { min, max } = plant.outputs.find((output) => output.name === name) ?? { min: 0, max: 1 };
    return max - min;
  };
  const worst = (values: readonly number[]) => Math.max(0, ...values);
  const tracked = report.tracking;
  // An output that never settles, or of which no offset can be told although it has steps, does not pass.
  const settlings = tracked.map((row) =>
    row.referenceSteps > 0 ? (row.settling ?? Number.POSITIVE_INFINITY) : 0,
  );
  const offsets = tracked.map((row) => Math.abs(row.offset ?? 0) / rangeOf(row.output));
  const rows: readonly (readonly [name: string, limit: number | null, reached: number, unit: string])[] = [
    ['worst excess over a limit', worstExcess, worst(report.limits.map((row) => row.worstOfRange)), '1'],
    ['offset left', offset, worst(offsets), '1'],
    ['rms tracking error', trackingRms, worst(tracked.map((row) => row.rms / rangeOf(row.output))), '1'],
    ['settling time', settling, worst(settlings), 's'],
  ];
  return rows.flatMap(([name, limit, reached, unit]) => {
    if (limit === null) return [];
    // A run that diverged meets nothing; written so that NaN fails.
    return [{ name, limit, reached, unit, met: !record.diverged && reached <= limit }];
  });
}

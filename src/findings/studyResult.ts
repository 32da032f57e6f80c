import type { Dataset } from '../data/dataset.ts';
import type { LoopRecord, LoopReport } from '../loop/record.ts';
import type { ScenarioSettings } from '../loop/scenario.ts';
import type { ControllerDesign } from '../mpc/problem.ts';
import type { Plant } from '../plant/plant.ts';
import type { Predictor } from '../predictor/predictor.ts';
import type { Spectrum, TrustCurve } from '../predictor/trust.ts';

/** One controller's closed loop under the study's scenario. */
export interface LoopRun {
  /** `lifted` is the study's own controller; the rivals have the same weights, limits and scenario. */
  readonly name: 'lifted' | 'plain-linear' | 'linearised';
  readonly record: LoopRecord;
  readonly report: LoopReport;
}

/** One acceptance limit of the study and what was reached. */
export interface AcceptanceRow {
  readonly name: string;
  readonly limit: number;
  readonly reached: number;
  readonly unit: string;
  readonly met: boolean;
}

/** The records of all stages of one study, as findings, export and report read them. */
export interface StudyResult {
  readonly title: string;
  /** SHA-256 of the study file's text and of the dataset's numbers, hexadecimal. */
  readonly studyHash: string;
  readonly dataHash: string;
  readonly seed: number;
  readonly plant: Plant;
  readonly sampleTime: number;
  /** RK4 sub-steps in one sample and the error that halving them would remove, relative to the state ranges. */
  readonly substeps: { readonly count: number; readonly error: number };
  readonly dataset: Dataset;
  readonly predictor: Predictor;
  readonly trust: TrustCurve;
  readonly spectrum: Spectrum;
  readonly design: ControllerDesign;
  /** What the runs went through. */
  readonly scenario: ScenarioSettings;
  /** The lifted run first. */
  readonly runs: readonly LoopRun[];
  readonly acceptance: readonly AcceptanceRow[];
}

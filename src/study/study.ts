import type { CoordinateSettings } from '../data/coordinates.ts';
import type { ExperimentSettings } from '../data/experiment.ts';
import type { LiftingSettings } from '../lift/lifting.ts';
import type { ScenarioSettings } from '../loop/scenario.ts';
import type { ControllerSettings } from '../mpc/settings.ts';
import type { PredictorSettings } from '../predictor/predictor.ts';

/**
 * A study as the program uses it: every key present, defaults filled in, SI units. Made from one YAML file by the
 * table in `table.ts`. Names of channels are checked against the plant when the plant is loaded.
 */
export interface Study {
  /** Absolute path of the file and its SHA-256. */
  readonly file: string;
  readonly hash: string;
  readonly title: string;
  /** Absolute path of the plant module. */
  readonly plant: string;
  readonly seed: number;
  /** Seconds. */
  readonly sampleTime: number;
  readonly coordinates: CoordinateSettings;
  readonly experiment: ExperimentSettings;
  readonly lifting: LiftingSettings;
  readonly predictor: PredictorSettings;
  readonly controller: ControllerSettings;
  readonly scenario: ScenarioSettings;
  readonly accept: AcceptSettings;
}

/** Acceptance limits: null = not asked for. */
export interface AcceptSettings {
  /** Worst excess of any limit, share of the range. */
  readonly worstExcess: number | null;
  /** Remaining offset of any output, share of the range. */
  readonly offset: number | null;
  /** RMS tracking error of any output, share of the range. */
  readonly trackingRms: number | null;
  /** Seconds. */
  readonly settling: number | null;
}

/** Where a study comes from: what the text itself does not say. */
export interface StudyOrigin {
  /** Absolute path of the study file, and the SHA-256 of its text. */
  readonly file: string;
  readonly hash: string;
  /** Absolute path of the plant module. */
  readonly plant: string;
  /** Replaces the study's own seed. */
  readonly seed?: number;
}

import { toCoordinates } from '../data/coordinates.ts';
import type { Dataset } from '../data/dataset.ts';
import { datasetProblem } from '../data/datasetProblem.ts';
import { runExperiment } from '../data/experiment.ts';
import { makeScaling } from '../data/scaling.ts';
import { bindLifting } from '../lift/bind.ts';
import { createEvaluationContext, createLiftingContext } from '../lift/context.ts';
import { buildLifting } from '../lift/join.ts';
import type { BoundLifting } from '../lift/lifting.ts';
import { readoutIndices } from '../lift/readout.ts';
import { UnusableLiftingError } from '../lift/unusableLifting.ts';
import { designController } from '../mpc/design.ts';
import { poseProblem } from '../mpc/pose.ts';
import type { ControllerDesign } from '../mpc/problem.ts';
import { createRandom, deriveSeed } from '../numerics/random.ts';
import { chooseSubsteps } from '../plant/substeps.ts';
import { assessTrust } from '../predictor/assessTrust.ts';
import { fitPredictor } from '../predictor/fit.ts';
import type { Predictor } from '../predictor/predictor.ts';
import { fitPlainLinear, linearisePredictor } from '../predictor/rivals.ts';
import { computeSpectrum } from '../predictor/spectrum.ts';
import { UnusableDataError } from '../predictor/unusableData.ts';
import { UnusableQpError } from '../qp/unusableQp.ts';
import { InputError } from './inputError.ts';
import { NumericalStop } from './numericalStop.ts';
import type { OpenStudy } from './openStudy.ts';
import type { StageContents } from './stageFiles.ts';

type OnShare = (share: number) => void;

/** The plant excited along many trajectories. @throws NumericalStop when they leave nothing to learn from. */
export function makeExperiment({ study, plant }: OpenStudy, onShare: OnShare): StageContents['experiment'] {
  const { seed, sampleTime } = study;
  const substeps = chooseSubsteps(plant, sampleTime, createRandom(deriveSeed(seed, 'substeps')));
  const dataset = runExperiment(plant, study.experiment, {
    sampleTime,
    substeps: substeps.count,
    seed,
    onProgress: (done, planned) => onShare(done / planned),
  });
  const problem = datasetProblem(dataset);
  if (problem) {
    const { key, must, got, wayOut } = problem;
    throw new NumericalStop(`${key}: must be ${must}, got ${got}; ${wayOut}`);
  }
  return { substeps, dataset };
}

/** The coordinates that are lifted: those of the experiment, or present and past outputs and inputs. */
export function liftedCoordinates({ study, plant }: OpenStudy, dataset: Dataset): Dataset {
  return toCoordinates(dataset, plant, study.coordinates);
}

/** A predictor's lifting, ready to be evaluated. */
export function bindPredictor({ study, plant }: OpenStudy, predictor: Predictor): BoundLifting {
  const { read } = study.coordinates;
  return bindLifting(predictor.lifting, createEvaluationContext(plant, read, predictor.scaling.x));
}

/** For each output the index of the coordinate that it is; −1 for a function of the state. */
function outputCoordinates({ study, plant }: OpenStudy): number[] {
  if (study.coordinates.read === 'delays') return plant.outputs.map((_, i) => i);
  return plant.outputs.map(({ of }) =>
    typeof of === 'string' ? plant.states.findIndex(({ name }) => name === of) : -1,
  );
}

/**
 * The lifted predictor and its rivals, fitted to the same data with the same scaling. A rival reads out the outputs that
 * are coordinates; the linearisation needs the state.
 *
 * @throws InputError for a lifting that the plant or the data cannot serve. @throws NumericalStop for unusable data.
 */
export function makeFit(
  open: OpenStudy,
  { dataset: experiment }: StageContents['experiment'],
  onShare: OnShare,
): StageContents['fit'] {
  const { study, plant } = open;
  const { read } = study.coordinates;
  return stopping(open, () => {
    const dataset = liftedCoordinates(open, experiment);
    const scaling = makeScaling(dataset, plant, read);
    const random = createRandom(deriveSeed(study.seed, 'lifting'));
    const context = createLiftingContext({ dataset, plant, read, scaling: scaling.x, random });
    const lifting = buildLifting(study.lifting, context);
    const outputs = plant.outputs.map(({ name, unit, min, max }) => ({ name, unit, min, max }));
    const predictor = fitPredictor({
      dataset,
      lifting,
      bound: bindLifting(lifting, context),
      scaling,
      outputs,
      readout: readoutIndices(lifting, plant, read),
      settings: study.predictor,
      horizon: study.controller.horizon,
      onProgress: onShare,
    });
    const at = outputCoordinates(open);
    const readable = <T>(values: readonly T[]) => values.filter((_, i) => at[i] >= 0);
    const rival = {
      scaling: { ...scaling, y: { centre: readable(scaling.y.centre), half: readable(scaling.y.half) } },
      outputs: readable(outputs),
      readout: readable(at),
    };
    const { operatingPoint } = plant;
    const { sampleTime } = study;
    return {
      predictor,
      plainLinear: fitPlainLinear({ dataset, ...rival }),
      linearised:
        read === 'state' ? linearisePredictor({ plant, operatingPoint, sampleTime, ...rival }) : null,
    };
  });
}

/** The predictor held against held-out trajectories and its rivals, and its spectrum. */
export function makeAssessment(
  open: OpenStudy,
  { dataset }: StageContents['experiment'],
  { predictor, plainLinear, linearised }: StageContents['fit'],
  onShare: OnShare,
): StageContents['assess'] {
  const { controller, predictor: settings } = open.study;
  return stopping(open, () => ({
    trust: assessTrust({
      dataset: liftedCoordinates(open, dataset),
      predictor,
      bound: bindPredictor(open, predictor),
      rivals: { plainLinear, linearised },
      horizon: controller.horizon,
      tolerance: settings.tolerance,
      onProgress: onShare,
    }),
    spectrum: computeSpectrum(predictor),
  }));
}

/** The delay that the controller reckons with: its own setting, or the scenario's. */
function reckonedDelay({ study }: OpenStudy): number {
  return study.controller.delay ?? study.scenario.delay;
}

/** The condensed quadratic program of one predictor. @throws NumericalStop when it is not strictly convex. */
export function designFor(open: OpenStudy, predictor: Predictor): ControllerDesign {
  const { study } = open;
  const design = designController(poseProblem(study.controller, predictor, reckonedDelay(open)));
  if (!design.qp.H.data.every(Number.isFinite)) {
    throw new NumericalStop(
      `the predictor grows beyond all numbers within ${study.controller.horizon} steps; ` +
        'shorten controller.horizon, raise predictor.ridge or take fewer functions',
    );
  }
  return design;
}

export function makeDesign(open: OpenStudy, { predictor }: StageContents['fit']): StageContents['design'] {
  return { design: designFor(open, predictor) };
}

/** Runs a part of the job; what the stages throw about the user's data or lifting becomes a message or a stop. */
export function stopping<T>({ studyName, lineOf }: OpenStudy, part: () => T): T {
  try {
    return part();
  } catch (error) {
    if (error instanceof UnusableDataError) throw new NumericalStop(error.message);
    if (error instanceof UnusableQpError) throw new NumericalStop(`controller: ${error.message}`);
    if (error instanceof UnusableLiftingError) {
      throw new InputError({ file: studyName, line: lineOf(error.problem.key), ...error.problem });
    }
    throw error;
  }
}

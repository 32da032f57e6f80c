import { runExperiment } from '../../src/data/experiment.ts';
import { describeRegion, outsideRegion } from '../../src/data/region.ts';
import { makeScaling } from '../../src/data/scaling.ts';
import type { LoopRun, StudyResult } from '../../src/findings/studyResult.ts';
import { bindLifting } from '../../src/lift/bind.ts';
import { createLiftingContext } from '../../src/lift/context.ts';
import { buildLifting } from '../../src/lift/join.ts';
import { readoutIndices } from '../../src/lift/readout.ts';
import { assessLoop } from '../../src/loop/assess.ts';
import type { ScenarioSettings } from '../../src/loop/scenario.ts';
import { simulateLoop } from '../../src/loop/simulate.ts';
import { designController } from '../../src/mpc/design.ts';
import { createController } from '../../src/mpc/online.ts';
import { poseProblem } from '../../src/mpc/pose.ts';
import type { ControllerSettings } from '../../src/mpc/settings.ts';
import { createRandom } from '../../src/numerics/random.ts';
import { definePlant, type Plant } from '../../src/plant/plant.ts';
import { assessTrust } from '../../src/predictor/assessTrust.ts';
import { fitPredictor } from '../../src/predictor/fit.ts';
import type { Predictor } from '../../src/predictor/predictor.ts';
import { bindPlainLifting, fitPlainLinear, linearisePredictor } from '../../src/predictor/rivals.ts';
import { computeSpectrum } from '../../src/predictor/spectrum.ts';
import { createExactSolver } from '../../src/qp/exact.ts';

/** Half ranges of the sample plant. */
const STROKE = 0.02;
const SPEED = 0.2;
const FORCE = 3;

/** A stage that swings up by itself: van der Pol's equation, as an invented machine with units. */
export const samplePlant: Plant = definePlant({
  name: 'sample-stage',
  description: 'A stage on a drive with negative damping at small strokes, invented for tests.',
  states: [
    { name: 'position', unit: 'm', min: -STROKE, max: STROKE },
    { name: 'velocity', unit: 'm/s', min: -SPEED, max: SPEED },
  ],
  inputs: [{ name: 'force', unit: 'N', min: -FORCE, max: FORCE, rate: 60 }],
  outputs: [
    { name: 'position', unit: 'm', min: -STROKE, max: STROKE, of: 'position' },
    { name: 'velocity', unit: 'm/s', min: -SPEED, max: SPEED, of: 'velocity' },
  ],
  parameters: {
    growth: { unit: '1/s', value: 3, tolerance: 0.05, meaning: 'negative damping at rest' },
    stiffness: { unit: '1/s^2', value: 60, tolerance: 0.05, meaning: 'restoring force by mass' },
    mass: { unit: 'kg', value: 1.2, tolerance: 0.02, meaning: 'moving mass' },
  },
  derivative: (x, u, { growth, stiffness, mass }) => [
    x[1],
    growth * (1 - (1.7 * x[0]) ** 2 / STROKE ** 2) * x[1] - stiffness * x[0] + u[0] / mass,
  ],
  physics: [],
  operatingPoint: { x: [0, 0], u: [0] },
  hazards: ['The stage swings up by itself: keep fingers out of its stroke.'],
});

const SAMPLE_TIME = 0.01;

const controller: ControllerSettings = {
  horizon: 20,
  blocks: [1],
  track: { position: 1, velocity: 0 },
  move: { force: 0.02 },
  level: {},
  terminal: 'none',
  preview: true,
  delay: null,
  disturbanceGain: 0.1,
  inputLimits: {},
  rateLimits: {},
  outputLimits: [{ output: 'velocity', min: -0.1, max: 0.1, hard: false, weight: 5, fromStep: 1 }],
};

const scenario: ScenarioSettings = {
  duration: 3,
  start: { position: 0.005 },
  references: [{ output: 'position', shape: 'steps', values: [0, 0.012, -0.008], time: 1, times: [] }],
  delay: 1,
  noise: 0.002,
  disturbances: [{ input: 'force', value: 0.1, from: 2 }],
  parameterFactors: { growth: 1.05 },
};

/**
 * A whole study small enough for a test: the sample stage through the program's own stages. Its velocity limit is too soft
 * to be kept, so that a limit is broken. The same on every call; made once a process.
 */
export function sampleResult(): StudyResult {
  made ??= makeResult();
  return made;
}

let made: StudyResult | undefined;

function makeResult(): StudyResult {
  const plant = samplePlant;
  const read = 'state';
  const dataset = runExperiment(
    plant,
    {
      signals: ['random-steps', 'multisine'],
      trajectories: 40,
      duration: 0.6,
      amplitude: 0.9,
      hold: 0.05,
      highest: 8,
      startRegion: 1,
      cutAt: 1.8,
      fitShare: 0.6,
      chooseShare: 0.1,
    },
    { sampleTime: SAMPLE_TIME, substeps: 2, seed: 7 },
  );
  const scaling = makeScaling(dataset, plant, read);
  const context = createLiftingContext({
    dataset,
    plant,
    read,
    scaling: scaling.x,
    random: createRandom(7),
  });
  const lifting = buildLifting(
    {
      parts: [{ family: 'thin-plate', values: { centres: 15, placement: 'k-means' } }],
      constant: true,
    },
    context,
  );
  const bound = bindLifting(lifting, context);
  const outputs = plant.outputs.map(({ name, unit, min, max }) => ({ name, unit, min, max }));
  const predictor = fitPredictor({
    dataset,
    lifting,
    bound,
    scaling,
    outputs,
    readout: readoutIndices(lifting, plant, read),
    settings: { form: 'linear', route: 'auto', ridge: null },
    horizon: controller.horizon,
  });
  const rival = { scaling, outputs, readout: [0, 1] };
  const plainLinear = fitPlainLinear({ dataset, ...rival });
  const { operatingPoint } = plant;
  const linearised = linearisePredictor({ plant, operatingPoint, sampleTime: SAMPLE_TIME, ...rival });
  const trust = assessTrust({
    dataset,
    predictor,
    bound,
    rivals: { plainLinear, linearised },
    horizon: controller.horizon,
    tolerance: 0.1,
  });
  const design = designController(poseProblem(controller, predictor, scenario.delay));
  const region = describeRegion(dataset);
  const runWith = (name: LoopRun['name'], used: Predictor): LoopRun => {
    const own = used === predictor ? design : designController(poseProblem(controller, used, scenario.delay));
    const { record } = simulateLoop({
      name,
      plant,
      controller: createController(
        own,
        used === predictor ? bound : bindPlainLifting(2),
        createExactSolver(own.qp),
        operatingPoint.u,
      ),
      outputsSeen: outputs.map((output) => output.name),
      problem: design.problem,
      scenario,
      coordinates: { read, outputLags: 0, inputLags: 0 },
      substeps: 2,
      seed: 7,
      isOutside: (x) => outsideRegion(region, x),
    });
    return { name, record, report: assessLoop(record, design.problem, plant) };
  };
  return {
    title: 'A stage led over its stroke',
    studyHash: '5f'.repeat(32),
    dataHash: 'a3'.repeat(32),
    seed: 7,
    plant,
    sampleTime: SAMPLE_TIME,
    scenario,
    substeps: { count: 2, error: 3e-8 },
    dataset,
    predictor,
    trust,
    spectrum: computeSpectrum(predictor),
    design,
    runs: [
      runWith('lifted', predictor),
      runWith('plain-linear', plainLinear),
      runWith('linearised', linearised),
    ],
    acceptance: [
      { name: 'worst excess over a limit', limit: 0.05, reached: 0.21, unit: '1', met: false },
      { name: 'settling time', limit: 0.8, reached: 0.45, unit: 's', met: true },
    ],
  };
}

import { runExperiment } from '../../src/data/experiment.ts';
import { makeScaling } from '../../src/data/scaling.ts';
import type { StudyResult } from '../../src/findings/studyResult.ts';
import { bindLifting } from '../../src/lift/bind.ts';
import { createLiftingContext } from '../../src/lift/context.ts';
import { buildLifting } from '../../src/lift/join.ts';
import type { LiftingPartSettings } from '../../src/lift/lifting.ts';
import { readoutIndices } from '../../src/lift/readout.ts';
import type { LoopRecord, LoopReport } from '../../src/loop/record.ts';
import { designController } from '../../src/mpc/design.ts';
import { poseProblem } from '../../src/mpc/pose.ts';
import { createRandom } from '../../src/numerics/random.ts';
import type { Plant } from '../../src/plant/plant.ts';
import { fitPredictor } from '../../src/predictor/fit.ts';

/** A damped pendulum with a motor; its third output, the height, is a function of the state. Constants invented. */
export const pendulum: Plant = {
  name: 'pendulum',
  description: 'A damped pendulum turned by a motor.',
  states: [
    { name: 'angle', unit: 'rad', min: -1, max: 1.5 },
    { name: 'speed', unit: 'rad/s', min: -4, max: 4 },
  ],
  inputs: [{ name: 'torque', unit: 'N m', min: -3, max: 3, rate: 40 }],
  outputs: [
    { name: 'angle', unit: 'rad', min: -1, max: 1.5, of: 'angle' },
    { name: 'height', unit: 'm', min: 0, max: 0.5, of: (x, { length }) => length * (1 - Math.cos(x[0])) },
  ],
  parameters: {
    length: { unit: 'm', value: 0.4, tolerance: 0.01, meaning: 'length of the arm' },
    gravity: { unit: 'm/s^2', value: 9.81 },
    damping: { unit: '1/s', value: 0.8, tolerance: 0.2, meaning: 'damping over inertia' },
    gain: { unit: '1/(kg m^2)', value: 6, meaning: 'inverse inertia' },
  },
  derivative: (x, u, { length, gravity, damping, gain }) => [
    x[1],
    -(gravity / length) * Math.sin(x[0]) - damping * x[1] + gain * u[0],
  ],
  physics: [{ name: 'weight', of: (x) => Math.sin(x[0]) }],
  // Not at rest, so that an input that acts before the first decision shows in it.
  operatingPoint: { x: [0, 0], u: [0.6] },
  hazards: ['The arm moves fast and stores energy when it is up.', 'The motor may start without warning.'],
};

/** Every family that a lifting may have, so that each one's constants are exported. */
const PARTS: readonly LiftingPartSettings[] = [
  { family: 'monomials', values: { degree: 2 } },
  { family: 'hermite', values: { degree: 3 } },
  { family: 'legendre', values: { degree: 2 } },
  { family: 'chebyshev', values: { degree: 3, degreeCounts: 'per-axis' } },
  { family: 'thin-plate', values: { centres: 4 } },
  { family: 'gaussian', values: { centres: 3, placement: 'drawn' } },
  { family: 'random-fourier', values: { features: 3 } },
  { family: 'physics', values: {} },
];

let made: StudyResult | undefined;

/**
 * A small study made by the real stages up to the controller, with a written loop record in which everything is in order.
 * Made once; its records are shared and must not be changed.
 */
export function smallResult(): StudyResult {
  made ??= makeSmallResult();
  return made;
}

function makeSmallResult(): StudyResult {
  const sampleTime = 0.02;
  const dataset = runExperiment(
    pendulum,
    {
      signals: ['random-steps'],
      trajectories: 40,
      duration: 2,
      amplitude: 1,
      hold: 0.06,
      highest: 10,
      startRegion: 1,
      cutAt: 10,
      fitShare: 0.6,
      chooseShare: 0.2,
    },
    { sampleTime, substeps: 4, seed: 7 },
  );
  const scaling = makeScaling(dataset, pendulum, 'state');
  const random = createRandom(3);
  const context = createLiftingContext({
    dataset,
    plant: pendulum,
    read: 'state',
    scaling: scaling.x,
    random,
  });
  const lifting = buildLifting({ constant: true, parts: PARTS }, context);
  const predictor = fitPredictor({
    dataset,
    lifting,
    bound: bindLifting(lifting, context),
    scaling,
    outputs: pendulum.outputs.map(({ name, unit, min, max }) => ({ name, unit, min, max })),
    readout: readoutIndices(lifting, pendulum, 'state'),
    settings: { form: 'linear', route: 'auto', ridge: 1e-6 },
    horizon: 8,
  });
  const settings = {
    horizon: 8,
    blocks: [1, 1, 2],
    track: { angle: 1 },
    move: { torque: 0.05 },
    level: {},
    terminal: 'none' as const,
    preview: true,
    delay: 2,
    disturbanceGain: 0.1,
    inputLimits: { torque: { min: -2.5, max: 3 } },
    rateLimits: {},
    outputLimits: [
      { output: 'height', min: Number.NEGATIVE_INFINITY, max: 0.1, hard: false, weight: 1e4, fromStep: 1 },
      { output: 'angle', min: -0.9, max: 0.9, hard: true, weight: 1, fromStep: 3 },
    ],
  };
  const run = (name: StudyResult['runs'][number]['name'], total: number) => ({
    name,
    record: calmRecord(name, total),
    report: calmReport(),
  });
  return {
    title: 'A small pendulum',
    studyHash: 'a'.repeat(64),
    dataHash: 'b'.repeat(64),
    seed: 7,
    plant: pendulum,
    sampleTime,
    substeps: { count: 4, error: 1e-7 },
    dataset,
    // The figures of this little fit are set to calm ones: each test sets the one that it is about.
    predictor: {
      ...predictor,
      lifting: { ...predictor.lifting, dropped: [] },
      fit: { ...predictor.fit, digitsLost: 4, rank: predictor.fit.regressors, dependent: [] },
    },
    trust: {
      steps: Array.from({ length: 20 }, (_, i) => i + 1),
      starts: 600,
      series: [],
      tolerance: 0.1,
      trustedSteps: 12,
      lifting: { helps: true, ratio: 0.4, upTo: 20 },
      ratioToFloor: 1.05,
    },
    spectrum: { real: [1, 0.9], imaginary: [0, 0], radius: 1, fastest: 0.1, slowest: 0.5 },
    design: designController(poseProblem(settings, predictor, 2)),
    scenario: {
      duration: 0.8,
      start: { angle: 0.2 },
      references: [{ output: 'angle', shape: 'constant', values: [0.5], time: 1, times: [] }],
      delay: 2,
      noise: 0.003,
      disturbances: [],
      parameterFactors: {},
    },
    runs: [run('lifted', 10), run('plain-linear', 20), run('linearised', 30)],
    acceptance: [{ name: 'worst excess', limit: 0.05, reached: 0.02, unit: '1', met: true }],
  };
}

const STEPS = 40;

function calmRecord(controller: string, total: number): LoopRecord {
  return {
    controller,
    sampleTime: 0.02,
    steps: STEPS,
    diverged: false,
    nx: 2,
    nu: 1,
    ny: 2,
    x: new Float64Array(2 * (STEPS + 1)).fill(0.1),
    y: new Float64Array(2 * (STEPS + 1)).fill(0.1),
    reference: new Float64Array(2 * (STEPS + 1)).fill(0.1),
    u: new Float64Array(STEPS),
    applied: new Float64Array(STEPS),
    fine: 1,
    yFine: new Float64Array(2 * (STEPS + 1)).fill(0.1),
    status: new Array(STEPS).fill('optimal'),
    fallback: new Array(STEPS).fill('none'),
    iterations: new Array(STEPS).fill(3),
    outsideData: 0,
    cost: { tracking: total, level: 0, move: 0, excess: 0, total },
  };
}

function calmReport(): LoopReport {
  const limit = {
    count: 0,
    share: 0,
    worst: 0,
    worstOfRange: 0,
    longest: 0,
    first: null,
  };
  return {
    limits: [
      { kind: 'output', channel: 'height', unit: 'm', min: Number.NEGATIVE_INFINITY, max: 0.1, ...limit },
      { kind: 'output', channel: 'angle', unit: 'rad', min: -0.9, max: 0.9, ...limit },
      { kind: 'input', channel: 'torque', unit: 'N m', min: -2.5, max: 3, ...limit },
      { kind: 'rate', channel: 'torque', unit: 'N m/s', min: -40, max: 40, ...limit },
    ],
    tracking: [
      {
        output: 'angle',
        unit: 'rad',
        rms: 0.05,
        worst: 0.3,
        overshoot: null,
        settling: null,
        referenceSteps: 0,
        settled: 0,
        offset: 0.001,
      },
    ],
    effort: [{ input: 'torque', unit: 'N m', rms: 1, worstRate: 20, atLimit: 0.1, reversals: 3 }],
    notOptimal: 0,
    iterations: { median: 3, q95: 3, worst: 3 },
  };
}

import { describe, expect, it } from 'vitest';
import { assessLoop } from '../../src/loop/assess.ts';
import { simulateLoop } from '../../src/loop/simulate.ts';
import { designController } from '../../src/mpc/design.ts';
import { createController } from '../../src/mpc/online.ts';
import type { ControlProblem } from '../../src/mpc/problem.ts';
import { fromRows } from '../../src/numerics/matrix.ts';
import { definePlant } from '../../src/plant/plant.ts';
import { createExactSolver } from '../../src/qp/exact.ts';
import { bindIdentity, linearPredictor, linearProblem } from '../mpc/linearProblem.ts';

/** A lag with a gain, `x' = (gain u − x) / tau`: its exact discretisation is the predictor. */
const lag = definePlant({
  name: 'lag',
  description: 'A first-order lag with a gain.',
  states: [{ name: 'x1', unit: '1', min: -1, max: 1 }],
  inputs: [{ name: 'u1', unit: '1', min: -1, max: 1, rate: 5 }],
  outputs: [{ name: 'y1', unit: '1', min: -1, max: 1, of: 'x1' }],
  parameters: { tau: { unit: 's', value: 0.5 }, gain: { unit: '1', value: 1 } },
  derivative: (x, u, { tau, gain }) => [(gain * u[0] - x[0]) / tau],
  operatingPoint: { x: [0], u: [0] },
  hazards: ['none'],
});
const Ts = 0.05;
const a = Math.exp(-Ts / 0.5);

function run(change: Partial<ControlProblem>) {
  const predictor = linearPredictor(fromRows([[a]]), fromRows([[1 - a]]), fromRows([[1]]), Ts);
  const problem: ControlProblem = {
    ...linearProblem({ A: [[a]], B: [[1 - a]] }),
    predictor,
    horizon: 15,
    blocks: new Array(15).fill(1),
    R: fromRows([[0.02]]),
    inputLimits: { min: [-1], max: [1] },
    rateLimits: [5],
    delay: 2,
    disturbanceGain: 0.1,
    ...change,
  };
  const design = designController(problem);
  const { record } = simulateLoop({
    name: 'lag',
    plant: lag,
    controller: createController(design, bindIdentity(1), createExactSolver(design.qp), [0]),
    outputsSeen: ['y1'],
    problem,
    scenario: {
      duration: 20,
      start: {},
      references: [{ output: 'y1', shape: 'constant', values: [0.4], time: 0, times: [] }],
      delay: 2,
      noise: 0,
      disturbances: [{ input: 'u1', value: -0.2, from: 5 }],
      parameterFactors: { gain: 0.8, tau: 1.4 },
    },
    coordinates: { read: 'state', outputLags: 0, inputLags: 0 },
    substeps: 4,
    seed: 1,
  });
  return { record, report: assessLoop(record, problem, lag) };
}

describe('the loop on a plant that is not the model, with a delay and a push on the input', () => {
  it('leaves no offset, and the input at rest is the one that the true plant needs, closed form', () => {
    const { record, report } = run({});
    expect(record.steps).toBe(400);
    expect(Math.abs(report.tracking[0].offset ?? 1)).toBeLessThan(1e-9);
    // 0.8 (u − 0.2) = 0.4.
    expect(record.u[399]).toBeCloseTo(0.7, 9);
    expect(report.notOptimal).toBe(0);
  });

  it('leaves none with a terminal weight and a level weight either', () => {
    const { report } = run({ terminal: 'riccati', S: fromRows([[0.1]]) });
    expect(Math.abs(report.tracking[0].offset ?? 1)).toBeLessThan(1e-9);
  });

  it('leaves one without the disturbance estimate', () => {
    const { report } = run({ disturbanceGain: 0 });
    expect(Math.abs(report.tracking[0].offset ?? 0)).toBeGreaterThan(0.05);
  });
});

import { describe, expect, it } from 'vitest';
import motor from '../../plants/motor/plant.ts';
import { toCoordinates } from '../../src/data/coordinates.ts';
import { runExperiment } from '../../src/data/experiment.ts';
import { makeScaling } from '../../src/data/scaling.ts';
import { bindLifting } from '../../src/lift/bind.ts';
import { createLiftingContext } from '../../src/lift/context.ts';
import { buildLifting } from '../../src/lift/join.ts';
import { readoutIndices } from '../../src/lift/readout.ts';
import { simulateLoop } from '../../src/loop/simulate.ts';
import { designController } from '../../src/mpc/design.ts';
import { createController } from '../../src/mpc/online.ts';
import type { ControlProblem } from '../../src/mpc/problem.ts';
import { fromRows } from '../../src/numerics/matrix.ts';
import { createRandom } from '../../src/numerics/random.ts';
import { fitPredictor } from '../../src/predictor/fit.ts';
import { createExactSolver } from '../../src/qp/exact.ts';

/*
 * M. Korda, I. Mezić, "Linear predictors for nonlinear dynamical systems: Koopman operator meets model predictive
 * control", Automatica 93:149–160 (2018), the motor, second case: read; recomputed: no infeasible solve in 300 steps,
 * largest |y| 0.4005 to 0.4008. Lifting: y_k, u_{k−1}, y_{k−1} and 100 thin-plate functions; Q = 1, R = 0.01 on the input,
 * horizon 1 s, |y| ≤ 0.4 hard, reference 0.5 cos(2πt/3), start (−0.1, 0.1); all in the paper's scaled units (speed / 100).
 */
const Ts = 0.01;
const read = { read: 'delays', outputLags: 1, inputLags: 1 } as const;
const horizon = 100;
const half = 100;

function fitMotor(seed: number) {
  const experiment = {
    signals: ['random-steps'],
    trajectories: 100,
    duration: 2,
    amplitude: 1,
    hold: Ts,
    highest: 20,
    startRegion: 1,
    cutAt: 3,
    fitShare: 0.8,
    chooseShare: 0.1,
  } as const;
  const data = runExperiment(motor, experiment, { sampleTime: Ts, substeps: 4, seed });
  const dataset = toCoordinates(data, motor, read);
  const scaling = makeScaling(dataset, motor, 'delays');
  const context = createLiftingContext({
    dataset,
    plant: motor,
    read: 'delays',
    scaling: scaling.x,
    random: createRandom(seed),
  });
  const lifting = buildLifting(
    { parts: [{ family: 'thin-plate', values: { centres: 100, placement: 'drawn' } }], constant: true },
    context,
  );
  const bound = bindLifting(lifting, context);
  const predictor = fitPredictor({
    dataset,
    lifting,
    bound,
    scaling,
    outputs: motor.outputs,
    readout: readoutIndices(lifting, motor, 'delays'),
    settings: { form: 'linear', route: 'auto', ridge: 0 },
    horizon,
  });
  return { predictor, bound };
}

describe('the motor of Korda and Mezić, case 2', () => {
  it.each([1, 2])(
    'the lifted controller meets no infeasible solve and keeps |y| ≤ 0.41, data seed %i',
    (seed) => {
      const { predictor, bound } = fitMotor(seed);
      const problem: ControlProblem = {
        predictor,
        horizon,
        blocks: new Array(horizon).fill(1),
        Q: fromRows([[1]]),
        S: fromRows([[0.01]]),
        R: fromRows([[0]]),
        terminal: 'none',
        inputLimits: { min: [motor.inputs[0].min], max: [motor.inputs[0].max] },
        rateLimits: [Number.POSITIVE_INFINITY],
        outputLimits: [
          { output: 0, min: -0.4 * half, max: 0.4 * half, weight: Number.POSITIVE_INFINITY, fromStep: 1 },
        ],
        delay: 0,
        preview: true,
        disturbanceGain: 0,
      };
      const design = designController(problem);
      const amplitude = 0.5 * half;
      const times = Array.from({ length: 421 }, (_, k) => k * Ts);
      const { record } = simulateLoop({
        name: 'lifted',
        plant: motor,
        controller: createController(design, bound, createExactSolver(design.qp), [0]),
        outputsSeen: [motor.outputs[0].name],
        problem,
        scenario: {
          duration: 3,
          start: { [motor.states[0].name]: -1, [motor.states[1].name]: 10 },
          references: [
            {
              output: motor.outputs[0].name,
              shape: 'points',
              values: times.map((t) => amplitude * Math.cos((2 * Math.PI * t) / 3)),
              time: 0,
              times,
            },
          ],
          delay: 0,
          noise: 0,
          disturbances: [],
          parameterFactors: {},
        },
        coordinates: read,
        substeps: 4,
        seed,
      });
      expect(record.steps).toBe(300);
      expect(record.status.filter((status) => status !== 'optimal')).toEqual([]);
      const largest = record.y.reduce((most, y) => Math.max(most, Math.abs(y) / half), 0);
      expect(largest).toBeLessThan(0.41);
      expect(largest).toBeGreaterThan(0.39);
    },
  );
});

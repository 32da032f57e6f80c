import { describe, expect, it } from 'vitest';
import { createCoordinateTracker, toCoordinates } from '../../src/data/coordinates.ts';
import { makeScaling } from '../../src/data/scaling.ts';
import { computeExample } from '../../src/export/workedExample.ts';
import type { StudyResult } from '../../src/findings/studyResult.ts';
import { bindLifting } from '../../src/lift/bind.ts';
import { createLiftingContext } from '../../src/lift/context.ts';
import { buildLifting } from '../../src/lift/join.ts';
import { readoutIndices } from '../../src/lift/readout.ts';
import { designController } from '../../src/mpc/design.ts';
import { createController } from '../../src/mpc/online.ts';
import { createRandom } from '../../src/numerics/random.ts';
import { fitPredictor } from '../../src/predictor/fit.ts';
import { createExactSolver } from '../../src/qp/exact.ts';
import { pendulum, smallResult } from '../findings/smallResult.ts';

/** The small study with a reference that differs from sample to sample, and its preview as asked. */
function withReference(preview: boolean): StudyResult {
  const result = smallResult();
  const [lifted, ...rivals] = result.runs;
  const reference = lifted.record.reference.map((_, i) => (i % 2 === 0 ? 0.2 + 0.01 * (i / 2) : 0));
  const problem = { ...result.design.problem, preview };
  const run = { ...lifted, record: { ...lifted.record, reference } };
  return { ...result, design: { ...result.design, problem }, runs: [run, ...rivals] };
}

/** The same study on delayed outputs and inputs instead of the state. */
function onDelays(): StudyResult {
  const result = smallResult();
  const settings = { read: 'delays' as const, outputLags: 2, inputLags: 1 };
  const { read } = settings;
  const dataset = toCoordinates(result.dataset, pendulum, settings);
  const scaling = makeScaling(dataset, pendulum, read);
  const random = createRandom(5);
  const context = createLiftingContext({ dataset, plant: pendulum, read, scaling: scaling.x, random });
  const lifting = buildLifting(
    { constant: true, parts: [{ family: 'monomials', values: { degree: 2 } }] },
    context,
  );
  const predictor = fitPredictor({
    dataset,
    lifting,
    bound: bindLifting(lifting, context),
    scaling,
    outputs: pendulum.outputs.map(({ name, unit, min, max }) => ({ name, unit, min, max })),
    readout: readoutIndices(lifting, pendulum, read),
    settings: { form: 'linear', route: 'auto', ridge: 1e-4 },
    horizon: 8,
  });
  const design = designController({ ...result.design.problem, predictor });
  return { ...result, predictor, design };
}

describe('the decision that is worked through', () => {
  it.each([true, false])(
    'sees the reference as the running controller would (relation, preview %s)',
    (preview) => {
      const { delay, horizon } = smallResult().design.problem;
      const angles = computeExample(withReference(preview)).reference.filter((_, i) => i % 2 === 0);
      // Row k of the record is the reference at sample k; the first predicted output is delay + 1 samples away.
      const due = Array.from({ length: horizon }, (_, k) => 0.2 + 0.01 * (preview ? delay + 1 + k : 1));
      angles.forEach((angle, k) => {
        expect(angle).toBeCloseTo(due[k], 12);
      });
    },
  );

  it.each([true, false])(
    'is the first decision of the controller itself (twin: the online controller, preview %s)',
    (preview) => {
      const result = withReference(preview);
      const { design, plant } = result;
      const { predictor, delay, horizon } = design.problem;
      const context = createLiftingContext({
        dataset: result.dataset,
        plant,
        read: 'state',
        scaling: predictor.scaling.x,
        random: createRandom(1),
      });
      const bound = bindLifting(predictor.lifting, context);
      const controller = createController(
        design,
        bound,
        createExactSolver(design.qp),
        plant.operatingPoint.u,
      );
      const { record } = result.runs[0];
      const window = record.reference.slice(record.ny, (delay + horizon + 1) * record.ny);
      const { u, status } = controller.step(record.x.subarray(0, record.nx), window);
      const example = computeExample(result);
      expect(example.status).toBe(status);
      expect(example.u[0]).toBeCloseTo(u[0], 12);
      expect(Math.abs(u[0])).toBeGreaterThan(0.1);
    },
  );

  it('starts delay coordinates at rest, as a running loop does (twin: the coordinate tracker)', () => {
    const result = onDelays();
    const { record } = result.runs[0];
    const tracker = createCoordinateTracker({ read: 'delays', outputLags: 2, inputLags: 1 }, pendulum);
    const y = [record.x[0], 0.4 * (1 - Math.cos(record.x[0]))];
    const { x } = tracker.measure(y);
    const example = computeExample(result);
    expect(example.x).toHaveLength(7);
    example.x.forEach((value, i) => {
      expect(value).toBeCloseTo(x[i], 12);
    });
    expect(example.status).toBe('optimal');
  });
});

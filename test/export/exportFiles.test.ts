import { describe, expect, it } from 'vitest';
import { datasetBytes } from '../../src/export/datasetBytes.ts';
import { exportFiles } from '../../src/export/exportFiles.ts';
import { liftingFormula } from '../../src/export/liftingFormulas.ts';
import { readMatrixMarket } from '../../src/export/matrixMarket.ts';
import type { WorkedExample } from '../../src/export/workedExample.ts';
import type { StudyResult } from '../../src/findings/studyResult.ts';
import { FAMILIES } from '../../src/lift/families.ts';
import type { LiftingPart } from '../../src/lift/lifting.ts';
import type { Matrix } from '../../src/numerics/matrix.ts';
import { pendulum, smallResult } from '../findings/smallResult.ts';

const OPTIONS = { name: 'pendulum', version: '0.1.0' };
const filesOf = (result: StudyResult) =>
  new Map(exportFiles(result, OPTIONS).map(({ path, bytes }) => [path, bytes]));
const files = filesOf(smallResult());
const file = (path: string) => files.get(path) ?? '';
const matrix = (name: string) => readMatrixMarket(file(`matrices/${name}.mtx`));
const readExample = (made: ReadonlyMap<string, string>): WorkedExample =>
  JSON.parse(made.get('example.json') ?? '', (_, value) =>
    value === 'Infinity' ? Infinity : value === '-Infinity' ? -Infinity : value,
  );
const example = readExample(files);
const controller = JSON.parse(file('controller.json'));

/** Rounding of sums of this many terms of size one, with room to spare. */
const ROUNDING = 1e-12;
const times = ({ rows, cols, data }: Matrix, v: readonly number[]) =>
  Array.from({ length: rows }, (_, i) => v.reduce((sum, value, j) => sum + data[i * cols + j] * value, 0));
const transposedTimes = ({ rows, cols, data }: Matrix, v: readonly number[]) =>
  Array.from({ length: cols }, (_, j) => {
    let sum = 0;
    for (let i = 0; i < rows; i++) sum += data[i * cols + j] * v[i];
    return sum;
  });
const distance = (a: readonly number[], b: readonly number[]) =>
  Math.max(0, ...a.map((value, i) => (value === b[i] ? 0 : Math.abs(value - b[i]))));

/** The functions of a part as the README's table tells them, written anew from its words. */
function evaluatePart(
  { family, constants, keep }: LiftingPart,
  x: readonly number[],
  physical: readonly number[],
): number[] {
  const lists = constants as Record<string, number[][]>;
  const numbers = constants as unknown as Record<string, number[]>;
  const product = (next: (n: number, x: number, now: number, before: number) => number) =>
    lists.orders.map((order) =>
      order.reduce((value, degree, j) => {
        let [before, now] = [0, 1];
        for (let n = 0; n < degree; n++) [before, now] = [now, next(n, x[j], now, before)];
        return value * now;
      }, 1),
    );
  const squares = () => lists.centres.map((c) => c.reduce((sum, value, j) => sum + (x[j] - value) ** 2, 0));
  const plantFunctions: Record<string, number> = {
    height: 0.4 * (1 - Math.cos(physical[0])),
    weight: Math.sin(physical[0]),
  };
  const all = (): number[] => {
    switch (family) {
      case 'state':
        return [...x];
      case 'constant':
        return [1];
      case 'monomials':
        return product((_, xj, now) => xj * now);
      case 'hermite':
        return product((n, xj, now, before) => xj * now - n * before);
      case 'legendre':
        return product((n, xj, now, before) => ((2 * n + 1) * xj * now - n * before) / (n + 1));
      case 'chebyshev':
        return product((n, xj, now, before) => (n === 0 ? xj : 2 * xj * now - before));
      case 'thin-plate':
        return squares().map((s) => (s === 0 ? 0 : (s * Math.log(s)) / 2));
      case 'gaussian':
        return squares().map((s) => Math.exp(-s / (2 * (constants.width as number) ** 2)));
      case 'random-fourier':
        return numbers.phases.map((phase, i) =>
          Math.cos(phase + lists.frequencies[i].reduce((sum, w, j) => sum + w * x[j], 0)),
        );
      default:
        return (constants.functions as string[]).map(
          (name, i) => (plantFunctions[name] - numbers.centre[i]) / numbers.half[i],
        );
    }
  };
  const values = all();
  return keep.map((index) => values[index]);
}

describe('the exported folder', () => {
  it('is the same bytes for the same result; no path of a machine and no date in any file', () => {
    expect([...filesOf(smallResult())]).toEqual([...files]);
    for (const [path, text] of files) {
      expect(path).toMatch(/^[\w./]+$/);
      expect(text.endsWith('\n')).toBe(true);
      expect(text).not.toMatch(/\/(?:tmp|home|root|Users)\/|[A-Z]:\\|\b20\d\d-\d\d-\d\d|\d\d:\d\d:\d\d/);
    }
  });

  it('the README names every file, its shape, the hazards and the place to sign', () => {
    const readme = file('README.md');
    for (const path of files.keys()) expect(readme).toContain(path);
    for (const sentence of controller.safety.standing) expect(readme).toContain(sentence);
    for (const hazard of pendulum.hazards) expect(readme).toContain(hazard);
    for (const who of ['Designed by', 'Reviewed by', 'Approved by']) expect(readme).toContain(who);
    expect(readme).not.toMatch(/undefined|\[object|NaN/);
    for (const [name, size] of [
      ['NX', 2],
      ['NZ', controller.qp.nz],
      ['NTHETA', controller.qp.ntheta],
      ['NROWS', controller.qp.m],
    ]) {
      expect(readme).toContain(`| ${name} | ${size} |`);
    }
  });

  it('each matrix file holds the matrix of its name (relation: by a list written apart)', () => {
    const { design, predictor } = smallResult();
    const { qp, K, P, Tz, Tu } = design;
    const { A, B, C } = predictor;
    const due = {
      A,
      B,
      C,
      H: qp.H,
      F: qp.F,
      G: qp.G,
      E: qp.E,
      Wl: qp.Wl,
      Wu: qp.Wu,
      softness: qp.softness,
      K,
      P,
      Tz,
      Tu,
    };
    const names = [...files.keys()].flatMap((path) => /^matrices\/(\w+)\.mtx$/.exec(path)?.[1] ?? []);
    expect(names.sort()).toEqual(Object.keys(due).sort());
    for (const [name, values] of Object.entries(due)) {
      const { rows, cols, data } =
        values instanceof Float64Array ? { rows: values.length, cols: 1, data: values } : values;
      expect([matrix(name).rows, matrix(name).cols], name).toEqual([rows, cols]);
      expect(
        Buffer.compare(new Uint8Array(matrix(name).data.buffer), new Uint8Array(data.slice().buffer)),
        name,
      ).toBe(0);
    }
  });

  it('cautions that are open stand in the README with what to do', () => {
    const { design } = smallResult();
    const readme = filesOf({
      ...smallResult(),
      design: { ...design, qp: { ...design.qp, condition: 1e9 } },
    }).get('README.md');
    expect(readme).toContain('**warning** `ill-conditioned-hessian`');
    expect(readme).toContain('Raise the weight on input moves');
  });

  it('the README has a formula of its own for every family of functions', () => {
    for (const { name, meaning } of Object.values(FAMILIES)) {
      expect(liftingFormula({ family: name })).not.toBe(meaning);
    }
    expect(liftingFormula({ family: 'later' })).toContain('does not know');
  });

  it('the lifting evaluated by the README’s formulas gives the z of the example (independent reading, every family)', () => {
    const { centre, half } = smallResult().predictor.scaling.x;
    const xs = example.x.map((value, i) => (value - centre[i]) / half[i]);
    expect(distance(xs, example.xScaled)).toBeLessThan(ROUNDING);
    const z = (controller.lifting.parts as LiftingPart[]).flatMap((part) =>
      evaluatePart(part, xs, example.x),
    );
    expect(z).toHaveLength(controller.lifting.nz);
    expect(distance(z, example.zMeasured)).toBeLessThan(ROUNDING);
  });

  it('theta, gradient and bounds follow from the matrix files by the README’s steps (independent reading)', () => {
    const [A, B] = [matrix('A'), matrix('B')];
    const { centre, half } = smallResult().predictor.scaling.x;
    let z = example.zMeasured;
    for (let i = 0; i < controller.problem.delay; i++) {
      const [free, forced] = [times(A, z), times(B, example.uPrevScaled)];
      const xs = free.slice(0, centre.length).map((value, j) => value + forced[j]);
      const x = xs.map((value, j) => centre[j] + half[j] * value);
      z = (controller.lifting.parts as LiftingPart[]).flatMap((part) => evaluatePart(part, xs, x));
    }
    expect(distance(z, example.z)).toBeLessThan(ROUNDING);
    const { outputs } = controller.scaling;
    const r = example.reference.map((value, i) => (value - outputs[i % 2].centre) / outputs[i % 2].half);
    const theta = [...z, ...example.uPrevScaled, ...r, ...new Array(z.length).fill(0), 1];
    expect(theta).toHaveLength(controller.qp.ntheta);
    expect(distance(theta, example.theta)).toBeLessThan(ROUNDING);
    expect(distance(times(matrix('F'), theta), example.q)).toBeLessThan(ROUNDING);
    const shift = times(matrix('E'), theta);
    expect(
      distance(
        Array.from(matrix('Wl').data, (value, i) => value + shift[i]),
        example.lower,
      ),
    ).toBeLessThan(ROUNDING);
    expect(
      distance(
        Array.from(matrix('Wu').data, (value, i) => value + shift[i]),
        example.upper,
      ),
    ).toBeLessThan(ROUNDING);
    expect(
      distance(
        times(matrix('K'), theta).map((value) => -value),
        example.unconstrained,
      ),
    ).toBeLessThan(ROUNDING);
  });

  // The scenario of the small study is easy; harder starts make limits active, so that their signs are checked too.
  const startingAt = (x: readonly number[], reference: readonly number[]): WorkedExample => {
    const result = smallResult();
    const [lifted, ...rivals] = result.runs;
    const record = {
      ...lifted.record,
      x: Float64Array.from(lifted.record.x, (_, i) => x[i % 2]),
      reference: Float64Array.from(lifted.record.reference, (_, i) => reference[i % 2]),
    };
    return readExample(filesOf({ ...result, runs: [{ ...lifted, record }, ...rivals] }));
  };

  it.each([
    ['an easy start', example, { hard: 0, soft: 0 }],
    ['a start with hard limits active', startingAt([0.7, 2], [-0.9, 0]), { hard: 1, soft: 0 }],
    ['a start with the soft limit active', startingAt([0.7, 1], [0.75, 0]), { hard: 0, soft: 1 }],
  ])(
    'U of the example meets the optimality conditions of the exported program: %s (defining equation)',
    (_, case_, active) => {
      const [H, G, softness] = [matrix('H'), matrix('G'), matrix('softness').data];
      const { U, q, multipliers, lower, upper } = case_;
      expect(case_.status).toBe('optimal');
      const size = Math.max(1, ...q.map(Math.abs), ...multipliers.map(Math.abs));
      const gradient = times(H, U).map((value, i) => value + q[i]);
      const pull = transposedTimes(G, multipliers);
      expect(Math.max(...gradient.map((value, i) => Math.abs(value + pull[i])))).toBeLessThan(1e-9 * size);
      const rows = times(G, U);
      multipliers.forEach((multiplier, i) => {
        // The slack of a soft row: e = −softness · multiplier.
        const at = rows[i] - softness[i] * multiplier;
        expect(at).toBeGreaterThan(lower[i] - 1e-9);
        expect(at).toBeLessThan(upper[i] + 1e-9);
        if (multiplier > 1e-9) expect(at).toBeCloseTo(upper[i], 8);
        if (multiplier < -1e-9) expect(at).toBeCloseTo(lower[i], 8);
      });
      const acting = multipliers.map((value, i) => (Math.abs(value) > 1e-9 ? softness[i] > 0 : null));
      expect(acting.filter((soft) => soft === false).length).toBeGreaterThanOrEqual(active.hard);
      expect(acting.filter((soft) => soft === true).length).toBeGreaterThanOrEqual(active.soft);
      const { centre, half } = controller.scaling.inputs[0];
      expect(case_.u[0]).toBeCloseTo(centre + half * U[0], 9);
    },
  );

  it('a bilinear predictor brings its blocks along, one file each', () => {
    const { design } = smallResult();
    const { predictor } = design.problem;
    const bilinear = { ...predictor, form: 'bilinear' as const, N: [predictor.A] };
    const made = filesOf({
      ...smallResult(),
      design: { ...design, problem: { ...design.problem, predictor: bilinear } },
    });
    expect(readMatrixMarket(made.get('matrices/N1.mtx') ?? '')).toEqual(
      readMatrixMarket(file('matrices/A.mtx')),
    );
    expect(made.get('liftwright_pendulum.h')).toContain('liftwright_pendulum_N1');
  });

  it('a study whose loop was not run, or whose H is singular, is still written, and says so', () => {
    const { design } = smallResult();
    const without = filesOf({ ...smallResult(), runs: [] });
    expect(JSON.parse(without.get('example.json') ?? '').x).toEqual(pendulum.operatingPoint.x);
    const singular = { ...design, qp: { ...design.qp, condition: Number.POSITIVE_INFINITY } };
    const made = filesOf({ ...smallResult(), design: singular });
    expect(JSON.parse(made.get('example.json') ?? '').status).toBe('failed');
    expect(made.get('README.md')).toContain('**error** `ill-conditioned-hessian`');
  });
});

describe('the bytes of a dataset', () => {
  const same = (a: Uint8Array, b: Uint8Array) => Buffer.compare(a, b) === 0;
  const bytesWith = (index: number, value: number) => {
    const { dataset } = smallResult();
    const [first, ...others] = dataset.trajectories;
    const x = first.x.slice();
    x[index] = value;
    return datasetBytes({ ...dataset, trajectories: [{ ...first, x }, ...others] });
  };

  it('are the same for the same numbers and differ in the last bit, in the sign of zero, and in a role', () => {
    const { dataset } = smallResult();
    const own = datasetBytes(dataset);
    expect(same(datasetBytes({ ...dataset }), own)).toBe(true);
    expect(same(bytesWith(3, 1), bytesWith(3, 1 + Number.EPSILON))).toBe(false);
    expect(same(bytesWith(3, 0), bytesWith(3, -0))).toBe(false);
    const [first, ...others] = dataset.trajectories;
    const role = first.role === 'fit' ? ('held-out' as const) : ('fit' as const);
    expect(same(datasetBytes({ ...dataset, trajectories: [{ ...first, role }, ...others] }), own)).toBe(
      false,
    );
  });

  it('end with the doubles, least significant byte first (IEEE 754)', () => {
    const { dataset } = smallResult();
    const last = dataset.trajectories.at(-1);
    const bytes = datasetBytes({
      ...dataset,
      trajectories: last ? [{ ...last, u: Float64Array.of(1) }] : [],
    });
    expect([...bytes.subarray(-8)]).toEqual([0, 0, 0, 0, 0, 0, 0xf0, 0x3f]);
  });
});

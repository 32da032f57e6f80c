import { Matrix as Dense, solve } from 'ml-matrix';
import { describe, expect, it } from 'vitest';
import { createRandom } from '../../src/numerics/random.ts';
import { RIDGE_GRID } from '../../src/predictor/chooseRidge.ts';
import { type FitRequest, fitPredictor } from '../../src/predictor/fit.ts';
import type { PredictorSettings } from '../../src/predictor/predictor.ts';
import { UnusableDataError } from '../../src/predictor/unusableData.ts';
import {
  channels,
  datasetOf,
  largestDifference,
  liftBy,
  rk4,
  simulate,
  thinPlates,
  trajectoryOf,
  unitScaling,
} from './synthetic.ts';

type Settings = FitRequest['settings'];
const settingsOf = (
  route: PredictorSettings['route'],
  ridge: number | null = 0,
  form: PredictorSettings['form'] = 'linear',
): Settings => ({ form, route, ridge });

const common = { outputs: channels('y', 1), readout: [0], horizon: 10 };
const ROUTES = ['gram', 'orthogonal'] as const;

/** A pendulum with friction and a torque. */
const pendulum = (x: readonly number[], u: readonly number[]) => [
  x[1],
  -Math.sin(3 * x[0]) - 0.2 * x[1] + u[0],
];
const swings = simulate({
  step: (x, u) => rk4(pendulum, x, u, 0.1),
  nx: 2,
  nu: 1,
  trajectories: 30,
  steps: 40,
  seed: 5,
  role: (t) => (t < 20 ? 'fit' : 'choose'),
});
const scaling = unitScaling(2, 1);

/** `x⁺ = F x + G u`, stable, two states, one input. */
const F = [
  [0.9, 0.2],
  [-0.1, 0.7],
];
const G = [0.3, -0.5];
const linear = (x: readonly number[], u: readonly number[]) =>
  F.map((row, i) => row[0] * x[0] + row[1] * x[1] + G[i] * u[0]);

describe('regression of a lifted predictor', () => {
  it('gives the same numbers by the Gram and the orthogonal route (twin), within ε κ² and predictions within ε κ', () => {
    const lifted = thinPlates(12, createRandom(3), true);
    const [gram, orthogonal] = ROUTES.map((route) =>
      fitPredictor({ ...common, ...lifted, dataset: swings, scaling, settings: settingsOf(route) }),
    );
    const { condition } = orthogonal.fit;
    expect(condition).toBeGreaterThan(100);
    expect(Math.abs(gram.fit.condition / condition - 1)).toBeLessThan(1e-4);
    const size = Math.max(...orthogonal.A.data.map(Math.abs));
    const bound = 20 * Number.EPSILON * condition ** 2 * size;
    expect(bound).toBeLessThan(1e-2 * size);
    expect(largestDifference(gram.A.data, orthogonal.A.data)).toBeLessThan(bound);
    expect(largestDifference(gram.B.data, orthogonal.B.data)).toBeLessThan(bound);
    expect(largestDifference(gram.fit.residuals, orthogonal.fit.residuals)).toBeLessThan(1e-7);
    expect(gram.fit.digitsLost).toBeCloseTo(2 * orthogonal.fit.digitsLost, 2);
    expect(orthogonal.fit.digitsLost).toBeCloseTo(Math.log10(condition), 6);
  });

  for (const route of ROUTES) {
    it(`solves the ridge as a direct solve of the stacked rows does, the constant free (independent package): ${route}`, () => {
      const functions = { 'x1²': (x: ArrayLike<number>) => x[0] ** 2, constant: () => 1 };
      const lifted = liftBy(2, functions);
      const rows: number[][] = [];
      const targets: number[][] = [];
      for (const t of swings.trajectories.filter((t) => t.role === 'fit')) {
        const z = (k: number) => [t.x[2 * k], t.x[2 * k + 1], t.x[2 * k] ** 2, 1];
        for (let k = 0; k < t.steps; k++) {
          rows.push([...z(k), t.u[k]]);
          targets.push(z(k + 1));
        }
      }
      const M = rows.length;
      const rms = rows[0].map((_, j) => Math.sqrt(rows.reduce((sum, row) => sum + row[j] ** 2, 0) / M));
      for (const ridge of [0, 1e-6, 1e-2, 10]) {
        const penalties = [0, 1, 2, 4].map((j) =>
          rms.map((r, i) => (i === j ? Math.sqrt(M * ridge) * r : 0)),
        );
        const expected = solve(
          new Dense([...rows, ...penalties]),
          new Dense([...targets, ...penalties.map(() => [0, 0, 0, 0])]),
        );
        const { A, B } = fitPredictor({
          ...common,
          ...lifted,
          dataset: swings,
          scaling,
          settings: settingsOf(route, ridge),
        });
        for (let i = 0; i < 3; i++) {
          for (let j = 0; j < 4; j++) {
            expect(Math.abs(A.data[i * 4 + j] - expected.get(j, i))).toBeLessThan(1e-11);
          }
          expect(Math.abs(B.data[i] - expected.get(4, i))).toBeLessThan(1e-11);
        }
      }
    });
  }

  it('does not regress the row of the constant: it selects the constant and no input moves it', () => {
    for (const form of ['linear', 'bilinear'] as const) {
      const lifted = thinPlates(6, createRandom(1), true);
      const settings = settingsOf('auto', 1e-4, form);
      const { A, B, N, fit } = fitPredictor({ ...common, ...lifted, dataset: swings, scaling, settings });
      const nz = 9;
      const row = Array.from(A.data.subarray((nz - 1) * nz));
      expect(row).toEqual([...new Array(nz - 1).fill(0), 1]);
      expect(B.data[nz - 1]).toBe(0);
      for (const M of N) expect(Array.from(M.data.subarray((nz - 1) * nz))).toEqual(new Array(nz).fill(0));
      expect(fit.residuals[nz - 1]).toBe(0);
    }
  });

  it('never pairs the end of one trajectory with the start of the next: a linear map stays exact over 3 of them', () => {
    const pieces = [1, 2, 3].map((seed) =>
      simulate({ step: linear, nx: 2, nu: 1, trajectories: 1, steps: 43, seed }),
    );
    const dataset = datasetOf(
      pieces.flatMap((piece) => piece.trajectories),
      2,
      1,
    );
    for (const route of ROUTES) {
      const { A, B, fit } = fitPredictor({
        ...common,
        ...liftBy(2, {}),
        dataset,
        scaling,
        settings: settingsOf(route),
      });
      expect(fit.samples).toBe(3 * 43);
      expect(largestDifference(A.data, F.flat())).toBeLessThan(1e-13);
      expect(largestDifference(B.data, G)).toBeLessThan(1e-13);
    }
  });

  it('gives scaled matrices: the same plant in other units is the same physical map (relation)', () => {
    const dataset = simulate({ step: linear, nx: 2, nu: 1, trajectories: 5, steps: 30, seed: 9 });
    const other = {
      x: { centre: [0.3, -2], half: [1e-3, 50] },
      u: { centre: [0.1], half: [4] },
      y: { centre: [0], half: [1] },
    };
    const settings = settingsOf('orthogonal');
    const { A, B } = fitPredictor({
      ...common,
      ...liftBy(2, { constant: () => 1 }),
      dataset,
      scaling: other,
      settings,
    });
    const { half } = other.x;
    for (let i = 0; i < 2; i++) {
      for (let j = 0; j < 2; j++) {
        expect((A.data[i * 3 + j] * half[i]) / half[j]).toBeCloseTo(F[i][j], 10);
      }
      expect((B.data[i] * half[i]) / other.u.half[0]).toBeCloseTo(G[i], 10);
    }
  });

  it('finds a bilinear map exactly: x⁺ = F x + G u + u N x, by construction', () => {
    const N = [
      [0.1, -0.2],
      [0.05, 0.3],
    ];
    const step = (x: readonly number[], u: readonly number[]) =>
      linear(x, u).map((value, i) => value + u[0] * (N[i][0] * x[0] + N[i][1] * x[1]));
    const dataset = simulate({ step, nx: 2, nu: 1, trajectories: 5, steps: 40, seed: 2 });
    for (const route of ROUTES) {
      for (const functions of [{}, { constant: () => 1 }] as Parameters<typeof liftBy>[1][]) {
        const lifted = liftBy(2, functions);
        const settings = settingsOf(route, 0, 'bilinear');
        const predictor = fitPredictor({ ...common, ...lifted, dataset, scaling, settings });
        const { nz } = lifted.bound;
        for (let i = 0; i < 2; i++) {
          for (let j = 0; j < 2; j++) {
            expect(Math.abs(predictor.N[0].data[i * nz + j] - N[i][j])).toBeLessThan(1e-12);
            expect(Math.abs(predictor.A.data[i * nz + j] - F[i][j])).toBeLessThan(1e-12);
          }
          expect(Math.abs(predictor.B.data[i] - G[i])).toBeLessThan(1e-12);
        }
        expect(predictor.fit.dependent).toEqual([]);
      }
    }
  });

  it('names a function that others express, and a coordinate that never moves, and not their originals', () => {
    const lifted = liftBy(2, {
      constant: () => 1,
      'x1²': (x) => x[0] ** 2,
      mixture: (x) => 2 * x[0] - x[0] ** 2 + 0.5,
    });
    for (const route of ['gram', 'orthogonal', 'auto'] as const) {
      const predictor = fitPredictor({
        ...common,
        ...lifted,
        dataset: swings,
        scaling,
        settings: settingsOf(route),
      });
      expect(predictor.fit.dependent).toEqual(['mixture']);
      expect(predictor.fit.rank).toBe(5);
      expect(predictor.fit.regressors).toBe(6);
    }
    const still = [1, 2, 3, 4].map((v) =>
      trajectoryOf(
        [
          [v, 0],
          [v / 2 + 1, 0],
        ],
        [[v * v]],
      ),
    );
    const { fit } = fitPredictor({
      ...common,
      ...liftBy(2, {}),
      dataset: datasetOf(still, 2, 1),
      scaling,
      settings: settingsOf('auto'),
    });
    expect(fit.dependent).toEqual(['x2']);
  });

  it('takes the solution of least norm when a function is there twice: both copies get equal shares (closed form)', () => {
    const dataset = simulate({ step: linear, nx: 2, nu: 1, trajectories: 5, steps: 40, seed: 2 });
    const lifted = liftBy(2, { copy: (x) => x[0] });
    for (const route of ROUTES) {
      const { A, fit } = fitPredictor({
        ...common,
        ...lifted,
        dataset,
        scaling,
        settings: settingsOf(route),
      });
      expect(fit.dependent).toEqual(['copy']);
      for (let i = 0; i < 2; i++) {
        expect(A.data[i * 3]).toBeCloseTo(F[i][0] / 2, 7);
        expect(A.data[i * 3 + 2]).toBeCloseTo(F[i][0] / 2, 7);
      }
    }
  });

  it('goes by the orthogonal route above the condition limit and by the Gram route below it', () => {
    const near = (distance: number) => liftBy(2, { near: (x) => x[0] + distance * x[0] ** 2 });
    const route = (distance: number) =>
      fitPredictor({ ...common, ...near(distance), dataset: swings, scaling, settings: settingsOf('auto') })
        .fit;
    expect(route(1e-2).route).toBe('gram');
    expect(route(1e-8).route).toBe('orthogonal');
    expect(route(1e-8).condition).toBeGreaterThan(1e6);
    expect(route(1e-8).rank).toBe(4);
  });

  it('chooses the ridge with the least error over the horizon among all it lists', () => {
    for (const form of ['linear', 'bilinear'] as const) {
      const lifted = thinPlates(25, createRandom(4), true);
      const settings = settingsOf('auto', null, form);
      const { fit } = fitPredictor({ ...common, ...lifted, dataset: swings, scaling, settings });
      expect(fit.ridgesTried.map((tried) => tried.ridge)).toEqual([...RIDGE_GRID]);
      const least = Math.min(...fit.ridgesTried.map((tried) => tried.error));
      expect(fit.ridgesTried.find((tried) => tried.ridge === fit.ridge)?.error).toBe(least);
      expect(least).toBeGreaterThan(0);
      expect(new Set(fit.ridgesTried.map((tried) => tried.error)).size).toBeGreaterThan(3);
    }
  });

  it('refuses data without samples to fit, and functions that are not finite, by name', () => {
    const none = datasetOf([{ ...swings.trajectories[0], role: 'choose' }], 2, 1);
    const request = { ...common, ...liftBy(2, {}), scaling, settings: settingsOf('auto') };
    expect(() => fitPredictor({ ...request, dataset: none })).toThrow(UnusableDataError);
    for (const route of ROUTES) {
      const lifted = liftBy(2, { root: (x) => Math.sqrt(x[0]) });
      const settings = settingsOf(route);
      expect(() => fitPredictor({ ...request, ...lifted, settings, dataset: swings })).toThrow(
        /root is not finite/,
      );
    }
  });

  it('reports progress from 0 to 1 without going back', () => {
    const shares: number[] = [];
    fitPredictor({
      ...common,
      ...thinPlates(5, createRandom(1)),
      dataset: swings,
      scaling,
      settings: settingsOf('gram', null),
      onProgress: (share) => shares.push(share),
    });
    expect(shares).toEqual([...shares].sort((a, b) => a - b));
    expect(shares.at(-1)).toBe(1);
  });
});

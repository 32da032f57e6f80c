import { describe, expect, it } from 'vitest';
import { condenseQp } from '../../src/mpc/condense.ts';
import { designController } from '../../src/mpc/design.ts';
import { createController } from '../../src/mpc/online.ts';
import { findTarget } from '../../src/mpc/target.ts';
import { diagonal, fromRows, type Matrix, zeros } from '../../src/numerics/matrix.ts';
import { createExactSolver } from '../../src/qp/exact.ts';
import { bindIdentity, linearProblem } from '../mpc/linearProblem.ts';

/*
 * A. Bemporad, M. Morari, V. Dua, E. Pistikopoulos, "The explicit linear quadratic regulator for constrained systems",
 * Automatica 38:3–20 (2002), Example 7.1, with the corrigendum 39:1845–1846 (2003): read, recomputed. The terminal weight
 * solves A'PA − P + Q = 0. The printed pair is H and F times 2 / ‖H‖₂, printed to four digits. The
 * paper writes the cost ½UᵀHU + xᵀFU: its F is the transpose of ours.
 */
const plant = {
  A: [
    [0.7326, -0.0861],
    [0.1722, 0.9909],
  ],
  B: [[0.0609], [0.0064]],
};
const P = fromRows([
  [5.5461, 4.9873],
  [4.9873, 10.494],
]);
const H = [
  [0.06977403597957602, 0.04506223962392103],
  [0.04506223962392103, 0.06977403597957602],
];
const F = [
  [0.6693843857070556, 0.6059999069091488],
  [0.6713641459939595, 0.607620736656037],
];
const printedH = [
  [1.2152, 0.7848],
  [0.7848, 1.2152],
];
const printedF = [
  [11.6581, 10.5542],
  [11.6925, 10.5824],
];
const gain = [6.8355, 6.8585];

const problem = linearProblem(plant, {
  horizon: 2,
  S: fromRows([[0.01]]),
  R: fromRows([[0]]),
  inputLimits: { min: [-2], max: [2] },
});

/** P of AᵀPA − P + Q = 0 (or of the transposed equation) by summing the series. */
function lyapunov(rows: number[][]): Matrix {
  const sum = zeros(2, 2);
  let M = [
    [1, 0],
    [0, 1],
  ];
  const times = (a: number[][], b: number[][]) =>
    a.map((row) => b[0].map((_, j) => row.reduce((s, v, k) => s + v * b[k][j], 0)));
  const transposed = (a: number[][]) => a[0].map((_, j) => a.map((row) => row[j]));
  for (let k = 0; k < 5000; k++) {
    const term = times(transposed(M), M).flat();
    for (let i = 0; i < 4; i++) sum.data[i] += term[i];
    M = times(M, rows);
  }
  return sum;
}

/** The problem with a given weight on z_N alone. */
function withTerminal(weight: Matrix) {
  const wide = zeros(3, 3);
  for (let i = 0; i < 2; i++) for (let j = 0; j < 2; j++) wide.data[i * 3 + j] = weight.data[i * 2 + j];
  return condenseQp(problem, wide, findTarget(problem.predictor, [true, true]));
}

/** Which rows are active at the optimum, over a grid of states: the regions of the explicit law. */
function countRegions(weight: Matrix): number {
  const qp = withTerminal(weight);
  const solver = createExactSolver(qp);
  const seen = new Set<string>();
  for (let a = -40; a <= 40; a++) {
    for (let b = -40; b <= 40; b++) {
      const x = [a / 10 + 0.013, b / 10 + 0.007];
      const q = Float64Array.from({ length: 2 }, (_, i) => F_at(qp, i, 0) * x[0] + F_at(qp, i, 1) * x[1]);
      const result = solver.solve(q, qp.Wl, qp.Wu);
      expect(result.status).toBe('optimal');
      seen.add(result.workingSet.join());
    }
  }
  return seen.size;
}

const F_at = (qp: ReturnType<typeof withTerminal>, i: number, j: number) => qp.F.data[i * qp.ntheta + j];

describe('the constrained regulator of Bemporad, Morari, Dua and Pistikopoulos, example 7.1', () => {
  it('has the terminal weight of the published equation, to the printed digits', () => {
    const sum = lyapunov(plant.A);
    for (let i = 0; i < 4; i++) expect(Math.abs(sum.data[i] - P.data[i])).toBeLessThan(6e-5);
  });

  it('condenses to the recomputed H and F to 1e-14', () => {
    const qp = withTerminal(lyapunov(plant.A));
    for (let i = 0; i < 2; i++) {
      for (let j = 0; j < 2; j++) {
        expect(qp.H.data[i * 2 + j]).toBeCloseTo(H[i][j], 14);
        expect(F_at(qp, i, j)).toBeCloseTo(F[j][i], 13);
      }
    }
  });

  it('condenses to the printed H and F after scaling by 2 / ‖H‖₂, to the printed digits', () => {
    const qp = withTerminal(lyapunov(plant.A));
    const scale = 2 / (qp.H.data[0] + qp.H.data[1]);
    for (let i = 0; i < 2; i++) {
      for (let j = 0; j < 2; j++) {
        expect(Math.abs(scale * qp.H.data[i * 2 + j] - printedH[i][j])).toBeLessThan(6e-5);
        expect(Math.abs(scale * F_at(qp, i, j) - printedF[j][i])).toBeLessThan(6e-5);
      }
    }
  });

  it('gives the published law: −[6.8355 6.8585] x inside the limits, ±2 outside', () => {
    const design = designController(problem);
    const qp = withTerminal(lyapunov(plant.A));
    const controller = createController({ ...design, qp }, bindIdentity(2), createExactSolver(qp), [0]);
    const reference = new Float64Array(4);
    for (const [x1, x2] of [
      [0.1, 0.05],
      [-0.2, 0.1],
      [0.12, -0.2],
    ]) {
      controller.reset();
      const { u, status } = controller.step([x1, x2], reference);
      expect(status).toBe('optimal');
      expect(Math.abs(u[0] + gain[0] * x1 + gain[1] * x2)).toBeLessThan(1e-4 * Math.hypot(x1, x2));
    }
    controller.reset();
    expect(controller.step([1, 1], reference).u[0]).toBeCloseTo(-2, 12);
    controller.reset();
    expect(controller.step([-1, -1], reference).u[0]).toBeCloseTo(2, 12);
  });

  it('has 5 regions, and 9 with the transposed equation, the slip that the corrigendum mends', () => {
    expect(countRegions(lyapunov(plant.A))).toBe(5);
    expect(
      countRegions(
        lyapunov([
          [0.7326, 0.1722],
          [-0.0861, 0.9909],
        ]),
      ),
    ).toBe(9);
  });
});

/*
 * Double integrator with horizon 2 and the terminal weight of the Riccati equation: from memory of the worked examples on
 * the explicit regulator, recomputed.
 */
describe('the double integrator with horizon 2', () => {
  const double = linearProblem(
    {
      A: [
        [1, 1],
        [0, 1],
      ],
      B: [[0], [1]],
    },
    {
      horizon: 2,
      Q: diagonal([1, 0]),
      S: fromRows([[0.1]]),
      R: fromRows([[0]]),
      terminal: 'riccati',
    },
  );

  it('has the recomputed P, H and gain', () => {
    const { P: weight, qp, K, notes } = designController(double);
    expect(notes.riccatiConverged).toBe(true);
    const expected = [2.142902347022638, 1.2245640609262467, 1.3995571393121802];
    const found = [weight.data[0], weight.data[1], weight.data[4]];
    for (let i = 0; i < 3; i++) expect(found[i]).toBeCloseTo(expected[i], 12);
    const H2 = [12.183175216374607, 5.248242400476846, 5.248242400476846, 2.999114278624356];
    for (let i = 0; i < 4; i++) expect(qp.H.data[i]).toBeCloseTo(H2[i], 11);
    expect(-K.data[0]).toBeCloseTo(-0.81662, 5);
    expect(-K.data[1]).toBeCloseTo(-1.7499, 4);
  });
});

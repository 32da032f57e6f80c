import { describe, expect, it } from 'vitest';
import { designController } from '../../src/mpc/design.ts';
import { findTarget } from '../../src/mpc/target.ts';
import { weighTerminal } from '../../src/mpc/terminal.ts';
import { apply, fromRows } from '../../src/numerics/matrix.ts';
import { linearProblem } from './linearProblem.ts';

/** A plant with the constant function as its last coordinate: x⁺ = 0.8 x + 0.5 u + 0.1. */
const affine = (() => {
  const problem = linearProblem(
    {
      A: [
        [0.8, 0.1],
        [0, 1],
      ],
      B: [[0.5], [0]],
      C: [[1, 0]],
    },
    { terminal: 'riccati', R: fromRows([[0.2]]) },
  );
  const { predictor } = problem;
  return { ...problem, predictor: { ...predictor, lifting: { ...predictor.lifting, constantIndex: 1 } } };
})();

describe('the terminal weight', () => {
  it('leaves the constant function out: its row and column are zero, and the equation converges', () => {
    const { P, converged, clippedModes } = weighTerminal(affine);
    expect([converged, clippedModes]).toEqual([true, 0]);
    for (let i = 0; i < 3; i++) expect([P.data[1 * 3 + i], P.data[i * 3 + 1]]).toEqual([0, 0]);
    expect(P.data[0]).toBeGreaterThan(1);
  });

  it('pulls in a mode at 1 that no input moves, and counts it', () => {
    const problem = linearProblem(
      {
        A: [
          [0.8, 0.1, 0],
          [0, 1, 0],
          [0, 0, 0.5],
        ],
        B: [[0.5], [0], [1]],
        C: [[1, 0, 0]],
      },
      { terminal: 'riccati' },
    );
    const { converged, clippedModes, residual } = weighTerminal(problem);
    expect([converged, clippedModes]).toEqual([true, 1]);
    expect(residual).toBeLessThan(1e-10);
  });

  it('pulls in a pair of oscillating modes outside the circle that no input moves', () => {
    const [c, s] = [1.02 * Math.cos(0.3), 1.02 * Math.sin(0.3)];
    const problem = linearProblem(
      {
        A: [
          [0.7, 0.2, 0],
          [0, c, s],
          [0, -s, c],
        ],
        B: [[0.5], [0], [0]],
        C: [[1, 0, 0]],
      },
      { terminal: 'riccati' },
    );
    const { converged, clippedModes } = weighTerminal(problem);
    expect([converged, clippedModes]).toEqual([true, 2]);
  });

  it('leaves an unstable mode alone that the input does move', () => {
    const problem = linearProblem({ A: [[1.3]], B: [[0.1]] }, { terminal: 'riccati' });
    expect(weighTerminal(problem)).toMatchObject({ converged: true, clippedModes: 0 });
  });

  it('is left out with a note when its equation has no stabilising solution', () => {
    // An output that never changes, however the input moves: its cost never ends.
    const problem = linearProblem(
      {
        A: [
          [1, 0],
          [0, 0.5],
        ],
        B: [[1e-8], [1]],
        C: [[1, 0]],
      },
      { terminal: 'riccati', R: fromRows([[0]]), S: fromRows([[0]]) },
    );
    const design = designController({ ...problem, R: fromRows([[0]]), S: fromRows([[0]]) });
    expect(design.notes.riccatiConverged).toBe(false);
    expect(design.P.data.every((value) => value === 0)).toBe(true);
  });
});

describe('the steady-state target', () => {
  it('rests there: z = A z + B u + d and C z = r, defining equation, the constant being 1', () => {
    const { Tz, Tu } = findTarget(affine.predictor, [true]);
    const given = [0.7, 0.02, 0, 1];
    const z = apply(Tz, given);
    const u = apply(Tu, given);
    expect(z[1]).toBe(1);
    expect(z[0]).toBeCloseTo(0.7, 13);
    expect(0.8 * z[0] + 0.1 + 0.5 * u[0] + 0.02).toBeCloseTo(z[0], 13);
  });

  it('leaves outputs alone that are not tracked', () => {
    const problem = linearProblem({
      A: [
        [0.5, 0],
        [0, 0.5],
      ],
      B: [[1], [1]],
    });
    const { Tz } = findTarget(problem.predictor, [true, false]);
    const z = apply(Tz, [0.4, 99, 0, 0, 1]);
    expect(z[0]).toBeCloseTo(0.4, 13);
    expect(z[1]).toBeCloseTo(0.4, 13);
  });
});

import { describe, expect, it } from 'vitest';
import { solveSquare } from '../../src/numerics/linearSolve.ts';
import { createRandom } from '../../src/numerics/random.ts';
import { OrthogonalFactor } from '../../src/qp/orthogonalFactor.ts';
import { prepareQp } from '../../src/qp/prepare.ts';
import { WorkingFactor } from '../../src/qp/workingFactor.ts';
import { structureOf } from '../helpers/qpJudge.ts';
import { drawProgram } from '../helpers/qpRandom.ts';

function prepare(seed: number, n: number) {
  return prepareQp(structureOf(drawProgram(createRandom(seed), 'soft', n, 100, 1).program));
}

/** `Q[W, W] out = right` by LU, a different factorisation. */
function solveByLu(Q: Float64Array, m: number, W: readonly number[], right: ArrayLike<number>) {
  const k = W.length;
  const block = Float64Array.from({ length: k * k }, (_, e) => Q[W[Math.floor(e / k)] * m + W[e % k]]);
  return solveSquare(
    { rows: k, cols: k, data: block },
    { rows: k, cols: 1, data: Float64Array.from({ length: k }, (_, j) => right[j]) },
  )!.data;
}

const differ = (a: ArrayLike<number>, b: ArrayLike<number>, k: number) => {
  let worst = 0;
  let size = 0;
  for (let i = 0; i < k; i++) {
    worst = Math.max(worst, Math.abs(a[i] - b[i]));
    size = Math.max(size, Math.abs(b[i]));
  }
  return size === 0 ? worst : worst / size;
};

describe('the dual matrix', () => {
  it('is S (G H⁻¹ Gᵀ + softness) S with a unit diagonal, by its definition', () => {
    const { program } = drawProgram(createRandom(41), 'soft', 12, 100, 1);
    const structure = structureOf(program);
    const { Q, scale, m, n } = prepareQp(structure);
    let worst = 0;
    for (let j = 0; j < m; j++) {
      const column = structure.G.data.slice(j * n, (j + 1) * n);
      const x = solveSquare(structure.H, { rows: n, cols: 1, data: column })!.data;
      for (let i = 0; i < m; i++) {
        let value = i === j ? structure.softness[i] : 0;
        for (let k = 0; k < n; k++) value += structure.G.data[i * n + k] * x[k];
        worst = Math.max(worst, Math.abs(Q[i * m + j] - scale[i] * value * scale[j]));
      }
      expect(Q[j * m + j]).toBe(1);
    }
    expect(worst).toBeLessThan(1e-13);
  });
});

describe('the LDLᵀ factor of a working set', () => {
  it('after 400 rows that come and go, singly and in groups, still solves as LU of the bare matrix does (twin)', () => {
    const random = createRandom(42);
    const { Q, m } = prepare(43, 14);
    const factor = new WorkingFactor(Q, m, m);
    const leave = new Uint8Array(m);
    let worst = 0;
    for (let step = 0; step < 400; step++) {
      const row = Math.floor(random() * m);
      const pick = random();
      if (pick < 0.6 && factor.place[row] < 0) factor.append(row, random() - 0.5, 1e-4);
      else if (pick < 0.8 && factor.k > 0) factor.removeAt(Math.floor(random() * factor.k));
      else if (pick < 0.9) {
        for (let j = 0; j < factor.k; j++) leave[j] = random() < 0.4 ? 1 : 0;
        factor.removeMarked(leave);
      } else factor.rebuild(Math.floor(random() * (factor.k + 1)));
      const W = Array.from(factor.rows.subarray(0, factor.k));
      expect(W.map((r) => factor.place[r])).toEqual(W.map((_, j) => j));
      if (factor.k === 0) continue;
      factor.solve();
      const twin = solveByLu(Q, m, W, factor.c);
      worst = Math.max(worst, differ(factor.mu, twin, factor.k));
      const objective = 0.5 * twin.reduce((sum, value, j) => sum + value * factor.c[j], 0);
      expect(Math.abs(factor.objective() - objective)).toBeLessThan(1e-9 * (1 + objective));
      // The shortfall of mu = 0 is the whole objective.
      expect(Math.abs(factor.shortfall(new Float64Array(m)) - objective)).toBeLessThan(
        1e-9 * (1 + objective),
      );
    }
    // Pivots are kept above 1e-4: errors grow by its inverse.
    expect(worst).toBeLessThan(1e-9);
  });

  it('refuses a row that depends on those at hand, and projects it on them with what is left (closed form)', () => {
    const { Q, m } = prepareQp(
      structureOf({
        H: [
          [1, 0],
          [0, 1],
        ],
        q: [0, 0],
        G: [
          [1, 0],
          [0, 1],
          [3, 4],
        ],
        lower: [0, 0, 0],
        upper: [1, 1, 1],
      }),
    );
    const factor = new WorkingFactor(Q, m, m);
    expect([factor.append(0, 1, 1e-7), factor.append(1, 1, 1e-7)]).toEqual([1, 1]);
    expect(Math.abs(factor.append(2, 1, 1e-7))).toBeLessThan(1e-15);
    expect(factor.k).toBe(2);
    const out = new Float64Array(m);
    expect(Math.abs(factor.project(out, 2))).toBeLessThan(1e-15);
    // (3, 4) has length 5: 0.6 and 0.8 of the unit rows.
    expect(differ(out, [0.6, 0.8], 2)).toBeLessThan(1e-15 * 2);
  });
});

describe('the orthogonal factor of a working set', () => {
  it('after 300 rows that come and go, projects and corrects as LU of the bare matrices does (twin)', () => {
    const random = createRandom(44);
    const qp = prepare(45, 10);
    const { Q, m, n, T } = qp;
    const set = new WorkingFactor(Q, m, m);
    const orthogonal = new OrthogonalFactor(qp, set);
    const out = new Float64Array(m);
    let worst = 0;
    for (let step = 0; step < 300; step++) {
      const row = Math.floor(random() * m);
      if (random() < 0.6 && set.place[row] < 0) orthogonal.append(row, 1e-2);
      else if (set.k > 0) orthogonal.removeAt(Math.floor(random() * set.k));
      if (set.k === 0) continue;
      const W = Array.from(set.rows.subarray(0, set.k));
      const outside = Array.from({ length: m }, (_, i) => i).find((i) => set.place[i] < 0)!;
      const left = orthogonal.project(out, outside);
      const wanted = solveByLu(
        Q,
        m,
        W,
        W.map((r) => Q[outside * m + r]),
      );
      worst = Math.max(worst, differ(out, wanted, set.k));
      const pivot = 1 - wanted.reduce((sum, value, j) => sum + value * Q[outside * m + W[j]], 0);
      worst = Math.max(worst, Math.abs(left * left - pivot));

      // dw + T̃ᵀ dmu = −r and T̃ dw = −p make Q[W, W] dmu = p − T r.
      const r = Float64Array.from({ length: n }, () => random() - 0.5);
      const p = Float64Array.from({ length: m }, () => random() - 0.5);
      const dmu = solveByLu(
        Q,
        m,
        W,
        W.map((w, j) => p[j] - r.reduce((sum, value, k) => sum + value * T[w * n + k], 0)),
      );
      const dw = r.map((value, k) => -value - W.reduce((sum, w, j) => sum + T[w * n + k] * dmu[j], 0));
      orthogonal.correct(r, p);
      worst = Math.max(worst, differ(p, dmu, set.k), differ(r, dw, n));
    }
    expect(worst).toBeLessThan(1e-9);
  });
});

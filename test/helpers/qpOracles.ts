import loadHighs from 'highs';
import type { Program } from './qpJudge.ts';

/** What an independent program says. */
export interface OracleAnswer {
  /** Its own verdict. */
  readonly solved: boolean;
  readonly x: readonly number[];
}

type SolveQp = (
  D: number[][],
  d: number[],
  A: number[][],
  b: number[],
  meq: number,
) => { solution: number[]; message: string };

/**
 * npm quadprog (B. A. Turlach's Fortran, after Goldfarb and Idnani): `min −dᵀx + ½ xᵀDx`, `Aᵀx ≥ b`, the first `meq` equalities;
 * arrays count from 1, each two-sided row becomes two. Hard rows only.
 */
export function createQuadprog(solveQp: SolveQp): (program: Program) => OracleAnswer {
  return ({ H, q, G, lower, upper }) => {
    const n = q.length;
    const sides: { row: number; sign: number; bound: number }[] = [];
    const add = (row: number, sign: number, bound: number) => sides.push({ row, sign, bound });
    G.forEach((_, i) => {
      if (lower[i] === upper[i]) add(i, 1, lower[i]);
    });
    const meq = sides.length;
    G.forEach((_, i) => {
      if (lower[i] === upper[i]) return;
      if (Number.isFinite(lower[i])) add(i, 1, lower[i]);
      if (Number.isFinite(upper[i])) add(i, -1, -upper[i]);
    });
    // It wants one row at least: 0 x ≥ −1.
    const none = sides.length === 0;
    const D = [[], ...H.map((row) => [0, ...row])];
    const A = [[], ...q.map((_, j) => [0, ...(none ? [0] : sides.map(({ row, sign }) => sign * G[row][j]))])];
    const b = [0, ...(none ? [-1] : sides.map(({ bound }) => bound))];
    const { solution, message } = solveQp(D, [0, ...q.map((value) => -value)], A, b, meq);
    const x = Array.from({ length: n }, (_, j) => solution[j + 1]);
    return { solved: message === '', x };
  };
}

/**
 * npm highs (HiGHS as WebAssembly), told the program as text. Hard rows only. It does not end on some programs: one second each.
 */
export async function createHighs(): Promise<(program: Program) => OracleAnswer> {
  const load = loadHighs as unknown as () => Promise<{
    solve: (
      text: string,
      options: object,
    ) => {
      Status: string;
      Columns: Record<string, { Primal: number }>;
    };
  }>;
  const highs = await load();
  return ({ H, q, G, lower, upper }) => {
    const n = q.length;
    const term = (value: number, name: string) => `${value < 0 ? '-' : '+'} ${Math.abs(value)} ${name}`;
    const squares: string[] = [];
    for (let i = 0; i < n; i++) {
      if (H[i][i] !== 0) squares.push(term(H[i][i], `x${i} ^2`));
      for (let j = 0; j < i; j++) if (H[i][j] !== 0) squares.push(term(2 * H[i][j], `x${i} * x${j}`));
    }
    const rows: string[] = [];
    G.forEach((row, i) => {
      const sum = row.flatMap((g, j) => (g === 0 ? [] : [term(g, `x${j}`)])).join(' ');
      if (sum === '') return;
      if (lower[i] === upper[i]) rows.push(`e${i}: ${sum} = ${lower[i]}`);
      else {
        if (Number.isFinite(lower[i])) rows.push(`l${i}: ${sum} >= ${lower[i]}`);
        if (Number.isFinite(upper[i])) rows.push(`u${i}: ${sum} <= ${upper[i]}`);
      }
    });
    if (rows.length === 0) rows.push('l0: + 0 x0 >= -1');
    const text = `Minimize
 obj: ${q.map((value, j) => term(value, `x${j}`)).join(' ')} + [ ${squares.join(' ')} ] / 2
Subject To
 ${rows.join('\n ')}
Bounds
 ${q.map((_, j) => `x${j} free`).join('\n ')}
End`;
    const answer = highs.solve(text, { output_flag: false, time_limit: 1 });
    return {
      solved: answer.Status === 'Optimal',
      x: q.map((_, j) => answer.Columns[`x${j}`]?.Primal ?? Number.NaN),
    };
  };
}

// npm quadprog and highs on single programs of the bench: the time of their solve alone, models built beforehand.
import loadHighs from 'highs';
import quadprog from 'quadprog';

const highs = await loadHighs();

/** Soft rows get a slack variable each: these programs know no other way. */
function withSlacks({ structure, n, m }) {
  const soft = Array.from({ length: m }, (_, i) => i).filter((i) => structure.softness[i] > 0);
  const size = n + soft.length;
  const H = (i, j) => {
    if (i < n && j < n) return structure.H.data[i * n + j];
    return i === j ? 1 / structure.softness[soft[i - n]] : 0;
  };
  const G = (i, j) => (j < n ? structure.G.data[i * n + j] : soft[j - n] === i ? 1 : 0);
  return { size, H, G };
}

/** @returns {{ ms: number, x: number[] | null }} */
export function timeQuadprog(sequence, [q, lower, upper]) {
  const { m } = sequence;
  const { size, H, G } = withSlacks(sequence);
  const index = Array.from({ length: size }, (_, i) => i);
  const sides = Array.from({ length: m }, (_, i) => [
    { i, sign: 1, bound: lower[i] },
    { i, sign: -1, bound: -upper[i] },
  ]).flat();
  const D = [[], ...index.map((i) => [0, ...index.map((j) => H(i, j))])];
  const A = [[], ...index.map((j) => [0, ...sides.map(({ i, sign }) => sign * G(i, j))])];
  const d = [0, ...index.map((j) => (j < q.length ? -q[j] : 0))];
  const b = [0, ...sides.map(({ bound }) => bound)];
  const start = performance.now();
  const { solution, message } = quadprog.solveQP(D, d, A, b, 0);
  return { ms: performance.now() - start, x: message === '' ? solution.slice(1, q.length + 1) : null };
}

/** @returns {{ ms: number, x: number[] | null }} */
export function timeHighs(sequence, [q, lower, upper]) {
  const { m } = sequence;
  const { size, H, G } = withSlacks(sequence);
  const index = Array.from({ length: size }, (_, i) => i);
  const term = (value, name) => `${value < 0 ? '-' : '+'} ${Math.abs(value)} ${name}`;
  const squares = index.flatMap((i) =>
    index
      .slice(0, i + 1)
      .map((j) => (i === j ? term(H(i, i), `x${i} ^2`) : term(2 * H(i, j), `x${i} * x${j}`))),
  );
  const rows = Array.from({ length: m }, (_, i) => {
    const sum = index.filter((j) => G(i, j) !== 0).map((j) => term(G(i, j), `x${j}`));
    return ` l${i}: ${sum.join(' ')} >= ${lower[i]}\n u${i}: ${sum.join(' ')} <= ${upper[i]}`;
  });
  const text = `Minimize
 obj: ${Array.from(q, (value, j) => term(value, `x${j}`)).join(' ')} + [ ${squares.join(' ')} ] / 2
Subject To
${rows.join('\n')}
Bounds
${index.map((j) => ` x${j} free`).join('\n')}
End`;
  const start = performance.now();
  try {
    const answer = highs.solve(text, { output_flag: false, time_limit: 5 });
    const x = answer.Status === 'Optimal' ? Array.from(q, (_, j) => answer.Columns[`x${j}`].Primal) : null;
    return { ms: performance.now() - start, x };
  } catch {
    return { ms: performance.now() - start, x: null };
  }
}

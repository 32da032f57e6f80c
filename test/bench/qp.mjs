// The solvers over closed-loop sequences with input, rate and output limits active: time a step, rounds, residuals; npm quadprog and
// highs on some of the steps, and one plain product G·U of the same size, in the same run.
import { createWarmStart } from '../../dist/mpc/warmStart.js';
import { applyInto } from '../../dist/numerics/matrix.js';
import { createExactSolver } from '../../dist/qp/exact.js';
import { createSplittingSolver } from '../../dist/qp/splitting.js';
import { heading, quantile, smoke } from './measure.mjs';
import { timeHighs, timeQuadprog } from './qpRivals.mjs';
import { createSequence } from './qpSequences.mjs';

const STEPS = smoke ? 40 : 300;
const PASSES = smoke ? 2 : 7;
/** Milliseconds of replays before those that count. */
const WARM_UP = smoke ? 0 : 300;
const HORIZONS = smoke ? [10, 20] : [10, 20, 40, 100];
const SIZES = smoke ? [10] : [10, 36, 100];
const SPLIT_ITERATIONS = 50;

const median = (values) => quantile(values, 0.5);
const tail = (values) => quantile(values, 0.95);
const most = (values) => values.reduce((a, b) => Math.max(a, b), 0);

heading(
  `QP solvers: ${STEPS} closed-loop steps a sequence, each step timed as the least of ${PASSES} replays`,
);
console.log(`First solve in this process (n 40, m 120, cold): ${firstSolve().toFixed(1)} ms`);
console.log(
  'sequence          |   n   m | active | exact: median, 95 %, worst us | rounds    | / G·U       | residual | quadprog | highs  | splitting 50: error median, 95 %, worst | outcomes',
);

const lines = [];
for (const nz of SIZES) {
  for (const nu of [1, 2]) {
    for (const N of HORIZONS) for (const soft of [true, false]) lines.push(bench({ nz, nu, N, soft }));
  }
}
summarise();

function bench(shape) {
  const { nz, nu, N, soft } = shape;
  const sequence = createSequence({ ...shape, seed: nz * 1000 + nu * 100 + N + (soft ? 1 : 0) });
  const { n, m, structure } = sequence;
  const solver = createExactSolver(structure);
  const split = createSplittingSolver(structure, { iterations: SPLIT_ITERATIONS });
  const warm = createWarmStart({ m, rows: sequence.rows }, solver);
  const steps = [];
  const points = [];
  const rounds = [];
  const splitErrors = [];
  const outcomes = {};
  let plan = new Float64Array(n);
  let active = 0;
  let residual = 0;
  sequence.drive((q, lower, upper) => {
    warm.prepare();
    const result = solver.solve(q, lower, upper);
    const approximate = split.solve(q, lower, upper);
    steps.push([q.slice(), lower.slice(), upper.slice()]);
    rounds.push(result.iterations);
    const optimal = result.status === 'optimal';
    points.push(optimal ? result.x.slice() : null);
    if (optimal) {
      warm.learn(result.workingSet);
      plan = result.x.slice();
      residual = Math.max(residual, judge(structure, q, lower, upper, result));
      splitErrors.push(differ(approximate.x, result.x));
      for (const side of result.workingSet) if (side !== 0) active++;
    } else {
      outcomes[result.status] = (outcomes[result.status] ?? 0) + 1;
      plan.copyWithin(0, nu);
    }
    return plan.subarray(0, nu);
  }, STEPS);

  const times = replay(steps, solver, warm);
  const product = timeProduct(structure.G, steps.length);
  const quadprog = rival(
    timeQuadprog,
    sequence,
    steps,
    points,
    times,
    quadprogSteps(n, soft ? m - 2 * n : 0),
  );
  const highs = rival(timeHighs, sequence, steps, points, times, n + (soft ? m - 2 * n : 0) <= 40 ? 3 : 0);
  const line = {
    name: `nz ${String(nz).padStart(3)} nu ${nu} N ${String(N).padStart(3)} ${soft ? 'soft' : 'hard'}`,
    n,
    ratio: median(times) / product,
    tailRatio: tail(times) / product,
    worst: most(times),
    worstRounds: most(rounds),
    residual,
    outcomes,
    quadprog,
    highs,
    split: median(splitErrors),
    splitTail: tail(splitErrors),
  };
  const us = (value) => value.toFixed(1).padStart(7);
  const power = (value) => value.toExponential(0).padStart(5);
  console.log(
    `${line.name} | ${String(n).padStart(3)} ${String(m).padStart(3)} | ${(active / steps.length).toFixed(1).padStart(6)} | ` +
      `${us(median(times))} ${us(tail(times))} ${us(line.worst)}       | ${String(median(rounds)).padStart(2)} ${String(tail(rounds)).padStart(2)} ${String(line.worstRounds).padStart(3)} | ` +
      `${line.ratio.toFixed(2).padStart(5)} ${line.tailRatio.toFixed(2).padStart(5)} | ${power(residual)}    | ` +
      `${tellRival(quadprog)} | ${tellRival(highs)} | ${power(line.split)} ${power(line.splitTail)} ${power(most(splitErrors))} | ${JSON.stringify(outcomes)}`,
  );
  return line;
}

/** Steps on which npm quadprog is asked: it takes seconds on the largest programs. */
function quadprogSteps(n, slacks) {
  if (n + slacks <= 40) return 25;
  if (n + slacks <= 100) return 8;
  return slacks === 0 ? 2 : 0;
}

/** Median ratio of a rival's time to ours over `count` steps spread over the sequence; how often its point is not the optimum. */
function rival(time, sequence, steps, points, times, count) {
  const ratios = [];
  let wrong = 0;
  for (let c = 0; c < (smoke ? Math.min(count, 2) : count); c++) {
    const t = Math.floor(((c + 0.5) * steps.length) / count);
    if (points[t] === null) continue;
    const { ms, x } = time(sequence, steps[t]);
    // The better of two, the code warm; the slow ones once.
    const again = ms < 100 ? time(sequence, steps[t]).ms : ms;
    ratios.push((1e3 * Math.min(ms, again)) / times[t]);
    if (x === null || !(differ(x, points[t]) < 1e-6)) wrong++;
  }
  return ratios.length === 0 ? null : { ratio: median(ratios), wrong, asked: ratios.length };
}

function tellRival(rivals) {
  if (rivals === null) return '       -';
  return `${rivals.ratio.toFixed(0).padStart(5)}${rivals.wrong > 0 ? `!${rivals.wrong}` : '  '}`;
}

function summarise() {
  const of = (condition) => lines.filter(condition);
  const worstOf = (list, key) => list.reduce((a, b) => (b[key] > a[key] ? b : a), list[0]);
  const tell = (list, key, target) => {
    if (list.length === 0) return 'no sequence of this size';
    const worst = worstOf(list, key);
    const over = list.filter((line) => !(line[key] <= target)).length;
    return `median ${median(list.map((line) => line[key])).toPrecision(3)}, largest ${worst[key].toPrecision(3)} (${worst.name}); above ${target}: ${over} of ${list.length}`;
  };
  const large = of(({ n }) => n >= 40);
  console.log(`\nn ≥ 40: median step / G·U    ${tell(large, 'ratio', 3)}`);
  console.log(`n ≥ 40: 95 % step / G·U      ${tell(large, 'tailRatio', 8)}`);
  console.log(`residual, relative           ${tell(lines, 'residual', 1e-12)}`);
  for (const [title, list] of [
    ['n = 10', of(({ n, quadprog }) => n === 10 && quadprog)],
    ['n ≥ 20', of(({ n, quadprog }) => n >= 20 && quadprog)],
  ]) {
    const ratios = list.map(({ quadprog }) => quadprog.ratio);
    if (ratios.length === 0) continue;
    const wrong = list.reduce((sum, { quadprog }) => sum + quadprog.wrong, 0);
    const asked = list.reduce((sum, { quadprog }) => sum + quadprog.asked, 0);
    console.log(
      `npm quadprog / exact, ${title}  least ${Math.min(...ratios).toFixed(0)}, median ${median(ratios).toFixed(0)}, largest ${most(ratios).toFixed(0)}; not the optimum: ${wrong} of ${asked}`,
    );
  }
  const told = of(({ highs }) => highs).map(({ highs }) => highs.ratio);
  if (told.length > 0) {
    console.log(
      `npm highs / exact            least ${Math.min(...told).toFixed(0)}, median ${median(told).toFixed(0)}`,
    );
  }
  console.log(`splitting, ${SPLIT_ITERATIONS} iterations, median error ${tell(lines, 'split', 1e-3)}`);
  console.log(`splitting, ${SPLIT_ITERATIONS} iterations, 95 % error   ${tell(lines, 'splitTail', 1e-3)}`);
  const slow = worstOf(lines, 'worst');
  console.log(
    `worst step: ${slow.worst.toFixed(0)} us, ${slow.name}, up to ${slow.worstRounds} rounds: a jump of the reference that makes most limits active at once`,
  );
  const failed = lines.filter(({ outcomes }) => outcomes.failed || outcomes['iteration-limit']).length;
  console.log(
    `sequences with a failed or unfinished solve: ${failed}; heap growth a solve: ${heapGrowth().toFixed(1)} bytes`,
  );
}

/** Least microseconds of each step over some replays of the whole sequence, after warm-up. */
function replay(steps, solver, warm) {
  const least = new Array(steps.length).fill(Number.POSITIVE_INFINITY);
  const begun = performance.now();
  for (let pass = 0; pass < PASSES; pass++) {
    if (pass === 0) least.fill(Number.POSITIVE_INFINITY);
    warm.reset();
    for (let t = 0; t < steps.length; t++) {
      const step = steps[t];
      const start = performance.now();
      warm.prepare();
      const result = solver.solve(step[0], step[1], step[2]);
      const end = performance.now();
      if (result.status === 'optimal') warm.learn(result.workingSet);
      least[t] = Math.min(least[t], 1e3 * (end - start));
    }
    if (performance.now() - begun < WARM_UP) pass = -1;
  }
  return least;
}

/** Median microseconds of one dense product with G. */
function timeProduct(G, count) {
  const v = new Float64Array(G.cols).fill(0.3);
  const out = new Float64Array(G.rows);
  const least = new Array(count).fill(Number.POSITIVE_INFINITY);
  for (let pass = 0; pass < PASSES; pass++) {
    for (let t = 0; t < count; t++) {
      const start = performance.now();
      applyInto(out, G, v);
      least[t] = Math.min(least[t], 1e3 * (performance.now() - start));
      v[0] += 1e-9 * out[0];
    }
  }
  return median(least);
}

/** Optimality conditions from their definition, apart from the solver: each relative to the size of its own terms. */
function judge({ H, G, softness }, q, lower, upper, { x, multipliers }) {
  const n = H.rows;
  const size = most(x.map(Math.abs));
  let stationarity = 0;
  let terms = 0;
  for (let i = 0; i < n; i++) {
    let sum = q[i];
    let all = Math.abs(q[i]);
    for (let j = 0; j < n; j++) {
      sum += H.data[i * n + j] * x[j];
      all += Math.abs(H.data[i * n + j] * x[j]);
    }
    for (let j = 0; j < G.rows; j++) {
      sum += G.data[j * n + i] * multipliers[j];
      all += Math.abs(G.data[j * n + i] * multipliers[j]);
    }
    stationarity = Math.max(stationarity, Math.abs(sum));
    terms = Math.max(terms, all);
  }
  let worst = stationarity / terms;
  for (let i = 0; i < G.rows; i++) {
    const slack = -softness[i] * multipliers[i];
    let value = slack;
    let row = 0;
    for (let j = 0; j < n; j++) {
      value += G.data[i * n + j] * x[j];
      row = Math.max(row, Math.abs(G.data[i * n + j]));
    }
    const bound = multipliers[i] > 0 || value > upper[i] ? upper[i] : lower[i];
    const off =
      multipliers[i] === 0 ? Math.max(0, value - upper[i], lower[i] - value) : Math.abs(value - bound);
    if (off > 0) worst = Math.max(worst, off / (Math.abs(bound) + row * size + Math.abs(slack)));
  }
  return worst;
}

/** Largest difference relative to the largest entry of `b`. */
function differ(a, b) {
  let size = 0;
  let apart = 0;
  for (let i = 0; i < b.length; i++) {
    size = Math.max(size, Math.abs(b[i]));
    apart = Math.max(apart, Math.abs(a[i] - b[i]));
  }
  return apart / size;
}

/** Milliseconds of the very first solve, its solver prepared. */
function firstSolve() {
  const sequence = createSequence({ nz: 10, nu: 1, N: 40, soft: true, seed: 1 });
  const solver = createExactSolver(sequence.structure);
  let taken = 0;
  sequence.drive((q, lower, upper) => {
    const start = performance.now();
    const { x } = solver.solve(q, lower, upper);
    taken = performance.now() - start;
    return x.subarray(0, 1);
  }, 1);
  return taken;
}

/** Bytes by which the heap grows a solve, once the code is compiled; the collector stays out of so short a run. */
function heapGrowth() {
  const sequence = createSequence({ nz: 10, nu: 1, N: 20, soft: true, seed: 2 });
  const solver = createExactSolver(sequence.structure);
  const steps = [];
  sequence.drive((q, lower, upper) => {
    steps.push([q.slice(), lower.slice(), upper.slice()]);
    return solver.solve(q, lower, upper).x.subarray(0, 1);
  }, 100);
  const growth = [];
  for (let pass = 0; pass < 60; pass++) {
    const before = process.memoryUsage().heapUsed;
    for (let t = 0; t < steps.length; t++) solver.solve(steps[t][0], steps[t][1], steps[t][2]);
    growth.push((process.memoryUsage().heapUsed - before) / steps.length);
  }
  return median(growth.slice(20));
}

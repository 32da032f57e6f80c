import quadprog from 'quadprog';
import { beforeAll, describe, expect, it } from 'vitest';
import { createRandom, deriveSeed } from '../../src/numerics/random.ts';
import { createExactSolver } from '../../src/qp/exact.ts';
import type { QpResult } from '../../src/qp/qp.ts';
import { dataOf, judge, type Program, structureOf } from '../helpers/qpJudge.ts';
import { createHighs, createQuadprog, type OracleAnswer } from '../helpers/qpOracles.ts';
import { drawProgram, drawSize, KINDS, type Kind } from '../helpers/qpRandom.ts';

/** Ours: every condition to this, relative to its terms. */
const OURS = 2e-12;
/**
 * An oracle's word counts where its own point meets the conditions (with our multipliers) to this: both were seen to call points
 * optimal that are not, on badly scaled data.
 */
const ORACLE = 1e-6;

const HARD = KINDS.filter((kind) => kind !== 'soft');

function drawHostile(seed: number, kind: Kind, mostSize: number, mostDigits: number) {
  const random = createRandom(seed);
  const n = drawSize(random, mostSize);
  const condition = 10 ** (mostDigits * random() ** 2);
  const scale = random() < 0.5 ? 1 : 10 ** (18 * random() - 9);
  return drawProgram(random, kind, n, condition, scale).program;
}

/** `(x − y)ᵀ H (x − y)` relative to the terms of `xᵀHx`: how far costs can differ. */
function distance({ H }: Program, x: ArrayLike<number>, y: ArrayLike<number>): number {
  let sum = 0;
  let terms = 0;
  for (let i = 0; i < H.length; i++) {
    for (let j = 0; j < H.length; j++) {
      sum += H[i][j] * (x[i] - y[i]) * (x[j] - y[j]);
      terms += Math.abs(H[i][j] * x[i] * x[j]);
    }
  }
  return sum === 0 ? 0 : Math.abs(sum) / terms;
}

interface Tally {
  asked: number;
  /** Answers of the oracle that meet the conditions. */
  fit: number;
  worstDistance: number;
  worstOurs: number;
  notOptimal: number;
}

function compare(
  programs: Iterable<Program>,
  ask: (program: Program, ours: QpResult) => OracleAnswer,
): Tally {
  const tally: Tally = { asked: 0, fit: 0, worstDistance: 0, worstOurs: 0, notOptimal: 0 };
  for (const program of programs) {
    const ours = createExactSolver(structureOf(program)).solve(...dataOf(program));
    if (ours.status !== 'optimal') tally.notOptimal++;
    tally.worstOurs = Math.max(tally.worstOurs, judge(program, ours.x, ours.multipliers));
    tally.asked++;
    let theirs: OracleAnswer;
    try {
      theirs = ask(program, ours);
    } catch {
      // The oracle gave up on the program: it is judged by its conditions alone.
      continue;
    }
    if (!theirs.solved || !(judge(program, theirs.x, ours.multipliers) <= ORACLE)) continue;
    tally.fit++;
    tally.worstDistance = Math.max(tally.worstDistance, distance(program, ours.x, theirs.x));
  }
  return tally;
}

function* hostile(kind: Kind, count: number, mostSize: number, mostDigits: number): Generator<Program> {
  for (let i = 0; i < count; i++) yield drawHostile(deriveSeed(20, kind, i), kind, mostSize, mostDigits);
}

describe('the exact solver against npm quadprog, an independent program', () => {
  const ask = createQuadprog(quadprog.solveQP);
  for (const kind of HARD) {
    it(`250 ${kind} programs, n up to 100, condition to 1e12, data scaled by 1e±9: the same points, ours meeting the conditions to 2e-12`, () => {
      const tally = compare(hostile(kind, 250, 100, 12), ask);
      expect(tally.notOptimal).toBe(0);
      expect(tally.worstOurs).toBeLessThan(OURS);
      expect(tally.worstDistance).toBeLessThan(1e-9);
      // It rejects many programs with dependent or degenerate rows; of the others it solves nearly all.
      const hard = kind === 'degenerate' || kind === 'dependent equality';
      expect(tally.fit).toBeGreaterThan(hard ? 75 : 225);
    });
  }
});

describe('the exact solver against npm highs, an independent program', () => {
  let ask: (program: Program) => OracleAnswer;
  beforeAll(async () => {
    ask = await createHighs();
  });
  for (const kind of HARD) {
    it(`25 ${kind} programs, n up to 20, condition to 1e6: the same points, ours meeting the conditions to 2e-12`, () => {
      const tally = compare(hostile(kind, 25, 20, 6), (program) => ask(program));
      expect(tally.notOptimal).toBe(0);
      expect(tally.worstOurs).toBeLessThan(OURS);
      // Its own tolerances are 1e-7.
      expect(tally.worstDistance).toBeLessThan(1e-7);
      expect(tally.fit).toBeGreaterThan(12);
    });
  }
});

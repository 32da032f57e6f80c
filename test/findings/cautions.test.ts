import { describe, expect, it } from 'vitest';
import { measureExcitation } from '../../src/data/coverage.ts';
import { withUnit } from '../../src/findings/figures.ts';
import { checkCautions, findCautions } from '../../src/findings/findCautions.ts';
import { STANDING_HAZARDS } from '../../src/findings/hazards.ts';
import { CAUTION_RULES } from '../../src/findings/table.ts';
import { CASES, COUNTED, LOST, STANDING } from './cases.ts';
import { all, type Change, data, infeasible, limit, rough, solves, states } from './changes.ts';
import { pendulum, smallResult } from './smallResult.ts';

describe('the table of cautions', () => {
  const codes = CAUTION_RULES.map(({ code }) => code);

  it('has every code once, and a case and a lost number for every rule that judges one', () => {
    expect(new Set(codes).size).toBe(codes.length);
    expect(new Set([...CASES.map(({ code }) => code), ...STANDING])).toEqual(new Set(codes));
    expect(new Set([...Object.keys(LOST), ...COUNTED])).toEqual(new Set(codes));
  });

  it.each(CASES)('$code is silent at its threshold and speaks beyond it as $severity ($value)', (row) => {
    const codesOf = (change: Change) => findCautions(change(smallResult())).map(({ code }) => code);
    expect(codesOf(row.fine)).not.toContain(row.code);
    const found = findCautions(row.beyond(smallResult())).filter(({ code }) => code === row.code);
    expect(found).toHaveLength(1);
    const [caution] = found;
    expect(caution.severity).toBe(row.severity);
    expect(caution.unit).toBe(row.unit ?? '1');
    if (Number.isFinite(row.value)) expect(caution.value).toBeCloseTo(row.value, 9);
    else expect(caution.value).toBe(row.value);
    expect(caution.sentence).toContain(withUnit(row.value, row.unit ?? '1'));
    expect(caution.sentence).toMatch(/^[A-Z0-9].*[.:?]$/s);
    expect(caution.sentence).not.toMatch(/undefined|null|not a number|\[object/);
    expect(caution.whatToDo).toMatch(/\w+.*\.$/);
  });

  it.each(Object.entries(LOST))(
    'a number lost in the record of %s is never silence, and an error where it is the number judged',
    (code, lose) => {
      const found = findCautions(lose(smallResult())).filter((caution) => caution.code === code);
      expect(found.length).toBeGreaterThan(0);
      // Its figure is already infinite where an input is not a number.
      const due = code === 'weak-excitation' ? 'warning' : 'error';
      expect(found.every(({ severity }) => severity === due)).toBe(true);
    },
  );

  it('a calm study leaves only the notes that always stand: the hazards, each hazard of the plant, and simulation only', () => {
    const { cautions, inOrder, notApplicable } = checkCautions(smallResult());
    expect(cautions.map(({ code }) => code)).toEqual([
      'hazards',
      'plant-hazard',
      'plant-hazard',
      'simulation-only',
    ]);
    expect(cautions.every(({ severity, value }) => severity === 'note' && value === null)).toBe(true);
    for (const sentence of STANDING_HAZARDS) expect(cautions[0].sentence).toContain(sentence);
    expect(cautions.slice(1, 3).map(({ sentence }) => sentence)).toEqual(pendulum.hazards);
    const seen = [
      ...new Set(cautions.map(({ code }) => code)),
      ...inOrder.map(({ code }) => code),
      ...notApplicable,
    ];
    expect(new Set(seen)).toEqual(new Set(codes));
    expect(seen).toHaveLength(codes.length);
    expect(notApplicable).toEqual(['terminal-weight-left-out', 'modes-clipped']);
    for (const { meaning } of inOrder) expect(meaning).toMatch(/\w/);
  });

  it('errors come before warnings and these before notes, whatever is wrong, in the order of the table', () => {
    const worst = all(...CASES.filter(({ code }) => code !== 'rivals-missing').map(({ beyond }) => beyond))(
      smallResult(),
    );
    const found = findCautions(worst);
    const rank = ['error', 'warning', 'note'];
    const keys = found.map(({ severity, code }) => 100 * rank.indexOf(severity) + codes.indexOf(code));
    expect(keys).toEqual([...keys].sort((a, b) => a - b));
    expect(found.length).toBeGreaterThan(20);
  });

  it('every limit and every solve that failed is told with count, worst, longest and what was applied', () => {
    const broken = limit(3, { count: 2, worst: 0.1, worstOfRange: 0.00125, longest: 0.04, first: 0.5 });
    const [rate] = findCautions(broken(smallResult()));
    expect(rate.sentence).toBe(
      'The hard limit on the rate of torque was broken 2 times, by at most 0.1 N m/s (0.125 % of the range), for 0.04 s at the longest, first at 0.5 s.',
    );
    const [solve] = findCautions(solves(3, infeasible(3, 'held'))(smallResult()));
    expect(solve.sentence).toContain('3 solves of 40 did not end at an optimum (3 infeasible)');
    expect(solve.sentence).toContain('the last input, held, 3 times');
  });

  it('inputs count as weakly exciting exactly when the condition of their last values passes 1000 (defining equation: measured apart)', () => {
    // A slow wave with a little roughness: the less of it, the worse the condition.
    const seen = { under: 0, over: 0 };
    for (let share = 0.002; share < 0.02; share *= 1.03) {
      const changed = data(states(1), (k) => Math.sin(k / 40) + share * rough(k))(smallResult());
      const { lagCondition } = measureExcitation(changed.dataset);
      const speaks = findCautions(changed).some(({ code }) => code === 'weak-excitation');
      expect(speaks).toBe(lagCondition > 1000);
      if (lagCondition > 900 && lagCondition <= 1000) seen.under++;
      if (lagCondition > 1000 && lagCondition < 1100) seen.over++;
    }
    expect(seen.under).toBeGreaterThan(0);
    expect(seen.over).toBeGreaterThan(0);
  });

  it('a study without any loop is judged by what there is', () => {
    const { notApplicable, cautions } = checkCautions({ ...smallResult(), runs: [] });
    expect(notApplicable).toContain('loop-diverged');
    expect(cautions.map(({ code }) => code)).toContain('hazards');
  });
});

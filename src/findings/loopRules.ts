import type { LimitReport } from '../loop/record.ts';
import { formatFigure, withUnit } from './figures.ts';
import { type CautionRule, defineRule, type Facts } from './rule.ts';
import { THRESHOLDS } from './thresholds.ts';

/** A limit and whether it may give way. */
type JudgedLimit = LimitReport & { readonly soft: boolean };

/** Inputs and rates are hard; an output limit is what the problem says, hard if it is not found there. */
function judgeLimits({ lifted, result }: Facts): JudgedLimit[] {
  const { outputLimits, predictor } = result.design.problem;
  return (lifted?.report.limits ?? []).map((limit) => {
    const own = outputLimits.find(
      ({ output, min, max }) =>
        predictor.outputs[output].name === limit.channel && min === limit.min && max === limit.max,
    );
    return { ...limit, soft: limit.kind === 'output' && own !== undefined && own.weight < Infinity };
  });
}

/** What happened in the closed loop of the study's own controller. */
export const LOOP_RULES: readonly CautionRule[] = [
  defineRule({
    code: 'loop-diverged',
    meaning: 'end of the closed loop, reached with finite signals',
    measure: ({ lifted }) => {
      if (!lifted) return [];
      const { steps, sampleTime, cost, diverged, x, y, u } = lifted.record;
      const finite =
        Number.isFinite(cost.total) && [x, y, u].every((signal) => signal.every(Number.isFinite));
      return [{ value: steps * sampleTime, unit: 's', of: diverged || !finite }];
    },
    inOrder: (_, gone) => !gone,
    severity: 'error',
    sentence: (figure) =>
      `The closed loop diverged: after ${figure} the plant had left all bounds or its signals were no numbers any more.`,
    whatToDo:
      'Do not use this controller. Look at trust, the data region left, the delay and infeasible solves; soften hard output limits, raise the weight on moves.',
  }),
  defineRule({
    code: 'limit-broken',
    meaning: 'worst excess over each limit, between the samples too',
    measure: (facts) => judgeLimits(facts).map((of) => ({ value: of.worst, unit: of.unit, of })),
    inOrder: (_, { count }) => count === 0,
    severity: (_, { soft, worstOfRange }) =>
      soft && worstOfRange <= THRESHOLDS.softExcess ? 'warning' : 'error',
    sentence: (figure, { of }) => {
      const name = of.kind === 'rate' ? `rate of ${of.channel}` : of.channel;
      const times = of.count === 1 ? 'once' : `${formatFigure(of.count)} times`;
      const first = of.first === null ? '' : `, first at ${withUnit(of.first, 's')}`;
      return `The ${of.soft ? 'soft' : 'hard'} limit on the ${name} was broken ${times}, by at most ${figure} (${formatFigure(100 * of.worstOfRange)} % of the range), for ${withUnit(of.longest, 's')} at the longest${first}.`;
    },
    whatToDo:
      'Tighten the limit in the study by this excess, raise its weight, look further ahead, or lower the demand of the reference; the independent limits of the machine must hold in any case.',
  }),
  defineRule({
    code: 'acceptance-missed',
    meaning: "what was reached of each of the study's acceptance limits",
    measure: ({ result }) => result.acceptance.map((of) => ({ value: of.reached, unit: of.unit, of })),
    inOrder: (_, { met }) => met,
    severity: 'error',
    sentence: (figure, { of }) =>
      `The acceptance limit on ${of.name} was missed: ${figure} reached, ${withUnit(of.limit, of.unit)} allowed.`,
    whatToDo: 'Improve the controller, or change the acceptance limit with a reason that is written down.',
  }),
  defineRule({
    code: 'solves-not-optimal',
    meaning: 'solves that did not end at an optimum',
    measure: ({ lifted }) => {
      if (!lifted) return [];
      const { record, report } = lifted;
      return [{ value: report.notOptimal, unit: report.notOptimal === 1 ? 'solve' : 'solves', of: record }];
    },
    inOrder: (count) => count === 0,
    severity: (count, { steps, fallback }) =>
      count > THRESHOLDS.notOptimal * steps || fallback.includes('held') ? 'error' : 'warning',
    sentence: (figure, { of }) => {
      const count = <T>(values: readonly T[], value: T) => values.filter((other) => other === value).length;
      const reasons = (['infeasible', 'iteration-limit', 'failed'] as const)
        .map((status) => [count(of.status, status), status.replace('-', ' ')] as const)
        .filter(([times]) => times > 0)
        .map(([times, status]) => `${times} ${status}`);
      const shifted = count(of.fallback, 'shifted-plan');
      const held = count(of.fallback, 'held');
      return `${figure} of ${of.steps} did not end at an optimum (${reasons.join(', ') || 'reason not recorded'}). Applied instead: the last plan, shifted, ${shifted} times; the last input, held, ${held} times.`;
    },
    whatToDo:
      'Soften hard output limits (give them a weight), impose them from a later step on, or widen them; the target must have the same fallback.',
  }),
  defineRule({
    code: 'input-chatter',
    meaning: 'reversals of each input',
    measure: ({ lifted }) =>
      (lifted?.report.effort ?? []).map((of) => ({
        value: of.reversals,
        unit: '1/s',
        of: { ...of, lifted },
      })),
    inOrder: (reversals, { lifted }) =>
      reversals * (lifted?.record.sampleTime ?? 0) <= THRESHOLDS.reversalsPerSample,
    severity: 'warning',
    sentence: (figure, { value, of }) =>
      `The input ${of.input} chatters (${figure}): at ${formatFigure(100 * value * (of.lifted?.record.sampleTime ?? 0))} % of the samples it reverses by more than 1 % of its range.`,
    whatToDo:
      'Raise the weight on moves of this input or lower controller.disturbanceGain; check sensor noise and wear of the actuator.',
  }),
  defineRule({
    code: 'input-at-limit',
    meaning: 'share of steps with each input at its limit',
    measure: ({ lifted }) =>
      (lifted?.report.effort ?? []).map((of) => ({ value: 100 * of.atLimit, unit: '%', of })),
    inOrder: (percent) => percent <= 100 * THRESHOLDS.atLimit,
    severity: 'warning',
    sentence: (figure, { of }) =>
      `The input ${of.input} is at its limit at ${figure} of the steps: the actuator has no reserve for disturbances.`,
    whatToDo: 'Ask less of the reference, or choose a stronger actuator.',
  }),
  defineRule({
    code: 'offset-left',
    meaning: 'offset left on each output at the end of its last constant reference',
    measure: ({ lifted, result }) =>
      (lifted?.report.tracking ?? []).flatMap((of) => {
        if (of.offset === null) return [];
        const channel = result.plant.outputs.find(({ name }) => name === of.output);
        const half = channel ? (channel.max - channel.min) / 2 : Number.NaN;
        return [{ value: of.offset, unit: of.unit, of: { ...of, half } }];
      }),
    inOrder: (offset, { half }) => Math.abs(offset) <= THRESHOLDS.offset * half,
    severity: 'warning',
    sentence: (figure, { value, of }) =>
      `An offset of ${figure} is left on ${of.output} at the end of its last constant reference (${formatFigure((100 * Math.abs(value)) / of.half)} % of the half range).`,
    whatToDo:
      'Give controller.disturbanceGain a value above 0, take weights off the input level, check that the reference can be reached within the limits and had time to settle.',
  }),
];

import type { Caution } from '../../findings/caution.ts';
import type { LoopRun, StudyResult } from '../../findings/studyResult.ts';
import {
  CONTROLLER_WORDS,
  formatFigure,
  list,
  percent,
  plural,
  sentenceCase,
  stepsAhead,
  withUnit,
} from '../words.ts';

/** One line of the verdict: a word for good or bad, and the sentence. */
export interface VerdictLine {
  readonly standing: 'good' | 'bad' | 'open';
  readonly about: string;
  readonly sentence: string;
}

/** The first lines of the report, in plain sentences. */
export function writeVerdict(result: StudyResult, cautions: readonly Caution[]): VerdictLine[] {
  return [
    aboutLifting(result),
    aboutTrust(result),
    ...aboutCost(result),
    aboutLimits(result),
    ...aboutAcceptance(result),
    aboutCautions(cautions),
  ];
}

function aboutLifting({ trust, sampleTime, design }: StudyResult): VerdictLine {
  const { helps, ratio, upTo } = trust.lifting;
  const horizon = stepsAhead(Math.min(design.problem.horizon, trust.steps.length), sampleTime);
  const error = `over ${horizon} its error is ${formatFigure(ratio)} times that of plain linear regression`;
  const floor = `${formatFigure(trust.ratioToFloor)} times the floor`;
  if (helps) {
    return {
      standing: 'good',
      about: 'Lifting',
      sentence: `Lifting helps: ${error} and ${floor}; it is better up to ${stepsAhead(upTo, sampleTime)} ahead.`,
    };
  }
  return {
    standing: 'bad',
    about: 'Lifting',
    sentence: `Lifting does not help here: ${error}. Plain linear regression is simpler and as good.`,
  };
}

function aboutTrust({ trust, sampleTime, design }: StudyResult): VerdictLine {
  const { tolerance, trustedSteps, steps } = trust;
  const { horizon } = design.problem;
  const within = `${percent(tolerance)} of half range`;
  if (trustedSteps === 0) {
    return {
      standing: 'bad',
      about: 'Trust',
      sentence: `Not even one step ahead is predicted within ${within}; the controller looks ${stepsAhead(horizon, sampleTime)} ahead.`,
    };
  }
  const all = trustedSteps === steps.length ? 'all ' : '';
  return {
    standing: trustedSteps >= Math.min(horizon, steps.length) ? 'good' : 'bad',
    about: 'Trust',
    sentence: `Held-out predictions stay within ${within} for ${all}${stepsAhead(trustedSteps, sampleTime)}; the controller looks ${stepsAhead(horizon, sampleTime)} ahead.`,
  };
}

function aboutCost({ runs }: StudyResult): VerdictLine[] {
  const [own, ...rivals] = runs;
  const cost = ({ record }: LoopRun) => formatFigure(record.cost.total);
  if (own.record.diverged) {
    const after = withUnit(own.record.steps * own.record.sampleTime, 's');
    return [
      {
        standing: 'bad',
        about: 'Loop',
        sentence: `The closed loop diverged and was stopped after ${after}.`,
      },
    ];
  }
  const compared = rivals.map((run) => {
    const ratio = run.record.cost.total / own.record.cost.total;
    const astray = run.record.diverged ? ', and diverged' : '';
    return `${CONTROLLER_WORDS[run.name]} costs ${cost(run)} (${formatFigure(ratio)} times${astray})`;
  });
  const tracking = runs.map(({ record }) => formatFigure(record.cost.tracking));
  const beaten = rivals.every(({ record }) => record.diverged || record.cost.total > own.record.cost.total);
  const beside = compared.length > 0 ? `; under the same scenario ${list(compared)}` : '';
  return [
    {
      standing: rivals.length === 0 ? 'open' : beaten ? 'good' : 'bad',
      about: 'Cost',
      sentence: `The closed loop of ${CONTROLLER_WORDS.lifted} costs ${cost(own)}${beside}. Of this, tracking errors cost ${list(tracking)}; the rest is limit excess and input moves.`,
    },
  ];
}

function aboutLimits({ runs }: StudyResult): VerdictLine {
  const { limits } = runs[0].report;
  const broken = limits.filter(({ count }) => count > 0);
  if (broken.length === 0) {
    return {
      standing: limits.length > 0 ? 'good' : 'open',
      about: 'Limits',
      sentence:
        limits.length > 0
          ? `None of the ${plural(limits.length, 'limit')} is broken, between the samples neither.`
          : 'The study sets no limit.',
    };
  }
  const told = broken.map(({ kind, channel, count, worst, worstOfRange, longest, unit }) => {
    const named = kind === 'rate' ? `rate of ${channel}` : channel;
    return `${named} ${plural(count, 'time')} (worst by ${withUnit(worst, unit)}, ${percent(worstOfRange)} of the range; longest ${withUnit(longest, 's')})`;
  });
  return {
    standing: 'bad',
    about: 'Limits',
    sentence: `${broken.length} of ${plural(limits.length, 'limit')} broken: ${list(told)}.`,
  };
}

function aboutAcceptance({ acceptance }: StudyResult): VerdictLine[] {
  if (acceptance.length === 0) return [];
  const missed = acceptance.filter(({ met }) => !met);
  if (missed.length === 0) {
    return [
      {
        standing: 'good',
        about: 'Acceptance',
        sentence:
          acceptance.length === 1
            ? 'The acceptance limit of the study is met.'
            : `All ${acceptance.length} acceptance limits of the study are met.`,
      },
    ];
  }
  const told = missed.map(
    ({ name, reached, limit, unit }) =>
      `${name} ${figure(reached, unit)} where ${figure(limit, unit)} is allowed`,
  );
  return [{ standing: 'bad', about: 'Acceptance', sentence: `${sentenceCase(list(told))}.` }];
}

/** A pure number is a share of a range. */
export function figure(value: number, unit: string): string {
  return unit === '1' ? percent(value) : withUnit(value, unit);
}

function aboutCautions(cautions: readonly Caution[]): VerdictLine {
  const count = (severity: Caution['severity']) =>
    cautions.filter((caution) => caution.severity === severity).length;
  const [errors, warnings] = [count('error'), count('warning')];
  return {
    standing: errors > 0 ? 'bad' : warnings > 0 ? 'open' : 'good',
    about: 'Cautions',
    sentence: `${plural(errors, 'error')} and ${plural(warnings, 'warning')} to be read before anything is built on this result.`,
  };
}

import { SUBSTEP_TOLERANCE } from '../plant/substeps.ts';
import { formatFigure, plural, withUnit } from './figures.ts';
import { type CautionRule, defineRule, one } from './rule.ts';
import { THRESHOLDS } from './thresholds.ts';

/** What the controller's set-up and the simulation rest on. */
export const CONTROLLER_RULES: readonly CautionRule[] = [
  defineRule({
    code: 'ill-conditioned-hessian',
    meaning: 'condition of the Hessian H',
    measure: ({ result }) => one(result.design.qp.condition, '1'),
    inOrder: (condition) => condition <= THRESHOLDS.hessianCondition,
    severity: (condition) => (condition > THRESHOLDS.hessianConditionError ? 'error' : 'warning'),
    sentence: (figure) =>
      `The quadratic program is ill conditioned: the condition of H is ${figure}. A solver in single precision will not find its optimum, and small errors of the model move the plan far.`,
    whatToDo: 'Raise the weight on input moves, shorten controller.horizon, or use longer input blocks.',
  }),
  defineRule({
    code: 'terminal-weight-left-out',
    meaning: 'residual of the Riccati equation of the terminal weight',
    measure: ({ result }) => {
      const { problem, notes } = result.design;
      if (problem.terminal === 'none') return [];
      return [{ value: notes.riccatiResidual, unit: '1', of: notes.riccatiConverged }];
    },
    inOrder: (_, converged) => converged,
    severity: 'warning',
    sentence: (figure) =>
      `The terminal weight was left out: its Riccati equation has no stabilising solution (residual ${figure}). What happens after the horizon has no cost.`,
    whatToDo: 'Set controller.terminal to none and lengthen controller.horizon, or take fewer functions.',
  }),
  defineRule({
    code: 'modes-clipped',
    meaning: 'modes pulled inside the unit circle for the terminal weight',
    measure: ({ result }) => {
      const { problem, notes } = result.design;
      return problem.terminal === 'none' ? [] : one(notes.clippedModes, '1');
    },
    inOrder: (modes) => modes === 0,
    severity: 'note',
    sentence: (figure) =>
      `${figure} growing or constant ${figure === '1' ? 'mode' : 'modes'} of the predictor that no input moves had to be pulled inside the unit circle, for the terminal weight only.`,
    whatToDo: 'Raise predictor.ridge or take fewer functions if the loop is slow to settle; else nothing.',
  }),
  defineRule({
    code: 'bilinear-part-unused',
    meaning: 'bilinear blocks that a controller of constant matrices cannot use',
    measure: ({ result }) => one(result.design.problem.predictor.N.length, '1'),
    inOrder: (blocks) => blocks === 0,
    severity: 'warning',
    sentence: (figure) =>
      `The controller plans with A and B alone and leaves ${figure} bilinear ${figure === '1' ? 'block' : 'blocks'} of the predictor unused: its plan is worse than the trust curve says.`,
    whatToDo: 'Set predictor.form to linear, so that A and B are fitted for this use.',
  }),
  defineRule({
    code: 'delay-not-compensated',
    meaning: 'delay of the input path beyond the one that is compensated',
    measure: ({ result }) => [
      {
        value: result.scenario.delay - result.design.problem.delay,
        unit: result.scenario.delay - result.design.problem.delay === 1 ? 'sample' : 'samples',
        of: result.design.problem.delay,
      },
    ],
    inOrder: (missing) => missing <= 0,
    severity: 'warning',
    sentence: (figure, { of, value }, { result }) =>
      `The input path is ${figure} (${formatFigure(value * result.sampleTime)} s) slower than the controller reckons with: it compensates ${of}. One ignored sample can ruin a loop.`,
    whatToDo:
      'Leave controller.delay out, so that it follows scenario.delay, or measure the delay and set it.',
  }),
  defineRule({
    code: 'sample-time-long',
    meaning: 'sample time over the time constant of the fastest mode that matters',
    measure: ({ result }) => one(result.sampleTime / result.spectrum.fastest, '1'),
    inOrder: (ratio) => ratio <= THRESHOLDS.fastestModeLong,
    severity: (ratio) => (ratio > 1 ? 'warning' : 'note'),
    sentence: (figure, _, { result }) =>
      `The sample time of ${withUnit(result.sampleTime, 's')} is ${figure} of the fastest time constant that matters (${withUnit(result.spectrum.fastest, 's')}): what happens between samples is hardly controlled. At most ${THRESHOLDS.fastestModeLong} is usual.`,
    whatToDo: 'Shorten the sample time, or accept that the fast part follows by itself.',
  }),
  defineRule({
    code: 'sample-time-short',
    meaning: 'sample time not needlessly short for the fastest mode that matters',
    // Pure integrators have no time constant to compare with.
    measure: ({ result }) =>
      result.spectrum.fastest === Infinity ? [] : one(result.sampleTime / result.spectrum.fastest, '1'),
    inOrder: (ratio) => ratio >= THRESHOLDS.fastestModeShort,
    severity: 'note',
    sentence: (figure, _, { result }) => {
      const { horizon } = result.design.problem;
      return `The sample time of ${withUnit(result.sampleTime, 's')} is only ${figure} of the fastest time constant that matters: neighbouring samples hardly differ, and the horizon of ${plural(horizon, 'step')} sees ${withUnit(horizon * result.sampleTime, 's')} ahead.`;
    },
    whatToDo: 'Lengthen the sample time, or use input blocks and a longer horizon.',
  }),
  defineRule({
    code: 'integration-error',
    meaning: 'integration error of a sample, relative to the state ranges',
    measure: ({ result }) => one(result.substeps.error, '1'),
    inOrder: (error) => error <= SUBSTEP_TOLERANCE,
    severity: (error) => (error > THRESHOLDS.integrationError ? 'error' : 'warning'),
    sentence: (figure, _, { result }) =>
      `With ${plural(result.substeps.count, 'integration step')} a sample the simulated plant is off by up to ${figure} of a state range; ${formatFigure(SUBSTEP_TOLERANCE)} was aimed at.`,
    whatToDo:
      'Shorten the sample time; where the plant has jumps (friction, stops), smooth them over a small width in its file.',
  }),
];

import { HELPS_BELOW } from '../predictor/assessTrust.ts';
import { formatFigure, listNames, plural } from './figures.ts';
import { type CautionRule, defineRule, one } from './rule.ts';
import { THRESHOLDS } from './thresholds.ts';

/** What the predictor is worth. */
export const PREDICTOR_RULES: readonly CautionRule[] = [
  defineRule({
    code: 'short-trust',
    meaning: 'steps for which the predictor keeps within the tolerance',
    measure: ({ result }) => {
      const { trust, design } = result;
      const { horizon } = design.problem;
      const length = trust.steps.length;
      // A curve that ends before the horizon is trusted as far as it goes, and says nothing beyond.
      return [{ value: trust.trustedSteps, unit: '1', of: { horizon, length } }];
    },
    inOrder: (steps, { horizon }) => steps >= horizon,
    severity: (steps) => (steps < 1 ? 'error' : 'warning'),
    sentence: (figure, { value, of }, { result }) => {
      const tolerance = `${formatFigure(100 * result.trust.tolerance)} % of the half range`;
      const time = `${formatFigure(value * result.sampleTime)} s`;
      const horizon = `the horizon of ${plural(of.horizon, 'step')}`;
      if (value >= of.length) {
        return `The predictor is within ${tolerance} for all ${figure} steps (${time}) that the held-out data allow, which is shorter than ${horizon}: the rest was not assessed.`;
      }
      return `The predictor stays within ${tolerance} for ${figure} steps ahead (${time}), less than ${horizon}.`;
    },
    whatToDo:
      'Shorten controller.horizon or lengthen the sample time, add functions (physics first), fit more data, or hold out longer trajectories.',
  }),
  defineRule({
    code: 'lifting-does-not-help',
    meaning: "lifted error over plain linear regression's, mean over the horizon",
    measure: ({ result }) => one(result.trust.lifting.ratio, '1'),
    inOrder: (ratio) => ratio < HELPS_BELOW,
    severity: 'warning',
    sentence: (figure) =>
      `Lifting does not help: over the horizon the error is ${figure} times that of plain linear regression.`,
    whatToDo:
      'Use the state alone, which is smaller and easier to review, or try other functions: physics functions, more centres, another degree.',
  }),
  defineRule({
    code: 'floor-close',
    meaning: 'error over the least that constant matrices reach with this lifting, where trust is short',
    measure: ({ result }) => {
      const { trust, design } = result;
      const short = !(trust.trustedSteps >= design.problem.horizon);
      return [{ value: trust.ratioToFloor, unit: '1', of: { short } }];
    },
    inOrder: (ratio, { short }) => !short || ratio >= THRESHOLDS.ratioToFloor,
    severity: 'note',
    sentence: (figure) =>
      `The error is ${figure} times that of regressing each step ahead directly, which is the best that constant matrices can do with these functions: refitting gains nothing. What is left is an effect of the input that depends on the state, or a function that is missing.`,
    whatToDo:
      "Offer functions from the physics in the plant's file, or shorten the horizon; a larger dictionary of the same kind will hardly help.",
  }),
  defineRule({
    code: 'unstable-predictor',
    meaning: 'growth of the fastest growing mode over the horizon',
    measure: ({ result }) => one(result.spectrum.radius ** result.design.problem.horizon, '1'),
    inOrder: (growth) => growth <= THRESHOLDS.growth,
    severity: 'warning',
    sentence: (figure, _, { result }) => {
      const { horizon } = result.design.problem;
      return `The predictor is unstable: with a spectral radius of ${result.spectrum.radius.toPrecision(5)} an error grows ${figure} times within the horizon of ${plural(horizon, 'step')}.`;
    },
    whatToDo:
      'Right for a plant that is unstable itself; else raise predictor.ridge, take fewer functions, or shorten controller.horizon. Do not lengthen the horizon.',
  }),
  defineRule({
    code: 'ill-conditioned-regression',
    meaning: 'decimal digits lost in the regression',
    measure: ({ result }) => {
      const { fit } = result.predictor;
      return fit.route === 'given' ? [] : one(fit.digitsLost, '1');
    },
    inOrder: (digits) => digits <= THRESHOLDS.digitsLost,
    severity: (digits) => (digits > THRESHOLDS.digitsLostError ? 'error' : 'warning'),
    sentence: (figure, _, { result }) => {
      const { route, condition } = result.predictor.fit;
      return `The regression loses ${figure} of about 16 decimal digits (condition ${formatFigure(condition)}, ${route} route): single coefficients mean little, predictions more.`;
    },
    whatToDo:
      'Raise predictor.ridge, set predictor.route to orthogonal, or take functions that differ more (Legendre instead of Hermite, fewer or narrower radial functions).',
  }),
  defineRule({
    code: 'rank-deficient',
    meaning: 'functions and inputs that others express on the data',
    measure: ({ result }) => {
      const { rank, regressors, dependent, route } = result.predictor.fit;
      if (route === 'given') return [];
      return [{ value: Math.max(regressors - rank, dependent.length), unit: '1', of: dependent }];
    },
    inOrder: (missing) => missing === 0,
    severity: 'warning',
    sentence: (figure, { of }) =>
      `The data do not tell ${figure} of the functions and inputs from the others: ${listNames(of) || 'which ones is not known'}. Their coefficients are one choice of many.`,
    whatToDo:
      'Leave these functions out; if an input is among them, excite the plant without feedback so that it moves by itself.',
  }),
  defineRule({
    code: 'duplicates-dropped',
    meaning: 'functions dropped because others have the same values',
    measure: ({ result }) => {
      const { dropped } = result.predictor.lifting;
      return [
        { value: dropped.length, unit: '1', of: dropped.map(({ name, sameAs }) => `${name} = ${sameAs}`) },
      ];
    },
    inOrder: (count) => count === 0,
    severity: 'note',
    sentence: (figure, { of }) =>
      `${figure} ${of.length === 1 ? 'function was' : 'functions were'} dropped as equal to another up to scale and offset: ${listNames(of)}.`,
    whatToDo: 'Nothing has to be done; leave them out of lifting.parts to keep the study plain.',
  }),
];

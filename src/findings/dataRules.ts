import { EXCITATION_LAGS, type VisitedRange } from '../data/coverage.ts';
import { formatFigure, plural } from './figures.ts';
import { type CautionRule, defineRule, one } from './rule.ts';
import { THRESHOLDS } from './thresholds.ts';

/** Is the predictor a regression on the data at all? */
const isFitted = (route: string) => route !== 'given';

/** A share in %; NaN where a value of that channel is not a number, which its ends show. */
const percentOf = ({ min, max }: VisitedRange, share: number) => (max >= min ? 100 * share : Number.NaN);

/** What the data can support. */
export const DATA_RULES: readonly CautionRule[] = [
  defineRule({
    code: 'weak-excitation',
    meaning: 'richness of the inputs over their last samples',
    measure: ({ excitation }) => one(excitation.lagCondition, '1'),
    inOrder: (condition) => condition <= THRESHOLDS.lagCondition,
    severity: 'warning',
    sentence: (figure) =>
      `The inputs are weakly exciting: the condition of their last ${EXCITATION_LAGS} samples is ${figure}, so that some ways in which past inputs act were hardly tried.`,
    whatToDo:
      'Use random steps or a binary sequence among the signals, shorten experiment.hold, or raise the highest frequency.',
  }),
  defineRule({
    code: 'range-not-covered',
    meaning: 'share of each state range with fitting data',
    measure: ({ excitation }) =>
      excitation.coordinates.map((of) => ({ value: percentOf(of, of.cells), unit: '%', of })),
    inOrder: (percent) => percent >= 100 * THRESHOLDS.coordinateCells,
    severity: 'warning',
    sentence: (figure, { of }) =>
      `The fitting data fill only ${figure} of the range of ${of.name}; they lie between ${formatFigure(of.min)} and ${formatFigure(of.max)} ${of.unit}.`,
    whatToDo:
      'Raise experiment.startRegion or experiment.amplitude, run longer or more trajectories, or narrow the range of that state in the plant.',
  }),
  defineRule({
    code: 'input-range-not-used',
    meaning: 'share of each input range used in the experiment',
    measure: ({ excitation }) =>
      excitation.inputs.map((of) => ({ value: percentOf(of, of.share), unit: '%', of })),
    inOrder: (percent) => percent >= 100 * THRESHOLDS.inputShare,
    severity: 'warning',
    sentence: (figure, { of }) =>
      `The experiment used only ${figure} of the range of ${of.name} (${formatFigure(of.min)} to ${formatFigure(of.max)} ${of.unit}); the controller may use all of it.`,
    whatToDo: "Raise experiment.amplitude, or limit the controller's input to what was tried.",
  }),
  defineRule({
    code: 'few-input-levels',
    meaning: 'number of different values of each input',
    measure: ({ excitation }) => excitation.inputs.map((of) => ({ value: of.levels, unit: '1', of })),
    inOrder: (levels) => levels >= THRESHOLDS.inputLevels,
    severity: (levels) => (levels < 2 ? 'error' : 'note'),
    sentence: (figure, { of }) =>
      `The input ${of.name} took only ${figure} different ${of.levels === 1 ? 'value' : 'values'} in the data: ${of.levels < 2 ? 'its effect cannot be told at all' : 'a nonlinear effect of it cannot be seen'}.`,
    whatToDo: 'Add random steps, a multisine or a chirp to experiment.signals.',
  }),
  defineRule({
    code: 'few-samples',
    meaning: 'fitting samples for each regressed function',
    measure: ({ result }) => {
      const { fit } = result.predictor;
      return isFitted(fit.route) ? one(fit.samples / fit.regressors, '1') : [];
    },
    inOrder: (ratio) => ratio >= THRESHOLDS.samplesPerRegressor,
    severity: (ratio) => (ratio < 1 ? 'error' : 'warning'),
    sentence: (figure, _, { result }) =>
      `There are only ${figure} fitting samples for each of the ${result.predictor.fit.regressors} functions and inputs; at least ${THRESHOLDS.samplesPerRegressor} are needed.`,
    whatToDo: 'Run more or longer trajectories, or take fewer functions.',
  }),
  defineRule({
    code: 'few-held-out',
    meaning: 'held-out starts behind the trust curve',
    measure: ({ result }) => one(result.trust.starts, '1'),
    inOrder: (starts) => starts >= THRESHOLDS.heldOutStarts,
    severity: 'warning',
    sentence: (figure) =>
      `The trust curve rests on ${figure} held-out starts only: its quantiles are rough and its verdict may be luck.`,
    whatToDo: 'Hold out more trajectories, or run longer ones.',
  }),
  defineRule({
    code: 'trajectories-cut',
    meaning: 'trajectories of the experiment that were cut short',
    measure: ({ result }) => {
      const { cuts, trajectories } = result.dataset;
      const cut = cuts.diverged + cuts.leftRange;
      const dropped = cut - trajectories.filter((trajectory) => trajectory.cut).length;
      return [{ value: cut, unit: '1', of: { ...cuts, planned: trajectories.length + dropped } }];
    },
    inOrder: (cut) => cut === 0,
    severity: (cut, { diverged, planned }) =>
      diverged > 0 || !(cut <= THRESHOLDS.cutShare * planned) ? 'warning' : 'note',
    sentence: (figure, { of }) =>
      `${figure} of ${of.planned} trajectories were cut short: ${of.diverged} diverged, ${of.leftRange} left the range allowed. Data near the edge are thinner than planned.`,
    whatToDo: 'Lower experiment.startRegion or experiment.amplitude, or raise experiment.cutAt.',
  }),
  defineRule({
    code: 'data-region-left',
    meaning: 'share of the closed-loop path outside the fitting data',
    measure: ({ lifted }) => (lifted ? one(100 * lifted.record.outsideData, '%') : []),
    inOrder: (percent) => percent <= 100 * THRESHOLDS.outsideData,
    severity: 'warning',
    sentence: (figure, _, { lifted }) =>
      `The closed loop was outside the region of the fitting data at ${figure} of its ${plural(lifted?.record.steps ?? 0, 'step')}: the predictor extrapolates there.`,
    whatToDo:
      'Excite the plant where the loop went (experiment.startRegion, experiment.amplitude), or keep references and limits inside the data.',
  }),
];

import { countSamples } from '../../data/dataset.ts';
import type { StudyResult } from '../../findings/studyResult.ts';
import type { Matrix } from '../../numerics/matrix.ts';
import type { Channel, InputChannel } from '../../plant/plant.ts';
import { formatFigure, percent, stepsAhead, withUnit } from '../words.ts';
import { NONE, type TableSpec } from './html.ts';
import { acceptanceTable, effortTable, limitTable, rivalTable, trackingTable } from './loopTables.ts';

/** A heading and the tables under it. */
export interface TableGroup {
  readonly heading: string;
  readonly tables: readonly TableSpec[];
}

/** All figures of the report. */
export function describeTables(result: StudyResult): TableGroup[] {
  return [
    { heading: 'Closed loop', tables: [limitTable(result), trackingTable(result), effortTable(result)] },
    { heading: 'Beside the rivals', tables: [rivalTable(result), acceptanceTable(result)] },
    { heading: 'Fit', tables: [fitTable(result), residualTable(result)] },
    { heading: 'Controller and scenario', tables: [controllerTable(result), scenarioTable(result)] },
    { heading: 'Plant', tables: [channelTable(result), parameterTable(result)] },
    { heading: 'Where it comes from', tables: [originTable(result)] },
  ];
}

const ROUTES = {
  gram: 'Gram (normal equations, streamed)',
  orthogonal: 'orthogonal (QR of the regressor)',
  given: 'given, not regressed',
} as const;

function fitTable({ predictor }: StudyResult): TableSpec {
  const { fit, lifting, form } = predictor;
  const families = lifting.parts.map(({ family, keep }) => `${family} ${keep.length}`);
  const dropped = lifting.dropped.map(({ name, sameAs }) => `${name} (same as ${sameAs})`);
  return {
    caption: 'The regression',
    head: [],
    rows: [
      [
        'form',
        form === 'linear'
          ? 'z[k+1] = A z[k] + B u[k]'
          : 'z[k+1] = A z[k] + B u[k] + sum over i of u_i[k] N_i z[k]',
      ],
      ['lifted functions', `${lifting.nz}: ${families.join(', ')}`],
      ['left out as duplicates', dropped.length > 0 ? dropped.join(', ') : NONE],
      ['route', ROUTES[fit.route]],
      ['samples', String(fit.samples)],
      ['condition of the regressor', formatFigure(fit.condition)],
      ['decimal digits lost', formatFigure(fit.digitsLost)],
      ['ridge', formatFigure(fit.ridge)],
      [
        'ridges tried (error)',
        fit.ridgesTried.map(({ ridge, error }) => `${formatFigure(ridge)} (${percent(error)})`).join(', ') ||
          NONE,
      ],
      ['rank', `${fit.rank} of ${fit.regressors}`],
      ['expressed by others', fit.dependent.join(', ') || NONE],
    ],
  };
}

/** Residuals that a report shows. */
const WORST = 10;

function residualTable({ predictor }: StudyResult): TableSpec {
  const { lifting, fit } = predictor;
  const worst = fit.residuals
    .map((residual, i) => ({ residual, name: lifting.names[i] }))
    .sort((a, b) => b.residual - a.residual)
    .slice(0, WORST);
  return {
    caption: `The ${worst.length} functions predicted worst one step ahead: RMS residual in % of their own RMS`,
    head: ['function of the scaled state', 'residual, %'],
    rows: worst.map(({ name, residual }) => [name, formatFigure(100 * residual)]),
  };
}

/** The diagonal of a weight by channel, channels without weight left out. */
function weights(channels: readonly Channel[], { data, cols }: Matrix): string {
  const told = channels.flatMap(({ name }, i) => {
    const weight = data[i * cols + i];
    return weight === 0 ? [] : [`${name} ${formatFigure(weight)}`];
  });
  return told.join(', ') || NONE;
}

function controllerTable({ design, predictor, sampleTime }: StudyResult): TableSpec {
  const { problem, qp, notes } = design;
  const { inputs, outputs } = predictor;
  const { inputLimits, rateLimits, outputLimits } = problem;
  const ownLimits = inputs.map(
    ({ name, unit }, i) =>
      `${name} ${withUnit(inputLimits.min[i], unit)} to ${withUnit(inputLimits.max[i], unit)}`,
  );
  const rates = inputs.flatMap(({ name, unit }, i) =>
    Number.isFinite(rateLimits[i]) ? [`${name} ${withUnit(rateLimits[i], `${unit}/s`)}`] : [],
  );
  const soft = outputLimits.map(({ output, min, max, weight, fromStep }) => {
    const { name, unit } = outputs[output];
    const kind = Number.isFinite(weight) ? `soft, weight ${formatFigure(weight)}` : 'hard';
    return `${name} ${withUnit(min, unit)} to ${withUnit(max, unit)} (${kind}, from step ${fromStep})`;
  });
  const blocked = problem.blocks.some((length) => length !== 1);
  return {
    caption: 'The controller; weights act on deviations divided by half the range of their channel',
    head: [],
    rows: [
      ['horizon', stepsAhead(problem.horizon, sampleTime)],
      ['blocks of equal input', blocked ? problem.blocks.join(', ') : 'every step free'],
      ['weight on outputs', weights(outputs, problem.Q)],
      ['weight on input moves', weights(inputs, problem.R)],
      ['weight on input levels', weights(inputs, problem.S)],
      ['terminal weight', problem.terminal === 'none' ? NONE : 'from the Riccati equation'],
      ...(problem.terminal === 'riccati'
        ? [
            [
              'Riccati equation',
              notes.riccatiConverged
                ? `relative residual ${formatFigure(notes.riccatiResidual)}, ${notes.clippedModes} modes clipped`
                : 'no stabilising solution: terminal weight left out',
            ],
          ]
        : []),
      ['input limits', ownLimits.join(', ')],
      ['rate limits', rates.join(', ') || NONE],
      ['output limits', soft.join(', ') || NONE],
      ['input delay compensated', stepsAhead(problem.delay, sampleTime)],
      ['reference seen ahead', problem.preview ? 'yes' : 'no'],
      ['disturbance filter gain', formatFigure(problem.disturbanceGain)],
      ['quadratic program', `${qp.n} unknowns, ${qp.m} rows, condition of H ${formatFigure(qp.condition)}`],
    ],
  };
}

function scenarioTable({ scenario, sampleTime, plant, runs }: StudyResult): TableSpec {
  const unitOf = (channels: readonly Channel[], name: string) =>
    channels.find((channel) => channel.name === name)?.unit ?? '1';
  const starts = Object.entries(scenario.start).map(
    ([name, value]) => `${name} ${withUnit(value, unitOf(plant.states, name))}`,
  );
  const disturbances = scenario.disturbances.map(
    ({ input, value, from }) =>
      `${input} ${withUnit(value, unitOf(plant.inputs, input))} from ${withUnit(from, 's')}`,
  );
  const factors = Object.entries(scenario.parameterFactors).map(
    ([name, factor]) => `${name} × ${formatFigure(factor)}`,
  );
  const references = scenario.references.map(({ output, shape }) => `${output}: ${shape}`);
  return {
    caption: 'The scenario that the loop went through',
    head: [],
    rows: [
      ['duration', withUnit(scenario.duration, 's')],
      ['references', references.join(', ') || NONE],
      ['start away from the operating point', starts.join(', ') || NONE],
      ['true input delay', stepsAhead(scenario.delay, sampleTime)],
      ['noise on each measurement', `${percent(scenario.noise)} of half range`],
      ['input disturbances', disturbances.join(', ') || NONE],
      ['parameters off nominal', factors.join(', ') || NONE],
      ['outside the fitting data', `${percent(runs[0].record.outsideData)} of the samples`],
    ],
  };
}

function channelTable({ plant }: StudyResult): TableSpec {
  const row = (kind: string, { name, unit, min, max, rate }: Channel & Pick<InputChannel, 'rate'>) => [
    name,
    kind,
    withUnit(min, unit),
    withUnit(max, unit),
    rate === undefined ? NONE : withUnit(rate, unit === '1' ? '1/s' : `${unit}/s`),
  ];
  return {
    caption: 'Channels and their ranges',
    head: ['channel', 'kind', 'from', 'to', 'fastest change'],
    rows: [
      ...plant.states.map((channel) => row('state', channel)),
      ...plant.inputs.map((channel) => row('input', channel)),
      ...plant.outputs.map((channel) => row('output', channel)),
    ],
  };
}

function parameterTable({ plant }: StudyResult): TableSpec {
  return {
    caption: 'Nominal parameters',
    head: ['parameter', 'value', 'tolerance', 'meaning'],
    rows: Object.entries(plant.parameters).map(([name, { value, unit, tolerance, meaning }]) => [
      name,
      // Not rounded: a reviewer compares them with a data sheet.
      unit === '1' ? String(value) : `${value} ${unit}`,
      tolerance ? `± ${percent(tolerance)}` : 'exact',
      meaning ?? '',
    ]),
  };
}

function originTable({ dataset, seed, studyHash, dataHash, substeps, trust }: StudyResult): TableSpec {
  const count = (role: 'fit' | 'choose' | 'held-out') =>
    `${countSamples(dataset, role)} samples in ${dataset.trajectories.filter((t) => t.role === role).length} trajectories`;
  return {
    caption: 'What makes this result again, bit by bit',
    head: [],
    rows: [
      ['seed', String(seed)],
      ['SHA-256 of the study', studyHash],
      ['SHA-256 of the data', dataHash],
      ['data for the fit', count('fit')],
      ['data for choosing the ridge', count('choose')],
      ['data held out', `${count('held-out')}, ${trust.starts} starts`],
      [
        'trajectories cut short',
        `${dataset.cuts.diverged} diverged, ${dataset.cuts.leftRange} left the ranges`,
      ],
      [
        'integration',
        `RK4, ${substeps.count} sub-steps a sample; halving them changes the state by at most ${percent(substeps.error)} of its range`,
      ],
    ],
  };
}

import type { LoopRun } from '../findings/studyResult.ts';
import type { TrustModel } from '../predictor/trust.ts';

/** Shape of a marker, as the drawing library names it. */
export type Marker = 'circle' | 'rect' | 'triangle' | 'rectRot' | 'crossRot' | 'star' | false;

/** How one series is told from the others: by lightness, by dash and by marker, not by hue alone. */
export interface SeriesStyle {
  readonly label: string;
  readonly colour: string;
  readonly dash: readonly number[];
  readonly marker: Marker;
  readonly width: number;
}

/**
 * Every colour of the charts, on white and on a dark page. Charts are described in the light ones; the page exchanges
 * them one for one, so each light colour stands here once.
 */
export const COLOURS = {
  paper: { light: '#ffffff', dark: '#15181b' },
  ink: { light: '#1b1b1b', dark: '#eeeeee' },
  quiet: { light: '#4d4d4d', dark: '#bdbdbd' },
  grid: { light: '#dedede', dark: '#343a40' },
  hatch: { light: '#9c9c9c', dark: '#6b7278' },
  trusted: { light: '#e8edf3', dark: '#222a33' },
  reference: { light: '#010101', dark: '#fefefe' },
  lifted: { light: '#0a2f7a', dark: '#8ab8ff' },
  spread: { light: '#0a2f7a24', dark: '#8ab8ff2e' },
  reLifted: { light: '#007a5e', dark: '#3fc9a6' },
  plainLinear: { light: '#d1570a', dark: '#ff9d52' },
  linearised: { light: '#9c3587', dark: '#dd8fcf' },
  persistence: { light: '#808080', dark: '#8d9499' },
  floor: { light: '#000000', dark: '#ffffff' },
  fitData: { light: '#a9bbd3', dark: '#5f7796' },
  heldOut: { light: '#6f6f6f', dark: '#a3a3a3' },
  broken: { light: '#c00d24', dark: '#ff7384' },
} as const;

const { lifted, reLifted, plainLinear, linearised, persistence, floor } = COLOURS;

/** The predictors on the trust curve. */
export const MODEL_STYLES: Record<TrustModel, SeriesStyle> = {
  lifted: { label: 'lifted', colour: lifted.light, dash: [], marker: 'circle', width: 3 },
  're-lifted': {
    label: 're-lifted each step',
    colour: reLifted.light,
    dash: [10, 3, 2, 3],
    marker: 'triangle',
    width: 1.75,
  },
  'plain-linear': {
    label: 'plain linear',
    colour: plainLinear.light,
    dash: [8, 4],
    marker: 'rect',
    width: 2,
  },
  linearised: {
    label: 'linearised',
    colour: linearised.light,
    dash: [3, 3],
    marker: 'rectRot',
    width: 2,
  },
  persistence: {
    label: 'persistence',
    colour: persistence.light,
    dash: [14, 4],
    marker: 'crossRot',
    width: 1.5,
  },
  floor: { label: 'floor', colour: floor.light, dash: [1, 3], marker: 'star', width: 1.75 },
};

/** The controllers of the closed loop look like the predictors that they use. */
export const RUN_STYLES: Record<LoopRun['name'], SeriesStyle> = {
  lifted: MODEL_STYLES.lifted,
  'plain-linear': MODEL_STYLES['plain-linear'],
  linearised: MODEL_STYLES.linearised,
};

/** Sizes of text in logical pixels, at a chart width of 800. */
export const TEXT = { title: 17, axis: 14, tick: 13, label: 13 } as const;

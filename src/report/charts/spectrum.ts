import type { StudyResult } from '../../findings/studyResult.ts';
import type { ChartSpec, Point } from '../spec.ts';
import { COLOURS } from '../style.ts';
import { formatFigure, plural, withUnit } from '../words.ts';
import { pointSeries } from './series.ts';

const AXES = { x: 'x', y: 'y' } as const;
/** A modulus this little above 1 is a mode at 1 with rounding. */
const AT_ONE = 1e-9;
const LISTED = 8;

/** Eigenvalues of `A` beside the unit circle. */
export function spectrumChart({ spectrum, sampleTime }: StudyResult): ChartSpec {
  const { real, imaginary, radius, fastest, slowest } = spectrum;
  const modes = real.map((re, i) => ({ x: re, y: imaginary[i], modulus: Math.hypot(re, imaginary[i]) }));
  const growing = modes.filter(({ modulus }) => modulus > 1 + AT_ONE);
  const decaying = modes.filter(({ modulus }) => !(modulus > 1 + AT_ONE));
  const round = ({ x, y }: (typeof modes)[number]): Point => ({
    x: Number(x.toPrecision(6)),
    y: Number(y.toPrecision(6)),
  });
  const title =
    growing.length > 0
      ? `${plural(growing.length, 'eigenvalue')} of ${modes.length} outside the unit circle; the fastest grows by ${formatFigure(100 * (radius - 1))} % a step`
      : `All ${modes.length} eigenvalues lie within the unit circle or on it`;
  const time = (seconds: number) => (Number.isFinite(seconds) ? withUnit(seconds, 's') : 'none');
  // Room on the right for the note, beside the arc and not on it.
  const reals = [...real.filter(Number.isFinite), 1];
  const across = [...reals, 1 + 0.4 * (Math.max(...reals) - Math.min(...reals))];
  const note = [
    'arc: unit circle',
    `spectral radius ${Number(radius.toPrecision(6))}`,
    `fastest mode ${time(fastest)}`,
    `slowest mode ${time(slowest)}`,
    `sample time ${withUnit(sampleTime, 's')}`,
  ];
  return {
    name: 'spectrum',
    title,
    reading:
      'Each mark is an eigenvalue of the predictor matrix A: inside the circle its mode decays, outside it grows from step to step, near 1 it is slow. The window holds all eigenvalues and the point 1.',
    alternative: `${title}. ${note.slice(1).join(', ')}.`,
    height: 520,
    series: [
      pointSeries('decaying', decaying.map(round), AXES, {
        marker: 'circle',
        radius: 4,
        border: COLOURS.lifted.light,
        inside: COLOURS.paper.light,
      }),
      ...(growing.length > 0
        ? [
            pointSeries('growing', growing.map(round), AXES, {
              marker: 'triangle',
              radius: 7,
              border: COLOURS.ink.light,
              inside: COLOURS.broken.light,
            }),
          ]
        : []),
    ],
    axes: {
      x: {
        type: 'linear',
        position: 'bottom',
        title: 'real part',
        ...windowOf(across, 0),
      },
      y: {
        type: 'linear',
        position: 'left',
        title: 'imaginary part',
        ...windowOf(
          modes.map(({ y }) => y),
          0.25,
        ),
      },
    },
    marks: [
      { kind: 'circle', ...AXES, radius: 1, colour: COLOURS.ink.light, dash: [] },
      { kind: 'line', axis: 'x', at: 0, colour: COLOURS.hatch.light, dash: [], width: 1, label: '' },
      { kind: 'line', axis: 'y', at: 0, colour: COLOURS.hatch.light, dash: [], width: 1, label: '' },
      { kind: 'note', lines: note },
    ],
    endLabels: 0,
    namedAtEnds: false,
    equalScales: true,
    numbers: {
      caption: `The ${Math.min(LISTED, modes.length)} eigenvalues of largest modulus`,
      head: ['modulus', 'real part', 'imaginary part', 'time constant'],
      rows: [...modes]
        .sort((a, b) => b.modulus - a.modulus)
        .slice(0, LISTED)
        .map(({ x, y, modulus }) => [
          modulus.toFixed(6),
          x.toFixed(6),
          y.toFixed(6),
          modulus < 1 - AT_ONE
            ? withUnit(-sampleTime / Math.log(modulus), 's')
            : modulus > 1 + AT_ONE
              ? 'grows'
              : 'stays',
        ]),
    },
  };
}

/** All values with some room, and at least `−least … least`: fast-sampled modes crowd near 1 and are looked at there. */
function windowOf(values: readonly number[], least: number): { min: number; max: number } {
  const finite = values.filter(Number.isFinite);
  const min = Math.min(...finite, ...(least > 0 ? [-least] : []));
  const max = Math.max(...finite, least);
  const room = 0.12 * Math.max(max - min, 0.1);
  return { min: min - room, max: max + room };
}

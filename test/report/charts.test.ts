import { createCanvas } from '@napi-rs/canvas';
import { Chart, registerables } from 'chart.js';
import { describe, expect, it } from 'vitest';
import type { StudyResult } from '../../src/findings/studyResult.ts';
import { describeCharts } from '../../src/report/charts/all.ts';
import { closedLoopChart } from '../../src/report/charts/closedLoop.ts';
import { coverageCharts } from '../../src/report/charts/coverage.ts';
import { breakLines, chartConfig, drawingSource, PAINTERS } from '../../src/report/charts/drawing.ts';
import { excitationChart } from '../../src/report/charts/excitation.ts';
import { findExcursions } from '../../src/report/charts/loopSignals.ts';
import { rivalsChart } from '../../src/report/charts/rivals.ts';
import { solverChart } from '../../src/report/charts/solver.ts';
import { spectrumChart } from '../../src/report/charts/spectrum.ts';
import { trustChart } from '../../src/report/charts/trust.ts';
import type { ChartView } from '../../src/report/charts/view.ts';
import type { ChartSpec, Mark } from '../../src/report/spec.ts';
import { COLOURS, TEXT } from '../../src/report/style.ts';
import { sampleResult } from '../helpers/sampleResult.ts';

Chart.register(...registerables);

const view: ChartView = {
  width: 800,
  title: true,
  fontFamily: 'sans-serif',
  colours: {},
  paper: '#ffffff',
  ink: '#000000',
  quiet: '#444444',
  grid: '#dddddd',
  responsive: false,
  ratio: 1,
  text: TEXT,
};

const marksOf = <K extends Mark['kind']>({ marks }: ChartSpec, kind: K) =>
  marks.filter((mark): mark is Extract<Mark, { kind: K }> => mark.kind === kind);
const seriesOf = ({ series }: ChartSpec, label: string) => series.filter((entry) => entry.label === label);

/** The sample study with its lifted run changed. */
function withRun(change: (run: StudyResult['runs'][number]) => object): StudyResult {
  const result = sampleResult();
  const [own, ...others] = result.runs;
  return { ...result, runs: [{ ...own, ...change(own) } as typeof own, ...others] };
}

describe('where limits are broken', () => {
  it('a sine of amplitude 2 leaves ±1 twice a period, worst at its quarters (closed form)', () => {
    const time = Float64Array.from({ length: 801 }, (_, k) => k / 400);
    const values = time.map((t) => 2 * Math.sin(2 * Math.PI * t));
    const { worst, beyond } = findExcursions(time, values, { min: -1, max: 1 });
    expect(worst).toEqual([
      { x: 0.25, y: 2 },
      { x: 0.75, y: -2 },
      { x: 1.25, y: 2 },
      { x: 1.75, y: -2 },
    ]);
    // Each excursion ends in a gap; it lasts where |sin| > 1/2, two thirds of the time.
    expect(beyond.filter(({ y }) => y === null)).toHaveLength(4);
    expect(beyond.filter(({ y }) => y !== null).length / 801).toBeCloseTo(2 / 3, 1);
  });

  it('the closed-loop chart marks the excursion that the loop report counts as the worst (twin of the report)', () => {
    const result = sampleResult();
    const spec = closedLoopChart(result);
    const limit = result.runs[0].report.limits.find(({ channel }) => channel === 'velocity');
    if (!limit || limit.count === 0) throw new Error('the sample study must break its velocity limit');
    const markers = seriesOf(spec, 'limit broken').filter((entry) => !entry.showLine);
    expect(markers.map(({ yAxisID }) => yAxisID)).toEqual(['y1']);
    const excess = markers[0].data.map(({ y }) => Math.max((y ?? 0) - limit.max, limit.min - (y ?? 0)));
    expect(Math.min(...excess)).toBeGreaterThan(0);
    expect(Math.max(...excess) / limit.worst).toBeCloseTo(1, 3);
    expect(markers[0].data).toHaveLength(limit.count);
    expect(spec.title).toContain('velocity');
  });

  it('limits are hatched from the limit outwards on the panel of their channel', () => {
    const result = sampleResult();
    const bands = marksOf(closedLoopChart(result), 'band').filter(({ hatched }) => hatched);
    expect(bands.map(({ axis, from, to }) => [axis, from, to])).toEqual([
      ['y1', null, -0.1],
      ['y1', 0.1, null],
      ['u0', null, -3],
      ['u0', 3, null],
    ]);
  });

  it('a run that breaks nothing has no broken series and its title says so', () => {
    const result = withRun(({ report, record }) => ({
      record: { ...record, yFine: record.yFine.map(() => 0) },
      report: { ...report, limits: report.limits.map((limit) => ({ ...limit, count: 0, worst: 0 })) },
    }));
    const spec = closedLoopChart(result);
    expect(seriesOf(spec, 'limit broken')).toEqual([]);
    expect(spec.title).toContain('breaks no limit');
  });

  it('a rate limit that is broken is marked on the input where it jumps', () => {
    const result = withRun(({ report, record }) => {
      const u = record.u.map((_, k) => (k < 100 ? 0 : 2));
      const limits = report.limits.map((limit) => (limit.kind === 'rate' ? { ...limit, count: 1 } : limit));
      return { record: { ...record, u }, report: { ...report, limits } };
    });
    const marked = seriesOf(closedLoopChart(result), 'limit broken').filter(
      ({ yAxisID, showLine }) => yAxisID === 'u0' && !showLine,
    );
    expect(marked.flatMap(({ data }) => data)).toEqual([{ x: 1, y: 2 }]);
  });

  it('a loop that diverged is told in the title', () => {
    const result = withRun(({ record }) => ({ record: { ...record, diverged: true } }));
    expect(closedLoopChart(result).title).toContain('diverged');
  });
});

describe('the other charts show what their records say', () => {
  it('the trust curve has every model of the record once, in % of half range, with tolerance and trusted steps', () => {
    const result = sampleResult();
    const { trust } = result;
    const spec = trustChart(result);
    const named = spec.series.filter(({ unnamed }) => !unnamed);
    expect(named).toHaveLength(trust.series.length);
    const lifted = seriesOf(spec, 'lifted')[0];
    const rms = trust.series.find(({ model }) => model === 'lifted')?.rms ?? [];
    lifted.data.forEach(({ y }, k) => {
      expect((y ?? 0) / (100 * rms[k])).toBeCloseTo(1, 5);
    });
    expect(marksOf(spec, 'band')).toMatchObject([{ axis: 'x', to: trust.trustedSteps, hatched: false }]);
    expect(marksOf(spec, 'line').map(({ axis, at }) => [axis, at])).toContainEqual([
      'y',
      100 * trust.tolerance,
    ]);
    expect(spec.title).toContain(`${trust.trustedSteps} steps`);
    expect(spec.axes.y.type).toBe('logarithmic');
  });

  it('the trust curve says so when lifting does not help or no step can be trusted', () => {
    const result = sampleResult();
    const trust = { ...result.trust, trustedSteps: 0, lifting: { helps: false, ratio: 1.1, upTo: 0 } };
    const spec = trustChart({ ...result, trust });
    expect(spec.title).toMatch(/more than 10.% of half range at the first step/);
    expect(spec.title).toContain('no better than plain linear regression');
    expect(marksOf(spec, 'band')).toEqual([]);
  });

  it('an error that leaves all numbers becomes a gap and its label stays inside the plot', () => {
    const result = sampleResult();
    const series = result.trust.series.map((its) =>
      its.model === 're-lifted'
        ? { ...its, rms: its.rms.map((value, k) => (k > 5 ? Number.POSITIVE_INFINITY : value)) }
        : its,
    );
    const spec = trustChart({ ...result, trust: { ...result.trust, series } });
    const data = seriesOf(spec, 're-lifted each step')[0].data;
    expect(data.map(({ y }) => y === null)).toEqual(data.map((_, k) => k > 5));
    const label = marksOf(spec, 'label').find(({ text }) => text.startsWith('re-lifted'));
    expect(label).toMatchObject({ place: 'right', at: { x: 6 } });
  });

  it('the excitation chart has a panel for each shape of signal, and its first values are those of the data', () => {
    const result = sampleResult();
    const spec = excitationChart(result);
    expect(marksOf(spec, 'caption').map(({ text }) => text)).toEqual(['random steps', 'multisine']);
    const first = result.dataset.trajectories.find(
      ({ signal, steps }) => signal === 'random-steps' && steps === 60,
    );
    spec.series[0].data.slice(0, 5).forEach(({ y }, k) => {
      expect(y).toBeCloseTo(first?.u[k] ?? Number.NaN, 4);
    });
  });

  it('the coverage chart holds every pair of coordinates up to three, with path and both roles', () => {
    const result = sampleResult();
    const [spec, ...more] = coverageCharts(result);
    expect(more).toEqual([]);
    expect(spec.series.map(({ label }) => label)).toEqual(['fit', 'held out', 'closed loop', 'its start']);
    const { x, nx } = result.runs[0].record;
    expect(spec.series[2].data).toHaveLength(x.length / nx);
    expect(spec.title).toContain('stays where the fitting data are');
    const strayed = withRun(({ record }) => ({ record: { ...record, outsideData: 0.25 } }));
    expect(coverageCharts(strayed)[0].title).toMatch(/25.% of its samples/);
  });

  it('a plant of one state is covered against its input', () => {
    const result = sampleResult();
    const thin = (x: Float64Array) => x.filter((_, k) => k % 2 === 0);
    const one: StudyResult = {
      ...result,
      dataset: {
        ...result.dataset,
        coordinates: result.dataset.coordinates.slice(0, 1),
        trajectories: result.dataset.trajectories.map((trajectory) => ({
          ...trajectory,
          x: thin(trajectory.x),
        })),
      },
    };
    const [spec] = coverageCharts(one);
    expect([spec.axes.x.title, spec.axes.y.title]).toEqual(['position, m', 'force, N']);
  });

  it('the spectrum tells growing from decaying eigenvalues by the unit circle', () => {
    const result = sampleResult();
    const real = [0.9, 0.8, 0.8, 1.02];
    const imaginary = [0, 0.7, -0.7, 0];
    const spec = spectrumChart({
      ...result,
      spectrum: { ...result.spectrum, real, imaginary, radius: 1.02 },
    });
    // |0.8 ± 0.7 i| = 1.063: outside too.
    expect(seriesOf(spec, 'growing')[0].data).toHaveLength(3);
    expect(seriesOf(spec, 'decaying')[0].data).toEqual([{ x: 0.9, y: 0 }]);
    expect(spec.title).toContain('3 eigenvalues of 4 outside');
    expect(marksOf(spec, 'circle')).toMatchObject([{ radius: 1 }]);
  });

  it('a unit of the spectrum is as long upwards as across', () => {
    const canvas = createCanvas(800, 520) as unknown as HTMLCanvasElement;
    const chart = new Chart(canvas, chartConfig(spectrumChart(sampleResult()), view, PAINTERS));
    const { x, y } = chart.scales;
    const across = x.getPixelForValue(1) - x.getPixelForValue(0);
    const up = y.getPixelForValue(0) - y.getPixelForValue(1);
    expect(across / up).toBeCloseTo(1, 1);
    expect(Math.abs(across / up - 1)).toBeLessThan(0.01);
    chart.destroy();
  });

  it('the solver chart marks each solve that was not optimal by its outcome', () => {
    const result = withRun(({ record, report }) => ({
      record: {
        ...record,
        status: record.status.map((status, k) =>
          k === 10 || k === 11 ? 'infeasible' : k === 20 ? 'iteration-limit' : status,
        ),
        fallback: record.fallback.map((fallback, k) => (k === 10 ? 'shifted-plan' : fallback)),
      },
      report: { ...report, notOptimal: 3 },
    }));
    const spec = solverChart(result);
    expect(seriesOf(spec, 'infeasible')[0].data.map(({ x }) => x)).toEqual([0.1, 0.11]);
    expect(seriesOf(spec, 'iteration limit')[0].data.map(({ x }) => x)).toEqual([0.2]);
    expect(spec.title).toContain('3 solves of 300 did not reach the optimum');
    expect(spec.alternative).toContain('the last plan shifted at 1 sample');
    expect(solverChart(sampleResult()).series).toHaveLength(1);
  });

  it('the rivals chart draws every run, the lifted one on top', () => {
    const spec = rivalsChart(sampleResult());
    expect(spec.series.filter(({ unnamed }) => !unnamed).map(({ label }) => label)).toEqual([
      'reference',
      'lifted',
      'plain linear',
      'linearised',
    ]);
    const order = (label: string) => seriesOf(spec, label)[0].order ?? 0;
    expect(order('lifted')).toBeLessThan(order('plain linear'));
    expect(order('plain linear')).toBeLessThan(order('linearised'));
  });
});

/** Relative luminance of an sRGB colour (WCAG 2.1, W3C 2018, definition; quoted from memory). */
function luminance(hex: string): number {
  const [r, g, b] = [1, 3, 5].map((at) => {
    const c = Number.parseInt(hex.slice(at, at + 2), 16) / 255;
    return c <= 0.04045 ? c / 12.92 : ((c + 0.055) / 1.055) ** 2.4;
  });
  return 0.2126 * r + 0.7152 * g + 0.0722 * b;
}

describe('series are told apart without colour', () => {
  it('no two named series of one panel share line, dash and marker', () => {
    for (const { name, series } of describeCharts(sampleResult())) {
      const looks = series
        .filter(({ unnamed }) => !unnamed)
        .map(({ showLine, borderDash, pointStyle, yAxisID }) =>
          // The input has its own panel: there is nothing else to confuse it with.
          JSON.stringify([showLine, borderDash, pointStyle, yAxisID.charAt(0)]),
        );
      expect(new Set(looks).size, name).toBe(looks.length);
    }
  });

  it.each(['light', 'dark'] as const)(
    'lines and marks stand out from the %s page by 3 : 1 or more (WCAG 2.1, success criterion 1.4.11, from memory)',
    (scheme) => {
      const paper = luminance(COLOURS.paper[scheme]);
      const drawn = [
        'lifted',
        'reLifted',
        'plainLinear',
        'linearised',
        'persistence',
        'floor',
        'broken',
        'heldOut',
      ] as const;
      for (const role of drawn) {
        const [low, high] = [paper, luminance(COLOURS[role][scheme])].sort((a, b) => a - b);
        expect((high + 0.05) / (low + 0.05), role).toBeGreaterThanOrEqual(3);
      }
    },
  );

  it('each light colour stands for one role, so that a dark page can exchange them', () => {
    const light = Object.values(COLOURS).map((colour) => colour.light);
    expect(new Set(light).size).toBe(light.length);
  });
});

describe('the drawing code', () => {
  it('as text, without its module, makes the same configuration as in its module', () => {
    const again = new Function(
      `${drawingSource()}; return (spec, view) => chartConfig(spec, view, painters);`,
    )();
    for (const spec of describeCharts(sampleResult())) {
      expect(JSON.stringify(again(spec, view))).toBe(JSON.stringify(chartConfig(spec, view, PAINTERS)));
    }
  });

  it('changes colours on a dark page and leaves the description as it was', () => {
    const spec = trustChart(sampleResult());
    const before = JSON.stringify(spec);
    const dark = { ...view, colours: { [COLOURS.lifted.light]: COLOURS.lifted.dark } };
    const text = JSON.stringify(chartConfig(spec, dark, PAINTERS));
    expect(text).toContain(COLOURS.lifted.dark);
    expect(text).not.toContain(`"${COLOURS.lifted.light}"`);
    expect(JSON.stringify(spec)).toBe(before);
  });

  it('lines of a title keep every word and the given length', () => {
    const text = 'The limit on velocity is broken 2 times, at worst by 0.0131\u00a0m/s';
    const lines = breakLines(text, 20);
    expect(lines.join(' ')).toBe(text);
    expect(Math.max(...lines.map((line) => line.length))).toBeLessThanOrEqual(20);
  });
});

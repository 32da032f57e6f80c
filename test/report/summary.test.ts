import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import type { Caution } from '../../src/findings/caution.ts';
import { formatFigure } from '../../src/findings/figures.ts';
import type { AcceptanceRow, LoopRun, StudyResult } from '../../src/findings/studyResult.ts';
import type { LimitReport, TrackingReport } from '../../src/loop/record.ts';
import { SCREEN, writeSummary } from '../../src/report/summary.ts';

const limit = (over: Partial<LimitReport> = {}): LimitReport => ({
  kind: 'output',
  channel: 'velocity',
  unit: 'm/s',
  min: -0.3,
  max: 0.3,
  count: 3,
  share: 0.01,
  worst: 0.0213,
  worstOfRange: 0.0355,
  longest: 0.015,
  first: 1.2,
  ...over,
});

const tracking = (over: Partial<TrackingReport> = {}): TrackingReport =>
  ({
    output: 'position',
    unit: 'm',
    rms: 0.00123456,
    worst: 0.0199,
    overshoot: 4.2,
    settling: 0.31,
    referenceSteps: 4,
    settled: 4,
    offset: 1.2e-7,
    ...over,
  }) as TrackingReport;

const run = (name: LoopRun['name'], total: number, limits: LimitReport[], tracks = [tracking()]): LoopRun =>
  ({
    name,
    record: { steps: 500, diverged: false, cost: { total, tracking: total / 2 } },
    report: { limits, tracking: tracks, notOptimal: 2, iterations: { median: 2, q95: 5, worst: 11 } },
  }) as unknown as LoopRun;

const result = (over: Partial<StudyResult> = {}): StudyResult =>
  ({
    title: 'Snap-through stage',
    plant: { name: 'snap-through' },
    sampleTime: 0.005,
    trust: { tolerance: 0.1, trustedSteps: 42, lifting: { helps: true, ratio: 0.41234, upTo: 60 } },
    design: { problem: { horizon: 30 } },
    runs: [run('lifted', 12.34, [limit()]), run('plain-linear', 37.02, []), run('linearised', 246.8, [])],
    acceptance: [{ name: 'worst excess', limit: 0.05, reached: 0.0355, unit: '1', met: true }],
    ...over,
  }) as unknown as StudyResult;

const caution = (severity: Caution['severity'], sentence = 'Something is so.'): Caution => ({
  code: 'short-trust',
  severity,
  sentence,
  value: 1,
  unit: '1',
  whatToDo: 'Look.',
});

const files = ['out/snap-through: report.html, charts/, export/', 'experiment 0.4 s, fit 1.2 s'];

describe('the closing summary', () => {
  it('names a study without a title by its plant alone, once', () => {
    const [first] = writeSummary(result({ title: 'snap-through' }), [], files).split('\n');
    expect(first).toBe('snap-through, sample time 0.005 s');
  });

  it('answers every question of a review in words and figures with units (worked by hand)', () => {
    const text = writeSummary(result(), [caution('warning'), caution('note')], files);
    expect(text).toContain("helps: error 0.412 of plain linear's, better up to 60 steps (0.3 s)");
    expect(text).toContain('trusted to 10 % for 42 steps (0.21 s); horizon 30 steps (0.15 s)');
    expect(text).toMatch(/position +0\.00123 m +0\.0199 m +4\.2 % +0\.31 s +1\.2e-7 m\n/);
    expect(text).toMatch(/velocity +3 +0\.0213 m\/s +3\.55 % +0\.015 s +1\.2 s\n/);
    expect(text).toContain('37  plain linear regression, 3 times (tracking 18.5)');
    expect(text).toContain('247  linearised at the operating point, 20 times (tracking 123)');
    expect(text).toContain('2 of 500 not optimal; iterations median 2, 95 % 5, worst 11');
    expect(text).toContain('met: worst excess 3.55 %, allowed 5 %');
    expect(text).toContain('0 errors, 1 warning, 1 note');
    expect(text).toContain('out/snap-through: report.html');
    expect(text).toContain('Keep independent limits');
  });

  it('says it plainly where lifting does not help, the loop diverged, or a limit was missed', () => {
    const lifted = run('lifted', 3, []);
    const diverged = { ...lifted, record: { ...lifted.record, diverged: true } };
    const text = writeSummary(
      result({
        trust: { tolerance: 0.1, trustedSteps: 0, lifting: { helps: false, ratio: 1.02, upTo: 0 } } as never,
        runs: [diverged],
        acceptance: [{ name: 'offset', limit: 0.01, reached: 0.2, unit: '1', met: false }],
      }),
      [],
      files,
    );
    expect(text).toContain('does NOT help: error 1.02');
    expect(text).toContain('not even one step within 10 %');
    expect(text).toContain('DIVERGED');
    expect(text).toContain('MISSED: offset 20 %, allowed 1 %');
  });

  it('fits 24 rows of 80 columns with a row left for the prompt, whatever there is to tell', () => {
    const word = fc.string({ maxLength: 200 }).map((text) => text.replace(/\s/g, ' '));
    const shape = fc.record({
      limits: fc.array(fc.double(), { maxLength: 20 }),
      outputs: fc.array(word, { maxLength: 10 }),
      runs: fc.integer({ min: 1, max: 3 }),
      cautions: fc.array(fc.tuple(fc.constantFrom('error', 'warning', 'note'), word), { maxLength: 40 }),
      acceptance: fc.integer({ min: 0, max: 8 }),
      title: word,
    });
    fc.assert(
      fc.property(shape, ({ limits, outputs, runs, cautions, acceptance, title }) => {
        const tracks = outputs.map((output) => tracking({ output }));
        const broken = limits.map((worst) => limit({ worst, worstOfRange: worst, longest: worst }));
        const names = ['lifted', 'plain-linear', 'linearised'] as const;
        const row: AcceptanceRow = { name: title, limit: 1e-9, reached: 1e9, unit: 'm', met: false };
        const text = writeSummary(
          result({
            title,
            runs: names.slice(0, runs).map((name) => run(name, 1e9, broken, tracks)),
            acceptance: Array.from({ length: acceptance }, () => row),
          }),
          cautions.map(([severity, sentence]) => caution(severity, sentence)),
          files,
        );
        const lines = text.trimEnd().split('\n');
        expect(lines.length).toBeLessThanOrEqual(SCREEN.rows - 1);
        for (const line of lines) expect(line.length).toBeLessThanOrEqual(SCREEN.columns);
      }),
    );
  });

  it('the worst limit comes first and the ones that do not fit are counted', () => {
    const limits = [1, 5, 3, 2, 4, 6].map((worst) =>
      limit({ channel: `c${worst}`, worst, worstOfRange: worst }),
    );
    const text = writeSummary(result({ runs: [run('lifted', 1, limits)] }), [], files);
    expect(text.match(/c\d/g)).toEqual(['c6', 'c5']);
    expect(text).toContain('and 4 more');
  });

  it.each([
    [0, '0'],
    [1234.5678, '1230'],
    [0.0012345, '0.00123'],
    [0.00012345, '1.2e-4'],
    [123456789, '1.2e8'],
    [-0.5, '-0.5'],
    [Number.NaN, 'not a number'],
    [Number.POSITIVE_INFINITY, 'infinite'],
  ])('%d is written as %s', (value, text) => {
    expect(formatFigure(value)).toBe(text);
  });
});

import type { Caution, Severity } from '../findings/caution.ts';
import { formatFigure, plural, withUnit } from '../findings/figures.ts';
import type { AcceptanceRow, LoopRun, StudyResult } from '../findings/studyResult.ts';
import type { LimitReport, TrackingReport } from '../loop/record.ts';

/** The terminal that the summary must fit. */
export const SCREEN = { rows: 24, columns: 80 } as const;

/** Width of the first column. */
const LABEL = 10;

const LABELS: Record<LoopRun['name'], string> = {
  lifted: 'lifted',
  'plain-linear': 'plain linear regression',
  linearised: 'linearised at the operating point',
};

const percent = (share: number) => `${formatFigure(100 * share)} %`;

/** At most `rows` entries, the last of them saying how many more there are. */
function firstOf(lines: readonly string[], rows: number, where: string): string[] {
  if (lines.length <= rows) return [...lines];
  const kept = Math.max(0, rows - 1);
  return [...lines.slice(0, kept), `and ${lines.length - kept} more, see ${where}`];
}

/**
 * The closing summary: does lifting help and how far ahead, tracking, limits broken, cost beside the rivals, cautions,
 * where the files are. Fits one screen of 24 rows of 80 columns, the shell's prompt included.
 *
 * @param files what was written and where, one line each, two lines at most.
 */
export function writeSummary(
  result: StudyResult,
  cautions: readonly Caution[],
  files: readonly string[],
): string {
  const lifted = result.runs[0];
  const broken = lifted ? lifted.report.limits.filter(({ count }) => count > 0) : [];
  // What the other parts leave of the screen is shared by limits, acceptance and cautions.
  const sections: [string, string[]][] = [
    ['Lifting', describeLifting(result)],
    ['Tracking', describeTracking(lifted?.report.tracking ?? [])],
    ['Limits', describeLimits(lifted, broken)],
    ['Cost', describeCost(result.runs)],
    ['Solves', lifted ? [describeSolves(lifted)] : []],
    ['Accepted', firstOf(result.acceptance.map(describeAcceptance), 2, 'report.html')],
    ['Files', files.slice(0, 2)],
  ];
  const used = 1 + sections.reduce((rows, [, lines]) => rows + lines.length, 0);
  // The hazards take one line, the prompt another.
  const forCautions = Math.max(2, SCREEN.rows - 2 - used);
  sections.splice(6, 0, ['Cautions', describeCautions(cautions, forCautions)]);
  const lines = [cut(`${titleOf(result)}, sample time ${withUnit(result.sampleTime, 's')}`, SCREEN.columns)];
  for (const [name, entries] of sections) {
    entries.forEach((entry, i) => {
      const label = (i === 0 ? name : '').padEnd(LABEL);
      // A path is never cut: it is there to be copied.
      lines.push(name === 'Files' ? `${label}${entry}` : cut(`${label}${entry}`, SCREEN.columns));
    });
  }
  lines.push('Holds for the model and scenario shown. Keep independent limits and e-stop.');
  return `${lines.join('\n')}\n`;
}

function cut(line: string, columns: number): string {
  return line.length <= columns ? line : `${line.slice(0, columns - 1)}…`;
}

function describeLifting({ trust, sampleTime, design }: StudyResult): string[] {
  const { helps, ratio, upTo } = trust.lifting;
  const ahead = (steps: number) => `${plural(steps, 'step')} (${withUnit(steps * sampleTime, 's')})`;
  const horizon = ahead(design.problem.horizon);
  const first = helps
    ? `helps: error ${formatFigure(ratio)} of plain linear's, better up to ${ahead(upTo)}`
    : `does NOT help: error ${formatFigure(ratio)} of plain linear regression's`;
  const trusted =
    trust.trustedSteps > 0
      ? `trusted to ${percent(trust.tolerance)} for ${ahead(trust.trustedSteps)}`
      : `not even one step within ${percent(trust.tolerance)}`;
  return [first, `${trusted}; horizon ${horizon}`];
}

/** Cells in columns of fixed widths; a long first cell is cut so that the figures stay in their columns. */
function layOut(widths: readonly number[], cells: readonly string[]): string {
  return cells
    .map((cell, i) => (i === 0 ? cut(cell, widths[0] - 1) : cell).padEnd(widths[i] ?? 0))
    .join('')
    .trimEnd();
}

const TRACKING_WIDTHS = [13, 12, 12, 11, 11];

function describeTracking(outputs: readonly TrackingReport[]): string[] {
  if (outputs.length === 0) return [];
  const rows = outputs.map(({ output, unit, rms, worst, overshoot, settling, offset }) =>
    layOut(TRACKING_WIDTHS, [
      output,
      withUnit(rms, unit),
      withUnit(worst, unit),
      overshoot === null ? '-' : `${formatFigure(overshoot)} %`,
      settling === null ? '-' : withUnit(settling, 's'),
      offset === null ? '-' : withUnit(offset, unit),
    ]),
  );
  const head = layOut(TRACKING_WIDTHS, ['output', 'rms error', 'worst', 'overshoot', 'settling', 'offset']);
  return [head, ...firstOf(rows, 3, 'report.html')];
}

const LIMIT_WIDTHS = [17, 8, 15, 11, 11];

function describeLimits(lifted: LoopRun | undefined, broken: readonly LimitReport[]): string[] {
  if (!lifted) return [];
  const stopped = lifted.record.diverged ? ['the loop DIVERGED and was stopped'] : [];
  if (broken.length === 0) {
    const checked = lifted.report.limits.length;
    return [...stopped, `none of ${checked} broken, also between samples`];
  }
  const worstFirst = [...broken].sort((a, b) => b.worstOfRange - a.worstOfRange);
  const rows = worstFirst.map(({ kind, channel, unit, count, worst, worstOfRange, longest, first }) =>
    layOut(LIMIT_WIDTHS, [
      kind === 'rate' ? `${channel} rate` : channel,
      String(count),
      withUnit(worst, unit),
      percent(worstOfRange),
      withUnit(longest, 's'),
      first === null ? '-' : withUnit(first, 's'),
    ]),
  );
  const head = layOut(LIMIT_WIDTHS, ['BROKEN', 'times', 'worst by', 'of range', 'longest', 'first at']);
  return [...stopped, head, ...firstOf(rows, 3, 'report.html')];
}

function describeCost(runs: readonly LoopRun[]): string[] {
  const own = runs[0]?.record.cost.total;
  return runs.map(({ name, record }, i) => {
    const cost = formatFigure(record.cost.total);
    const ratio = i > 0 && own > 0 ? `, ${formatFigure(record.cost.total / own)} times` : '';
    const tracking = `tracking ${formatFigure(record.cost.tracking)}`;
    return `${cost}  ${LABELS[name]}${ratio} (${tracking})${record.diverged ? ', DIVERGED' : ''}`;
  });
}

function describeSolves({ record, report }: LoopRun): string {
  const { median, q95, worst } = report.iterations;
  return `${report.notOptimal} of ${record.steps} not optimal; iterations median ${formatFigure(median)}, 95 % ${formatFigure(q95)}, worst ${worst}`;
}

function describeAcceptance({ name, limit, reached, unit, met }: AcceptanceRow): string {
  const show = (value: number) => (unit === '1' ? percent(value) : withUnit(value, unit));
  return `${met ? 'met' : 'MISSED'}: ${name} ${show(reached)}, allowed ${show(limit)}`;
}

function describeCautions(cautions: readonly Caution[], rows: number): string[] {
  const order: readonly Severity[] = ['error', 'warning', 'note'];
  const counts = order.map((severity) => {
    const count = cautions.filter((caution) => caution.severity === severity).length;
    return plural(count, severity);
  });
  const pressing = order
    .slice(0, 2)
    .flatMap((severity) => cautions.filter((caution) => caution.severity === severity))
    .map(({ severity, code, sentence }) => `${severity} ${code}: ${sentence}`);
  const wrapped = pressing.flatMap((line) => wrap(line, SCREEN.columns - LABEL));
  // Whole sentences where the screen has room for them, else one line each.
  const lines = wrapped.length <= rows - 1 ? wrapped : firstOf(pressing, rows - 1, 'report.html');
  return [counts.join(', '), ...lines];
}

/** A text in lines of at most `columns`, broken at spaces; continued lines are indented. */
function wrap(text: string, columns: number): string[] {
  const lines: string[] = [];
  let line = '';
  for (const word of text.split(' ')) {
    if (line !== '' && line.length + 1 + word.length > columns) {
      lines.push(line);
      line = ` ${word}`;
    } else line = line === '' ? word : `${line} ${word}`;
  }
  return [...lines, line];
}

/** The study's title and the plant's name, once where they are the same. */
function titleOf({ title, plant }: StudyResult): string {
  return title === plant.name ? title : `${title}: ${plant.name}`;
}

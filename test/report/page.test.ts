import { describe, expect, it } from 'vitest';
import type { Caution } from '../../src/findings/caution.ts';
import { STANDING_HAZARDS } from '../../src/findings/hazards.ts';
import type { StudyResult } from '../../src/findings/studyResult.ts';
import { escapeHtml, scriptJson, scriptText } from '../../src/report/page/html.ts';
import { writeVerdict } from '../../src/report/page/verdict.ts';
import { renderReport } from '../../src/report/page.ts';
import { hostileCaution, hostileResult } from '../helpers/hostileResult.ts';
import { chartScript } from '../helpers/reportAssets.ts';
import { sampleResult } from '../helpers/sampleResult.ts';

const caution: Caution = {
  code: 'short-trust',
  severity: 'warning',
  sentence: 'Predictions can be trusted for 10 steps only.',
  value: 10,
  unit: '1',
  whatToDo: 'Shorten the horizon.',
};
const assets = { chartScript };
const render = (result: StudyResult = sampleResult(), cautions = [caution]) =>
  renderReport(result, cautions, assets);
/** The page without the library that is handed in. */
const own = (page: string) => page.replace(scriptText(chartScript), '');
/** Visible text: no scripts, no style, no tags; no-break spaces as spaces. */
const textOf = (page: string) =>
  page
    .replace(/<(script|style)>[\s\S]*?<\/\1>/g, '')
    .replace(/<[^>]*>/g, ' ')
    .replace(/\s+/g, ' ');

describe('the verdict', () => {
  const sentences = (result: StudyResult) =>
    writeVerdict(result, [caution]).map(({ sentence }) => sentence.replaceAll('\u00a0', ' '));

  it('answers in its first lines: does lifting help and how far, trust, cost beside rivals, limits, acceptance, cautions', () => {
    const result = sampleResult();
    const [own, plain] = result.runs;
    const lines = sentences(result);
    expect(lines[0]).toMatch(/^Lifting helps: .* better up to \d+ steps \([\d.]+ s\) ahead\.$/);
    expect(lines[1]).toMatch(/within 10 % of half range for \d+ steps/);
    const ratio = Number((plain.record.cost.total / own.record.cost.total).toPrecision(3));
    expect(lines[2]).toContain(`(${ratio} times)`);
    expect(lines[3]).toMatch(/^1 of 3 limits broken: velocity \d+ times \(worst by [\d.]+ m\/s/);
    expect(lines[4]).toBe('Worst excess over a limit 21 % where 5 % is allowed.');
    expect(lines[5]).toContain('0 errors and 1 warning');
  });

  it('says in the first line that lifting does not help, in the second that no step can be trusted', () => {
    const result = sampleResult();
    const trust = { ...result.trust, trustedSteps: 0, lifting: { helps: false, ratio: 1.02, upTo: 0 } };
    const lines = writeVerdict({ ...result, trust }, []);
    expect(lines[0]).toMatchObject({ standing: 'bad' });
    expect(lines[0].sentence).toContain('Lifting does not help here');
    expect(lines[1].sentence).toContain('Not even one step');
  });

  it('is bad where a rival is cheaper, and good only where all rivals cost more', () => {
    const result = sampleResult();
    const costing = (totals: readonly number[]): StudyResult => ({
      ...result,
      runs: result.runs.map((run, i) => ({
        ...run,
        record: { ...run.record, cost: { ...run.record.cost, total: totals[i] } },
      })),
    });
    const standing = (totals: readonly number[]) => writeVerdict(costing(totals), [])[2].standing;
    expect(standing([1, 2, 3])).toBe('good');
    expect(standing([1, 2, 0.9])).toBe('bad');
  });

  it('says that the loop diverged instead of a cost', () => {
    const result = sampleResult();
    const [first, ...others] = result.runs;
    const diverged = { ...first, record: { ...first.record, diverged: true } };
    expect(sentences({ ...result, runs: [diverged, ...others] })[2]).toContain('diverged and was stopped');
  });
});

describe('the page', () => {
  it('tells verdict, cautions and hazards before charts and figures', () => {
    const page = render();
    const order = ['verdict', 'cautions', 'hazards', 'charts', 'figures', 'words'].map((id) =>
      page.indexOf(`<section id="${id}"`),
    );
    expect(order.every((at) => at > 0)).toBe(true);
    expect(order).toEqual([...order].sort((a, b) => a - b));
  });

  it('holds the standing safety note word by word and the plant’s own hazards', () => {
    const text = textOf(render());
    for (const sentence of [...STANDING_HAZARDS, ...sampleResult().plant.hazards]) {
      expect(text).toContain(escapeHtml(sentence));
    }
  });

  it('shows each caution with severity, number and what to do', () => {
    const text = textOf(render());
    expect(text).toMatch(
      /Warning short-trust, 10 .*trusted for 10 steps only\..*What to do: Shorten the horizon\./,
    );
  });

  it('gives the figures of the records in their units', () => {
    const result = sampleResult();
    const text = textOf(render(result));
    const [limit] = result.runs[0].report.limits.filter(({ count }) => count > 0);
    expect(text).toContain(`velocity -0.1 m/s 0.1 m/s ${limit.count} ×`);
    expect(text).toContain(`${result.predictor.fit.rank} of ${result.predictor.fit.regressors}`);
    expect(text).toContain('mass 1.2 kg ± 2 %');
    expect(text).toContain('force 60 N/s');
    for (const hash of [result.studyHash, result.dataHash]) expect(text).toContain(hash);
  });

  it('is the same bytes again, and under 1.5 MB', () => {
    const page = render();
    expect(render()).toBe(page);
    expect(Buffer.byteLength(page)).toBeLessThan(1.5e6);
  });

  it('names nothing outside of itself: no address, no import, no font', () => {
    const page = own(render());
    expect(page).not.toMatch(
      /https?:|\/\/[a-z]+\.|@import|url\(|@font-face|<link(?! rel="icon" href="data:,">)/i,
    );
    expect(page).toContain("default-src 'none'");
    const sources = [...page.matchAll(/\s(?:src|href)="([^"]*)"/g)].map(([, target]) => target);
    expect(sources.every((target) => /^(#|data:,|charts\/[a-z0-9-]+\.png$)/.test(target))).toBe(true);
  });

  it('lets no name of the user end a tag, an attribute or a script', () => {
    const page = own(render(hostileResult(), [hostileCaution]));
    expect(page).not.toContain('<img src=x');
    expect(page).not.toContain('<b>bold');
    expect(page).not.toContain("' onmouseover='");
    // The page has two scripts of its own; none of them begins or ends elsewhere.
    expect(page.match(/<script/gi)).toHaveLength(2);
    expect(page.match(/<\/script/gi)).toHaveLength(2);
    expect(page).not.toContain('<!--');
  });
});

describe('escaping', () => {
  it('turns the five characters into entities, the ampersand first', () => {
    expect(escapeHtml(`<a href="x" title='y'>&amp;`)).toBe(
      '&lt;a href=&quot;x&quot; title=&#39;y&#39;&gt;&amp;amp;',
    );
  });

  it('a record in a script reads back as it was', () => {
    const record = { a: '</script><!--\u2028\u2029', b: [1, null] };
    expect(scriptJson(record)).not.toMatch(/[<\u2028\u2029]/);
    expect(JSON.parse(scriptJson(record))).toEqual(record);
  });

  it('a script’s text keeps its meaning and ends no element', () => {
    const code = 'return "</script>" + "</SCRIPT>";';
    expect(scriptText(code)).not.toMatch(/<\/script/i);
    expect(new Function(scriptText(code))()).toBe('</script></SCRIPT>');
  });
});

import type { Caution } from '../findings/caution.ts';
import { STANDING_HAZARDS } from '../findings/hazards.ts';
import type { StudyResult } from '../findings/studyResult.ts';
import { describeCharts } from './charts/all.ts';
import { behaviourScript } from './page/behaviour.ts';
import { GLOSSARY } from './page/glossary.ts';
import { escapeHtml, scriptText, table } from './page/html.ts';
import { LOOK } from './page/look.ts';
import { describeTables } from './page/tables.ts';
import { type VerdictLine, writeVerdict } from './page/verdict.ts';
import type { ChartSpec } from './spec.ts';
import { sentenceCase, stepsAhead, withUnit } from './words.ts';

/** The sections of the page in their order. */
const SECTIONS = [
  ['verdict', 'Verdict'],
  ['cautions', 'Cautions'],
  ['hazards', 'Hazards'],
  ['charts', 'Charts'],
  ['figures', 'Figures'],
  ['words', 'Words'],
] as const;
type Section = (typeof SECTIONS)[number][0];

/** Cautions that have a section of their own. */
const HAZARD_CODES = ['hazards', 'plant-hazard'];

/**
 * The report as one HTML file that loads nothing from anywhere: the same bytes for the same records.
 *
 * @param assets.chartScript text of the drawing library as a classic script that defines `Chart`.
 */
export function renderReport(
  result: StudyResult,
  cautions: readonly Caution[],
  { chartScript }: { readonly chartScript: string },
): string {
  const charts = describeCharts(result);
  const parts: Record<Section, string> = {
    verdict: renderVerdict(writeVerdict(result, cautions)),
    cautions: renderCautions(cautions.filter(({ code }) => !HAZARD_CODES.includes(code))),
    hazards: renderHazards(result),
    charts: charts.map(renderChart).join('\n'),
    figures: describeTables(result)
      .map(({ heading, tables }) => `<h3>${escapeHtml(heading)}</h3>\n${tables.map(table).join('\n')}`)
      .join('\n'),
    words: `<dl class="words">${GLOSSARY.map(([word, meaning]) => `<dt>${escapeHtml(word)}</dt><dd>${escapeHtml(meaning)}</dd>`).join('\n')}</dl>`,
  };
  const sections = SECTIONS.map(
    ([id, heading]) =>
      `<section id="${id}" aria-labelledby="${id}-heading">\n<h2 id="${id}-heading">${heading}</h2>\n${parts[id]}\n</section>`,
  );
  const links = SECTIONS.map(([id, heading]) => `<li><a href="#${id}">${heading}</a></li>`);
  return `<!DOCTYPE html>
<html lang="en">
<head>
<meta charset="utf-8">
<meta http-equiv="Content-Security-Policy" content="default-src 'none'; script-src 'unsafe-inline'; style-src 'unsafe-inline'; img-src 'self' file: data:">
<meta name="viewport" content="width=device-width, initial-scale=1">
<title>${escapeHtml(result.title)}: controller report</title>
<link rel="icon" href="data:,">
<style>
${LOOK}
</style>
</head>
<body>
<a class="skip" href="#verdict">Skip to the verdict</a>
<header>
<h1>${escapeHtml(result.title)}</h1>
<p class="quiet">${escapeHtml(result.plant.description)}</p>
${renderPlate(result)}
<nav aria-label="Sections"><ol>${links.join('')}</ol></nav>
</header>
<main>
${sections.join('\n')}
</main>
<footer>
<p>Physical units throughout, except where scaled figures are named as such. ${escapeHtml(STANDING_HAZARDS[0])}</p>
</footer>
<script>
${scriptText(chartScript)}
</script>
<script>
${behaviourScript(charts)}
</script>
</body>
</html>
`;
}

/** The block with what identifies the study, as on a drawing. */
function renderPlate({
  plant,
  sampleTime,
  design,
  predictor,
  scenario,
  seed,
  studyHash,
  dataHash,
}: StudyResult): string {
  const entries = [
    ['plant', plant.name],
    ['sample time', withUnit(sampleTime, 's')],
    ['horizon', stepsAhead(design.problem.horizon, sampleTime)],
    ['lifted functions', String(predictor.lifting.nz)],
    ['scenario', withUnit(scenario.duration, 's')],
    ['seed', String(seed)],
    ['study', studyHash.slice(0, 12)],
    ['data', dataHash.slice(0, 12)],
  ];
  const cells = entries.map(([name, value]) => `<div><dt>${name}</dt><dd>${escapeHtml(value)}</dd></div>`);
  return `<dl class="plate">${cells.join('')}</dl>`;
}

/** Standing told by sign and word, not by colour alone; drawn, because not every font has such signs. */
const STANDINGS = {
  good: ['M3 9.5 L7 13.5 L14 3.5', 'good'],
  bad: ['M3.5 3.5 L13.5 13.5 M13.5 3.5 L3.5 13.5', 'attention'],
  open: ['M3 8.5 L14 8.5', 'to be judged'],
} as const;

function renderVerdict(lines: readonly VerdictLine[]): string {
  const items = lines.map(({ standing, about, sentence }) => {
    const [path, word] = STANDINGS[standing];
    const mark = `<svg class="mark" viewBox="0 0 17 17" role="img" aria-label="${word}"><path d="${path}"/></svg>`;
    return `<li class="${standing}"><span class="about">${mark}${escapeHtml(about)}</span><span>${escapeHtml(sentence)}</span></li>`;
  });
  return `<ul class="verdict">${items.join('\n')}</ul>`;
}

function renderCautions(cautions: readonly Caution[]): string {
  if (cautions.length === 0) return '<p>None besides the hazards below.</p>';
  const items = cautions.map(({ code, severity, sentence, value, unit, whatToDo }) => {
    const number = value === null ? '' : `, ${escapeHtml(withUnit(value, unit))}`;
    return [
      `<li class="${severity}"><p><span class="kind">${sentenceCase(severity)}</span> <span class="quiet">${escapeHtml(code)}${number}</span></p>`,
      `<p>${escapeHtml(sentence)}</p>`,
      `<p><span class="quiet">What to do:</span> ${escapeHtml(whatToDo)}</p></li>`,
    ].join('\n');
  });
  return `<ol class="cautions">${items.join('\n')}</ol>`;
}

function renderHazards({ plant }: StudyResult): string {
  const items = (sentences: readonly string[]) =>
    `<ul>${sentences.map((sentence) => `<li>${escapeHtml(sentence)}</li>`).join('')}</ul>`;
  return [
    '<div class="hazards">',
    ...(plant.hazards.length > 0 ? [`<p>Of this plant:</p>${items(plant.hazards)}`] : []),
    `<p>Of every controller that moves something:</p>${items(STANDING_HAZARDS)}`,
    '</div>',
  ].join('\n');
}

function renderChart({ name, title, reading, alternative, height, numbers }: ChartSpec): string {
  const id = escapeHtml(name);
  return [
    `<figure aria-labelledby="title-${id}">`,
    `<figcaption><h3 id="title-${id}">${escapeHtml(title)}</h3><p>${escapeHtml(reading)}</p></figcaption>`,
    `<div class="plot" id="plot-${id}"><canvas role="img" aria-label="${escapeHtml(alternative)}" width="800" height="${height}"></canvas>`,
    `<noscript><img src="charts/${id}.png" alt="${escapeHtml(alternative)}" width="800" height="${height}"></noscript></div>`,
    ...(numbers ? [`<details><summary>Numbers behind this chart</summary>${table(numbers)}</details>`] : []),
    '</figure>',
  ].join('\n');
}

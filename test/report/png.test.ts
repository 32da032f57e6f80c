import { createCanvas, GlobalFonts, loadImage } from '@napi-rs/canvas';
import { describe, expect, it } from 'vitest';
import { spectrumChart } from '../../src/report/charts/spectrum.ts';
import { trustChart } from '../../src/report/charts/trust.ts';
import { drawCharts } from '../../src/report/drawCharts.ts';
import { drawPng } from '../../src/report/png.ts';
import { fonts } from '../helpers/reportAssets.ts';
import { sampleResult } from '../helpers/sampleResult.ts';

/** Pixels darker than a middle grey in the topmost `rows` rows. */
async function countDark(png: Uint8Array, rows: number): Promise<number> {
  const image = await loadImage(Buffer.from(png));
  const canvas = createCanvas(image.width, image.height);
  const ctx = canvas.getContext('2d');
  ctx.drawImage(image, 0, 0);
  const { data } = ctx.getImageData(0, 0, image.width, rows);
  let dark = 0;
  for (let i = 0; i < data.length; i += 4) if (data[i] + data[i + 1] + data[i + 2] < 384) dark++;
  return dark;
}

describe('charts as PNG', () => {
  it('each has its name, is 1600 pixels wide, and its title is really drawn', async () => {
    const charts = drawCharts(sampleResult(), fonts);
    expect(charts.map(({ name }) => name)).toEqual([
      'trust.png',
      'closed-loop.png',
      'rivals.png',
      'excitation.png',
      'coverage.png',
      'spectrum.png',
      'solver.png',
    ]);
    expect(GlobalFonts.has('Chart Sans')).toBe(true);
    for (const { png } of charts) {
      const image = await loadImage(Buffer.from(png));
      expect(image.width).toBe(1600);
      expect(image.height).toBeGreaterThanOrEqual(900);
      // A bold line of 30 letters and more has thousands of dark pixels at this size, an empty margin none.
      expect(await countDark(png, 60)).toBeGreaterThan(1500);
    }
  });

  it('a title of wide letters is darker than one of as many narrow letters: what is dark is text', async () => {
    const spec = spectrumChart(sampleResult());
    const dark = (title: string) => countDark(drawPng({ ...spec, title }, fonts), 60);
    expect((await dark('M'.repeat(30))) - (await dark('i'.repeat(30)))).toBeGreaterThan(3000);
  });

  it('the same record gives the same bytes', () => {
    const copies = { regular: fonts.regular.slice(), bold: fonts.bold.slice() };
    for (const chart of [trustChart, spectrumChart]) {
      const once = drawPng(chart(sampleResult()), fonts);
      expect(Buffer.compare(once, drawPng(chart(sampleResult()), copies))).toBe(0);
    }
  });

  it('letters that the font lacks are spelled out, so that no machine draws them otherwise', () => {
    const spec = spectrumChart(sampleResult());
    const greek = drawPng({ ...spec, title: 'Torque in Ω and θ' }, fonts);
    const spelled = drawPng({ ...spec, title: 'Torque in ohm and theta' }, fonts);
    expect(Buffer.compare(greek, spelled)).toBe(0);
  });

  it('a file that is not a font is refused, because its text would be missing silently', () => {
    const bytes = new Uint8Array(100);
    expect(() => drawPng(spectrumChart(sampleResult()), { regular: bytes, bold: bytes })).toThrow(
      /not a font/,
    );
  });
});

import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { pathToFileURL } from 'node:url';
import type { BrowserContextOptions, Page } from 'playwright-core';
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest';
import { findCautions } from '../../src/findings/findCautions.ts';
import { renderReport } from '../../src/report/page.ts';
import { type FoundBrowser, startBrowser } from '../helpers/browser.ts';
import { hostileCaution, hostileResult } from '../helpers/hostileResult.ts';
import { chartScript } from '../helpers/reportAssets.ts';
import { sampleResult } from '../helpers/sampleResult.ts';

let found: FoundBrowser;
let folder: string;

beforeAll(async () => {
  found = await startBrowser();
  folder = mkdtempSync(join(tmpdir(), 'report-'));
  const result = sampleResult();
  writeFileSync(join(folder, 'report.html'), renderReport(result, findCautions(result), { chartScript }));
  writeFileSync(
    join(folder, 'hostile.html'),
    renderReport(hostileResult(), [hostileCaution], { chartScript }),
  );
});

afterAll(async () => {
  await found?.browser?.close();
  rmSync(folder, { recursive: true, force: true });
});

/** Opens a page; what it complains of or asks for from elsewhere is gathered. */
async function open(
  file: string,
  options: BrowserContextOptions,
): Promise<{ page: Page; complaints: string[] }> {
  if (!found.browser) throw new Error(found.reason);
  const context = await found.browser.newContext(options);
  const page = await context.newPage();
  const complaints: string[] = [];
  page.on('console', (message) => complaints.push(`${message.type()}: ${message.text()}`));
  page.on('pageerror', (error) => complaints.push(`error: ${error.message}`));
  page.on('request', (request) => {
    const url = request.url();
    if (!url.startsWith('data:') && url !== pathToFileURL(join(folder, file)).href)
      complaints.push(`request: ${url}`);
  });
  await page.goto(pathToFileURL(join(folder, file)).href);
  return { page, complaints };
}

/** Colours found in the canvases: how many pixels differ from the corner, and the corner itself. */
function inspectCanvases(page: Page) {
  return page.evaluate(() =>
    [...document.querySelectorAll('canvas')].map((canvas) => {
      const { data } = canvas.getContext('2d')!.getImageData(0, 0, canvas.width, canvas.height);
      let drawn = 0;
      for (let i = 0; i < data.length; i += 4) if (data[i] !== data[0]) drawn++;
      return { drawn, corner: data[0], width: canvas.clientWidth };
    }),
  );
}

describe('the page in a browser', () => {
  // For a user without a browser; on a build server `startBrowser` has thrown before.
  beforeEach(({ skip }) => skip(!found.browser, found.reason ?? ''));

  it.each(['light', 'dark'] as const)(
    'draws every chart on a %s page, asks for nothing and complains of nothing',
    async (colorScheme) => {
      const { page, complaints } = await open('report.html', {
        viewport: { width: 1280, height: 720 },
        colorScheme,
      });
      const canvases = await inspectCanvases(page);
      expect(canvases).toHaveLength(7);
      for (const { drawn, corner } of canvases) {
        expect(drawn).toBeGreaterThan(2000);
        expect(corner > 200).toBe(colorScheme === 'light');
      }
      expect(complaints).toEqual([]);
      await page.context().close();
    },
  );

  it('has landmarks, one main heading, named regions, words for every picture, and can be walked by keyboard', async () => {
    const { page } = await open('report.html', { viewport: { width: 1280, height: 720 } });
    const facts = await page.evaluate(() => ({
      lang: document.documentElement.lang,
      landmarks: ['header', 'nav', 'main', 'footer'].map((tag) => document.querySelectorAll(tag).length),
      h1: document.querySelectorAll('h1').length,
      skipped: [...document.querySelectorAll('h1, h2, h3')].some(
        (heading, i, all) => i > 0 && Number(heading.tagName[1]) - Number(all[i - 1].tagName[1]) > 1,
      ),
      wordless: [...document.querySelectorAll('canvas, svg, nav, [role=region]')].filter(
        (element) => !element.getAttribute('aria-label')?.trim(),
      ).length,
      unlabelled: [...document.querySelectorAll('[aria-labelledby]')].filter(
        (element) => !document.getElementById(element.getAttribute('aria-labelledby') ?? '')?.textContent,
      ).length,
      scopeless: document.querySelectorAll('th:not([scope])').length,
      captionless: [...document.querySelectorAll('table')].filter((table) => !table.caption?.textContent)
        .length,
      duplicates:
        [...document.querySelectorAll('[id]')].length -
        new Set([...document.querySelectorAll('[id]')].map(({ id }) => id)).size,
      lost: [...document.querySelectorAll('a[href^="#"]')].filter(
        (link) => !document.querySelector(link.getAttribute('href') ?? ''),
      ).length,
    }));
    expect(facts).toEqual({
      lang: 'en',
      landmarks: [1, 1, 1, 1],
      h1: 1,
      skipped: false,
      wordless: 0,
      unlabelled: 0,
      scopeless: 0,
      captionless: 0,
      duplicates: 0,
      lost: 0,
    });
    // The first stop of the keyboard is the link that skips to the verdict, and it becomes visible there.
    await page.keyboard.press('Tab');
    const focused = await page.evaluate(() => {
      const { left, width } = document.activeElement!.getBoundingClientRect();
      return { target: document.activeElement!.getAttribute('href'), inside: left >= 0 && width > 0 };
    });
    expect(focused).toEqual({ target: '#verdict', inside: true });
    await page.context().close();
  });

  it('fits a phone without sideways scrolling, and follows when the window grows', async () => {
    const { page, complaints } = await open('report.html', { viewport: { width: 390, height: 844 } });
    expect(await page.evaluate(() => document.documentElement.scrollWidth)).toBe(390);
    for (const { width } of await inspectCanvases(page)) expect(width).toBeLessThanOrEqual(390);
    await page.setViewportSize({ width: 1280, height: 720 });
    await page.waitForFunction(() => document.querySelector('canvas')!.clientWidth > 800);
    expect(complaints).toEqual([]);
    await page.context().close();
  });

  it('prints on white also from a dark page, and is dark again afterwards', async () => {
    const { page } = await open('report.html', {
      viewport: { width: 1280, height: 720 },
      colorScheme: 'dark',
    });
    const during = await page.evaluate(() => {
      const seen: number[] = [];
      addEventListener('beforeprint', () => {
        for (const canvas of document.querySelectorAll('canvas')) {
          seen.push(canvas.getContext('2d')!.getImageData(0, 0, 1, 1).data[0]);
        }
      });
      Object.assign(window, { seen });
      return seen.length;
    });
    expect(during).toBe(0);
    await page.pdf({ format: 'A4' });
    expect(await page.evaluate(() => (window as unknown as { seen: number[] }).seen)).toEqual(
      new Array(7).fill(255),
    );
    await page.waitForFunction(
      () => document.querySelector('canvas')!.getContext('2d')!.getImageData(0, 0, 1, 1).data[0] < 60,
    );
    await page.context().close();
  });

  it('runs nothing that a hostile name brings, and still draws every chart', async () => {
    const { page, complaints } = await open('hostile.html', { viewport: { width: 1280, height: 720 } });
    expect(await page.evaluate(() => 'broken' in window)).toBe(false);
    expect(await page.evaluate(() => document.querySelectorAll('img, b').length)).toBe(0);
    for (const { drawn } of await inspectCanvases(page)) expect(drawn).toBeGreaterThan(2000);
    expect(complaints).toEqual([]);
    await page.context().close();
  });
});

describe('the search for a browser', () => {
  const none = [() => undefined];

  it('without one a user is told why', async () => {
    await withEnvironment('CI', undefined, async () => {
      expect(await startBrowser(none)).toEqual({
        browser: null,
        reason: expect.stringContaining('no Chromium'),
      });
    });
  });

  it('without one a build server fails', async () => {
    await withEnvironment('CI', 'true', async () => {
      await expect(startBrowser(none)).rejects.toThrow('need a browser');
    });
  });

  it('a browser that is named and is not there is an error, not a reason to take another', async () => {
    await withEnvironment('LIFTWRIGHT_BROWSER', join(folder, 'nowhere'), async () => {
      await expect(startBrowser()).rejects.toThrow('does not exist');
    });
  });
});

/** Runs something with one environment variable changed, and puts it back. */
async function withEnvironment(name: string, value: string | undefined, run: () => Promise<void>) {
  const before = process.env[name];
  const put = (its: string | undefined) => {
    if (its === undefined) delete process.env[name];
    else process.env[name] = its;
  };
  put(value);
  try {
    await run();
  } finally {
    put(before);
  }
}

import { existsSync } from 'node:fs';
import { type Browser, chromium } from 'playwright-core';

/** Environment variable that names a browser of the user's own. */
const OWN = 'LIFTWRIGHT_BROWSER';

const INSTALLED = [
  '/usr/bin/chromium',
  '/usr/bin/chromium-browser',
  '/usr/bin/google-chrome',
  '/usr/bin/google-chrome-stable',
  '/Applications/Google Chrome.app/Contents/MacOS/Google Chrome',
  '/Applications/Chromium.app/Contents/MacOS/Chromium',
];

const FLAGS = [
  '--no-sandbox',
  '--disable-gpu',
  '--headless=shell',
  '--disable-quic',
  '--no-first-run',
  '--disable-background-networking',
  '--disable-component-update',
  '--disable-sync',
];

/** Path of a browser, if there is one. */
type Finder = () => string | undefined | Promise<string | undefined>;

/** A running browser, or why there is none. */
export type FoundBrowser =
  | { readonly browser: Browser; readonly reason: null }
  | { readonly browser: null; readonly reason: string };

/**
 * Starts the first Chromium found: the one that the environment names (an error if it is not there), an installed one, the one
 * of the development package. Without one a user's tests are skipped with the reason; on a build server (`CI=true`) that
 * is an error.
 */
export async function startBrowser(finders: readonly Finder[] = FINDERS): Promise<FoundBrowser> {
  const reasons: string[] = [];
  for (const find of finders) {
    const path = await find();
    if (!path) continue;
    try {
      return { browser: await chromium.launch({ executablePath: path, args: FLAGS }), reason: null };
    } catch (error) {
      reasons.push(`${path} does not start: ${String(error).split('\n')[0]}`);
    }
  }
  const reason = reasons.join('; ') || `no Chromium found; name one in ${OWN}`;
  if (process.env.CI === 'true') throw new Error(`the tests of the page need a browser: ${reason}`);
  return { browser: null, reason };
}

/** In this order. */
const FINDERS: readonly Finder[] = [ownPath, installedPath, packagePath];

/** @throws Error when the variable names a file that is not there. */
function ownPath(): string | undefined {
  const path = process.env[OWN];
  if (path && !existsSync(path)) throw new Error(`${OWN} names ${path}, which does not exist`);
  return path || undefined;
}

function installedPath(): string | undefined {
  return INSTALLED.find((path) => existsSync(path));
}

/** The package unpacks its libraries too when it believes that it runs on a bare machine. */
async function packagePath(): Promise<string | undefined> {
  process.env.AWS_EXECUTION_ENV ??= 'AWS_Lambda_nodejs20.x';
  try {
    const { default: packaged } = await import('@sparticuz/chromium');
    return await packaged.executablePath();
  } catch {
    return undefined;
  }
}

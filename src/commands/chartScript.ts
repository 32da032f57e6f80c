import { readFileSync } from 'node:fs';
import { createRequire } from 'node:module';
import { dirname, join } from 'node:path';

/** The drawing library as one classic script, to be written into a page. */
export function readChartScript(): string {
  const main = createRequire(import.meta.url).resolve('chart.js');
  return readFileSync(join(dirname(main), 'chart.umd.min.js'), 'utf8');
}

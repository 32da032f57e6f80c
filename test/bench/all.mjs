// Runs every bench of this folder in turn, each in a fresh process; options are handed on.
import { spawnSync } from 'node:child_process';
import { readdirSync } from 'node:fs';
import { dirname, join } from 'node:path';
import { fileURLToPath } from 'node:url';

const folder = dirname(fileURLToPath(import.meta.url));
const helpers = ['all.mjs', 'measure.mjs', 'qpRivals.mjs', 'qpSequences.mjs'];
let failed = 0;
for (const file of readdirSync(folder).sort()) {
  if (!file.endsWith('.mjs') || helpers.includes(file)) continue;
  const { status } = spawnSync(process.execPath, [join(folder, file), ...process.argv.slice(2)], {
    stdio: 'inherit',
  });
  if (status !== 0) failed++;
}
process.exitCode = failed === 0 ? 0 : 1;

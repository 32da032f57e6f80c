import { execFileSync } from 'node:child_process';
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';

/** Is there a C compiler? Without one the tests that need it are left out for a user; a machine with CI=true must have it. */
export const hasCompiler = (() => {
  try {
    execFileSync('gcc', ['--version'], { stdio: 'ignore' });
    return true;
  } catch {
    return false;
  }
})();

const FLAGS = ['-std=c99', '-Wall', '-Wextra', '-Wpedantic', '-Werror', '-O1', '-ffp-contract=off'];

/** Compiles `main.c` beside the given headers, warnings as errors, and runs it; its standard output, or the compiler's message. */
export function runC(
  files: Readonly<Record<string, string>>,
  flags: readonly string[] = [],
): { readonly output: string; readonly message: string } {
  const folder = mkdtempSync(join(tmpdir(), 'liftwright-c-'));
  try {
    for (const [name, text] of Object.entries(files)) writeFileSync(join(folder, name), text);
    const program = join(folder, 'main');
    try {
      const args = [...FLAGS, ...flags, join(folder, 'main.c'), '-o', program, '-lm'];
      execFileSync('gcc', args, { stdio: ['ignore', 'ignore', 'pipe'] });
    } catch (error) {
      return { output: '', message: String((error as { stderr?: unknown }).stderr) };
    }
    return { output: execFileSync(program, { encoding: 'utf8', maxBuffer: 1 << 26 }), message: '' };
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
}

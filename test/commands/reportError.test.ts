import { afterEach, describe, expect, it, vi } from 'vitest';
import { InputError } from '../../src/commands/inputError.ts';
import { NumericalStop } from '../../src/commands/numericalStop.ts';
import { reportError } from '../../src/commands/reportError.ts';

const written: string[] = [];
const spy = vi.spyOn(process.stderr, 'write').mockImplementation((text) => written.push(String(text)) > 0);
afterEach(() => written.splice(0));

const problem = { file: 'f.yaml', line: 3, key: 'a.b', must: 'X', got: 'Y', wayOut: 'do Z' };

describe('how a job that stops says why (exit codes after the BSD sysexits and the design of this program)', () => {
  it('unusable input: one line a problem, no stack, exit code 2', () => {
    expect(reportError(new InputError([problem, { ...problem, line: undefined }]))).toBe(2);
    expect(written.join('')).toBe(
      'f.yaml:3: a.b: must be X, got Y; do Z\nf.yaml: a.b: must be X, got Y; do Z\n',
    );
    expect(spy).toHaveBeenCalled();
  });

  it('a numerical outcome: one line, no stack, exit code 3', () => {
    expect(reportError(new NumericalStop('the numbers left'))).toBe(3);
    expect(written.join('')).toBe('liftwright: stopped: the numbers left\n');
  });

  it('a fault of the program: says so, shows the stack, exit code 70', () => {
    expect(reportError(new TypeError('x is undefined'))).toBe(70);
    expect(written.join('')).toMatch(
      /fault of the program.*x is undefined\nTypeError: x is undefined\n +at /,
    );
    expect(reportError('thrown text')).toBe(70);
  });

  it('a message that spans lines in the user input stays one line', () => {
    expect(new InputError({ ...problem, got: 'a\n  b\r\nc' }).message).toBe(
      'f.yaml:3: a.b: must be X, got a b c; do Z',
    );
  });
});

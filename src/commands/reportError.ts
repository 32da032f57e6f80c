import { InputError } from './inputError.ts';
import { NumericalStop } from './numericalStop.ts';

/** Tells on stderr why the job stopped and returns the exit code. Only a fault of this program shows its stack. */
export function reportError(error: unknown): number {
  if (error instanceof InputError) {
    process.stderr.write(`${error.message}\n`);
    return 2;
  }
  if (error instanceof NumericalStop) {
    process.stderr.write(`liftwright: stopped: ${error.message}\n`);
    return 3;
  }
  const fault = error instanceof Error ? error : new Error(String(error));
  process.stderr.write(
    `liftwright: this is a fault of the program, not of your input: ${fault.message}\n${fault.stack}\n`,
  );
  return 70;
}

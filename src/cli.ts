#!/usr/bin/env node
import { Command, CommanderError } from 'commander';
import type { VerbOptions } from './commands/openStudy.ts';
import { version } from './commands/version.ts';

// Only commander is loaded here: `--help` must answer at once. Every verb loads what it needs.

/** Exit code of unusable arguments, as of any other input that cannot be used. */
const UNUSABLE = 2;

const program = new Command('liftwright')
  .description(
    'Constrained controllers for nonlinear actuators: experiment, lifted predictor, trust curve,\nquadratic program, closed loop on the true plant, report and export.',
  )
  .version(version())
  .helpCommand(false)
  .showHelpAfterError('(liftwright --help lists the verbs and options)')
  .exitOverride()
  .addHelpText(
    'after',
    `
A study is one YAML file; liftwright help study lists its keys, liftwright help VERB a verb's options.
Each verb reads what the earlier ones wrote into the folder of results.

Exit codes: 0 done; 1 done, but an acceptance limit was missed or a caution is an error;
2 the input cannot be used; 3 a numerical outcome stopped the job; 70 a fault of this program.`,
  );

type Verb = (study: string, options: VerbOptions) => Promise<number>;

function addVerb(name: string, description: string, load: () => Promise<Verb>): void {
  program
    .command(name)
    .description(description)
    .argument('<study>', 'the study file')
    .option('-o, --out <folder>', 'folder of the results (default: out/ and the name of the study)')
    .option('--seed <number>', "seed of all random numbers, instead of the study's")
    .option('-q, --quiet', 'no progress on the terminal')
    .action(async (study: string, options: VerbOptions) => {
      process.exitCode = await (await load())(study, options);
    });
}

addVerb('run', 'the whole job, from the experiment to report and export', async () => {
  return (await import('./commands/run.ts')).run;
});
addVerb('experiment', 'excite the plant and gather the data', async () => {
  return (await import('./commands/experiment.ts')).experiment;
});
addVerb('fit', 'lift the data and regress the predictor', async () => {
  return (await import('./commands/fit.ts')).fit;
});
addVerb(
  'assess',
  'hold the predictor against trajectories that it has not seen, and against its rivals',
  async () => {
    return (await import('./commands/assess.ts')).assess;
  },
);
addVerb('design', 'turn horizon, weights and limits into a quadratic program', async () => {
  return (await import('./commands/design.ts')).design;
});
addVerb('simulate', 'close the loop on the true plant', async () => {
  return (await import('./commands/simulate.ts')).simulate;
});
addVerb('report', 'write report.html and the charts', async () => {
  return (await import('./commands/report.ts')).report;
});
addVerb('export', 'write the matrices as JSON, Matrix Market files and a C header', async () => {
  return (await import('./commands/export.ts')).exportStudy;
});

program
  .command('help')
  .description("show this help, a verb's options, or the keys of the study file")
  .argument('[topic]', 'a verb, or study')
  .action(async (topic?: string) => {
    if (topic === 'study') {
      const { referenceText } = await import('./study/describeTable.ts');
      process.stdout.write(referenceText());
      return;
    }
    const verb = program.commands.find((command) => command.name() === topic);
    if (topic && !verb) {
      program.error(`error: there is no topic ${topic}; choose study or a verb`, { exitCode: UNUSABLE });
    }
    (verb ?? program).outputHelp();
  });

// A reader that has seen enough (`| head`) is no reason to stop: the files are still to be written.
process.stdout.on('error', (error: NodeJS.ErrnoException) => {
  if (error.code !== 'EPIPE') throw error;
});

try {
  await program.parseAsync();
} catch (error) {
  if (error instanceof CommanderError) process.exitCode = error.exitCode === 0 ? 0 : UNUSABLE;
  else process.exitCode = (await import('./commands/reportError.ts')).reportError(error);
}

#!/usr/bin/env node
/** The verbs. Each ends with 0 (yes), 1 (the answer is no), 2 (wrong use) or 3 (could not run). */
import './verbs/small-heap.ts';
import { Command, CommanderError, InvalidArgumentError, Option } from 'commander';
import { EXIT, exitStatusOf, RimeholdError, sentenceOf, systemWords } from './errors.ts';
import { VERSION } from './verbs/version.ts';

const CONFIG = ['--config <file>', 'site file', 'site.yaml'] as const;
const JSON_OUT = ['--json', 'print the result as JSON'] as const;

type Verb = (...args: never[]) => number | Promise<number>;

/**
 * Runs a verb and ends with its exit status; an error is one sentence on standard error. A verb is loaded when it is
 * asked for: on a small machine the planner takes seconds to load, and a copy of the database does not need it.
 */
function ending(load: () => Promise<Verb>): (...args: unknown[]) => Promise<void> {
  return async (...args) => {
    try {
      const verb = await load();
      process.exitCode = await verb(...(args as never[]));
    } catch (error) {
      process.exitCode = exitStatusOf(error);
      console.error(sentenceOf(error));
      if (!(error instanceof RimeholdError) && error instanceof Error) console.error(error.stack);
    }
  };
}

function wholeNumber(text: string): string {
  if (!/^\d{1,9}$/.test(text))
    throw new InvalidArgumentError('Expected a whole number of up to nine digits.');
  return text;
}

function program(): Command {
  const cli = new Command('rimehold')
    .description(
      'Watches and schedules a small stored-ice cooling plant. Not for medical cooling or for food; local codes and licensed trades come first.',
    )
    .version(VERSION)
    .configureOutput({ outputError: () => undefined })
    .exitOverride();
  cli
    .command('run')
    .description('the daemon, until it is stopped')
    .option(...CONFIG)
    .option('--lapse <n>', 'run on a clock n times as fast')
    .option('--epoch <time>', 'start that clock at a time, RFC 3339')
    .action(ending(async () => (await import('./verbs/run.ts')).run));
  cli
    .command('demo')
    .description('a simulated plant, one evening in about three minutes, and its night sheet')
    .option('--stay', 'keep running after the night sheet')
    .option('--seed <n>', 'weather and probes of another draw', wholeNumber, '1')
    .action(ending(async () => (await import('./verbs/demo.ts')).demo));
  cli
    .command('check')
    .description('the file, the database, the broker, and whether each point is heard')
    .option(...CONFIG)
    .option('--listen <duration>', 'how long to listen, ISO 8601', 'PT30S')
    .option(...JSON_OUT)
    .action(ending(async () => (await import('./verbs/check.ts')).check));
  cli
    .command('import')
    .description('a reading log (CSV: time,point,value) into the store')
    .argument('<file>')
    .option(...CONFIG)
    .option(...JSON_OUT)
    .action(ending(async () => (await import('./verbs/import.ts')).importLog));
  cli
    .command('estimate')
    .description('ice on hand through a reading log, offline')
    .option(...CONFIG)
    .requiredOption('--readings <file>', 'reading log (CSV: time,point,value)')
    .requiredOption('--out <file>', 'CSV to write')
    .addOption(
      new Option('--begins <state>', 'what the bank was as the log begins').choices(['full', 'empty']),
    )
    .option(...JSON_OUT)
    .action(ending(async () => (await import('./verbs/estimate.ts')).estimate));
  cli
    .command('night')
    .description('one night sheet, the last one unless a date is named')
    .argument('[date]')
    .option(...CONFIG)
    .option(...JSON_OUT)
    .option('--html', 'print it as a page that fits one sheet of A4 or Letter')
    .option('--revision <number>', 'an older revision, the newest unless named')
    .action(ending(async () => (await import('./verbs/night.ts')).night));
  cli
    .command('nights')
    .description('the ledger of nights, and what drifts; of several sites when several files are named')
    .option('--config <files...>', 'site files', ['site.yaml'])
    .option('--from <date>', 'first night')
    .option('--to <date>', 'last night')
    .option('--csv', 'print it as CSV')
    .option(...JSON_OUT)
    .action(ending(async () => (await import('./verbs/nights.ts')).nights));
  cli
    .command('bill')
    .description("a month's electricity bill, recomputed from stored energy")
    .option(...CONFIG)
    .option('--month <month>', 'month as YYYY-MM, the last whole one unless named')
    .option('--csv', 'print it as CSV')
    .option(...JSON_OUT)
    .action(ending(async () => (await import('./verbs/bill.ts')).bill));
  cli
    .command('backup')
    .description('a consistent copy of the database, also while the daemon runs')
    .argument('<file>')
    .option(...CONFIG)
    .option(...JSON_OUT)
    .action(ending(async () => (await import('./verbs/backup.ts')).backup));
  cli
    .command('reference')
    .description('every key of the site file')
    .option('--write', 'into config/reference.yaml and the schemas in addon/')
    .option(...JSON_OUT)
    .action(ending(async () => (await import('./verbs/reference.ts')).reference));
  return cli;
}

/** What the command line library found wrong, in one sentence with what to do. */
function usageSentence(error: CommanderError, cli: Command): string {
  const verb = cli.commands.find((command) => command.name() === process.argv[2]);
  const found = error.message
    .replace(/^error: /, '')
    .replaceAll(/\s*\n\s*/g, ' ')
    .replace(/\.$/, '');
  const verbs = cli.commands.map((command) => command.name()).join(', ');
  return verb === undefined
    ? `rimehold: ${found}; expected one of ${verbs}; \`rimehold --help\` says what each does.`
    : `rimehold ${verb.name()}: ${found}; \`rimehold ${verb.name()} --help\` says what it takes.`;
}

/** A reader that has seen enough (`| head`) is no fault; anything else that refuses our output is told, without a stack. */
function watchOutput(): void {
  let refused = false;
  process.stdout.on('error', (error: NodeJS.ErrnoException) => {
    if (error.code === 'EPIPE' || refused) return;
    refused = true;
    console.error(
      `Expected to write the result to standard output, but ${systemWords(error)}; send it elsewhere.`,
    );
  });
  process.stderr.on('error', () => undefined);
  process.on('exit', () => {
    if (refused && process.exitCode === EXIT.yes) process.exitCode = EXIT.couldNotRun;
  });
}

watchOutput();
const cli = program();
try {
  await cli.parseAsync();
} catch (error) {
  process.exitCode = error instanceof CommanderError && error.exitCode === 0 ? EXIT.yes : EXIT.wrongUse;
  if (error instanceof CommanderError && error.exitCode !== 0 && error.code !== 'commander.help')
    console.error(usageSentence(error, cli));
}

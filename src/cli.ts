#!/usr/bin/env node
/** The verbs. Each ends with 0 (yes), 1 (the answer is no), 2 (wrong use) or 3 (could not run). */
import { Command, CommanderError } from 'commander';
import { EXIT, exitStatusOf, RimeholdError, sentenceOf } from './errors.ts';
import { VERSION } from './main.ts';
import { backup } from './verbs/backup.ts';
import { check } from './verbs/check.ts';
import { demo } from './verbs/demo.ts';
import { estimate } from './verbs/estimate.ts';
import { importLog } from './verbs/import.ts';
import { night } from './verbs/night.ts';
import { nights } from './verbs/nights.ts';
import { reference } from './verbs/reference.ts';
import { run } from './verbs/run.ts';

const CONFIG = ['--config <file>', 'site file', 'site.yaml'] as const;
const JSON_OUT = ['--json', 'print the result as JSON'] as const;

type Verb = (...args: never[]) => number | Promise<number>;

/** Runs a verb and ends with its exit status; an error is one sentence on standard error. */
function ending(verb: Verb): (...args: unknown[]) => Promise<void> {
  return async (...args) => {
    try {
      process.exitCode = await verb(...(args as never[]));
    } catch (error) {
      process.exitCode = exitStatusOf(error);
      console.error(sentenceOf(error));
      if (!(error instanceof RimeholdError) && error instanceof Error) console.error(error.stack);
    }
  };
}

function program(): Command {
  const cli = new Command('rimehold')
    .description(
      'Watches and schedules a small stored-ice cooling plant. Not for medical cooling or for food; local codes and licensed trades come first.',
    )
    .version(VERSION)
    .showHelpAfterError('(add --help for what is expected)')
    .exitOverride();
  cli
    .command('run')
    .description('the daemon, until it is stopped')
    .option(...CONFIG)
    .option('--lapse <n>', 'run on a clock n times as fast')
    .option('--epoch <time>', 'start that clock at a time, RFC 3339')
    .action(ending(run));
  cli
    .command('demo')
    .description('a simulated plant, one evening in two minutes, and its night sheet')
    .option('--stay', 'keep running after the night sheet')
    .option('--seed <n>', 'weather and probes of another draw', '1')
    .action(ending(demo));
  cli
    .command('check')
    .description('the file, the database, the broker, and whether each point is heard')
    .option(...CONFIG)
    .option('--listen <duration>', 'how long to listen, ISO 8601', 'PT30S')
    .option(...JSON_OUT)
    .action(ending(check));
  cli
    .command('import')
    .description('a reading log (CSV: time,point,value) into the store')
    .argument('<file>')
    .option(...CONFIG)
    .option(...JSON_OUT)
    .action(ending(importLog));
  cli
    .command('estimate')
    .description('ice on hand through a reading log, offline')
    .option(...CONFIG)
    .requiredOption('--readings <file>', 'reading log (CSV: time,point,value)')
    .requiredOption('--out <file>', 'CSV to write')
    .option(...JSON_OUT)
    .action(ending(estimate));
  cli
    .command('night')
    .description('one night sheet, the last one unless a date is named')
    .argument('[date]')
    .option(...CONFIG)
    .option(...JSON_OUT)
    .option('--html', 'print it as a page that fits one sheet of A4 or Letter')
    .action(ending(night));
  cli
    .command('nights')
    .description('the ledger of nights, and what drifts')
    .option(...CONFIG)
    .option('--from <date>', 'first night')
    .option('--to <date>', 'last night')
    .option('--csv', 'print it as CSV')
    .option(...JSON_OUT)
    .action(ending(nights));
  cli
    .command('backup')
    .description('a consistent copy of the database, also while the daemon runs')
    .argument('<file>')
    .option(...CONFIG)
    .option(...JSON_OUT)
    .action(ending(backup));
  cli
    .command('reference')
    .description('every key of the site file')
    .option('--write', 'into config/reference.yaml and addon/options.schema.json')
    .option(...JSON_OUT)
    .action(ending(reference));
  return cli;
}

try {
  await program().parseAsync();
} catch (error) {
  process.exitCode = error instanceof CommanderError && error.exitCode === 0 ? EXIT.yes : EXIT.wrongUse;
}

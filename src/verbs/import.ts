/** `rimehold import F.csv`: a reading log into the store. A faulty line is named and left out; the rest comes in. */
import { createReadStream } from 'node:fs';
import { createInterface } from 'node:readline';
import { EXIT, printable, RimeholdError } from '../errors.ts';
import type { Reading } from '../points.ts';
import { isLogHeader, LOG_HEADER, parseLogLine } from '../reading-log.ts';
import { loadSite, siteStore, unreadable } from './site.ts';

export interface LogSummary {
  readonly readings: number;
  readonly faulty: number;
  /** The first few faults, each with its line. */
  readonly faults: readonly string[];
  /** Numbers dropped by name, counted: `leaving-water one-wire-cut`. */
  readonly dropped: Readonly<Record<string, number>>;
}

const FAULTS_SHOWN = 10;
const BATCH = 5000;

/** Reads a log file line by line and hands its readings over in batches. Throws when it is no reading log. */
export async function readLog(
  file: string,
  take: (readings: readonly Reading[]) => void,
): Promise<LogSummary> {
  const lines = createInterface({
    input: createReadStream(file, 'utf8'),
    crlfDelay: Number.POSITIVE_INFINITY,
  });
  const dropped: Record<string, number> = {};
  const faults: string[] = [];
  let [number, readings, faulty] = [0, 0, 0];
  let batch: Reading[] = [];
  try {
    for await (const text of lines) {
      number += 1;
      if (number === 1) {
        if (!isLogHeader(text))
          throw new RimeholdError(
            'usage',
            `Expected a reading log with the header "${LOG_HEADER}" on line 1 of ${file}, found "${printable(text)}"; give it that header and one reading a line.`,
            { file },
          );
        continue;
      }
      const line = parseLogLine(text);
      if (line.kind === 'reading') {
        readings += 1;
        batch.push(line.reading);
        if (batch.length >= BATCH) {
          take(batch);
          batch = [];
        }
      } else if (line.kind === 'dropped') {
        const name = `${line.point} ${line.why}`;
        dropped[name] = (dropped[name] ?? 0) + 1;
      } else if (line.kind === 'fault') {
        faulty += 1;
        if (faults.length < FAULTS_SHOWN)
          faults.push(`${file}, line ${number}: ${printable(line.sentence, 160)}.`);
      }
    }
  } catch (error) {
    if (error instanceof RimeholdError) throw error;
    throw unreadable(file, 'a reading log', `name a CSV file with the header "${LOG_HEADER}"`, error);
  }
  if (number === 0)
    throw new RimeholdError(
      'usage',
      `Expected a reading log with the header "${LOG_HEADER}" on line 1 of ${file}, found an empty file; give it that header and one reading a line.`,
      { file },
    );
  take(batch);
  return { readings, faulty, faults, dropped };
}

/** Sentences about a log, for standard error. */
export function logWords({ faulty, faults, dropped }: LogSummary): string[] {
  const more = faulty > faults.length ? [`… and ${faulty - faults.length} more faulty lines.`] : [];
  const drops = Object.entries(dropped).map(([name, count]) => `Dropped ${count} × ${name}.`);
  const todo = faulty > 0 ? ['Mend these lines and do it again: no reading is counted twice.'] : [];
  return [...faults, ...more, ...drops, ...todo];
}

export async function importLog(file: string, options: { config: string; json?: boolean }): Promise<number> {
  const config = loadSite(options.config);
  const store = siteStore(config, false);
  const taken = readLog(file, (readings) => store.addReadings(readings));
  await taken.catch(() => undefined);
  const { fault } = store.close();
  const summary = await taken;
  if (fault !== null) throw notWritten(file, config.store.file, fault);
  for (const words of logWords(summary)) console.error(words);
  if (options.json) console.log(JSON.stringify({ file, ...summary }));
  else
    console.log(
      `${counted(summary.readings, 'reading')} from ${file} taken into ${config.store.file}; ${counted(summary.faulty, 'faulty line')} left out. Imported readings make no night sheet, for nothing was decided by them; \`rimehold estimate\` tells the ice through a log.`,
    );
  return summary.faulty === 0 ? EXIT.yes : EXIT.no;
}

function counted(count: number, what: string): string {
  return `${count} ${what}${count === 1 ? '' : 's'}`;
}

/** A full disk while a log comes in: unlike in the daemon nothing waits, but nothing is gone either. */
function notWritten(log: string, database: string, fault: RimeholdError): RimeholdError {
  if (fault.code !== 'store-full') return fault;
  return new RimeholdError(
    'store-full',
    `Expected room in ${database} for all of ${log}, found its disk full or refusing writes; free some space and import it again: no reading is counted twice.`,
    fault.context,
    { cause: fault },
  );
}

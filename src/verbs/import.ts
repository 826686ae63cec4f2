/** `rimehold import F.csv`: a reading log into the store. A faulty line is named and left out; the rest comes in. */
import { createReadStream } from 'node:fs';
import { createInterface } from 'node:readline';
import { EXIT, RimeholdError } from '../errors.ts';
import type { Reading } from '../points.ts';
import { isLogHeader, LOG_HEADER, parseLogLine } from '../reading-log.ts';
import { loadSite, siteStore } from './site.ts';

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
            `${file}: expected the header "${LOG_HEADER}" on line 1, found "${text.slice(0, 60)}".`,
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
        if (faults.length < FAULTS_SHOWN) faults.push(`${file}, line ${number}: ${line.sentence}.`);
      }
    }
  } catch (error) {
    if (error instanceof RimeholdError) throw error;
    throw new RimeholdError(
      'file-unreadable',
      `Expected a reading log in ${file}, but it cannot be read: ${String(error)}.`,
      { file },
      { cause: error },
    );
  }
  if (number === 0)
    throw new RimeholdError(
      'usage',
      `${file}: expected the header "${LOG_HEADER}" on line 1, found an empty file.`,
      { file },
    );
  take(batch);
  return { readings, faulty, faults, dropped };
}

/** Sentences about a log, for standard error. */
export function logWords({ faulty, faults, dropped }: LogSummary): string[] {
  const more = faulty > faults.length ? [`… and ${faulty - faults.length} more faulty lines.`] : [];
  const drops = Object.entries(dropped).map(([name, count]) => `Dropped ${count} × ${name}.`);
  return [...faults, ...more, ...drops];
}

export async function importLog(file: string, options: { config: string; json?: boolean }): Promise<number> {
  const config = loadSite(options.config);
  const store = siteStore(config, false);
  let summary: LogSummary;
  try {
    summary = await readLog(file, (readings) => store.addReadings(readings));
  } finally {
    const { fault } = store.close();
    if (fault !== null) throw fault;
  }
  for (const words of logWords(summary)) console.error(words);
  if (options.json) console.log(JSON.stringify({ file, ...summary }));
  else
    console.log(
      `${summary.readings} readings from ${file} are in ${config.store.file}; ${summary.faulty} faulty lines left out.`,
    );
  return summary.faulty === 0 ? EXIT.yes : EXIT.no;
}

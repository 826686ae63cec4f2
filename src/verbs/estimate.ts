/** `rimehold estimate`: ice on hand through a reading log, offline, by the same estimator. */
import { EXIT } from '../errors.ts';
import { estimateLog, LONGEST_SILENCE_MS, type LogRow } from '../estimation/offline.ts';
import type { Reading } from '../points.ts';
import { DAY_MS, formatInstant } from '../time.ts';
import { logWords, readLog } from './import.ts';
import { loadSite, writeText } from './site.ts';

const HEADER = 'time,ice_on_hand_kwh,low_kwh,high_kwh,ice_kg,inventory_pct';

export async function estimate(options: {
  config: string;
  readings: string;
  out: string;
  begins?: 'full' | 'empty';
  json?: boolean;
}): Promise<number> {
  const config = loadSite(options.config);
  const readings: Reading[] = [];
  const summary = await readLog(options.readings, (batch) => {
    for (const reading of batch) readings.push(reading);
  });
  for (const words of logWords(summary)) console.error(words);
  readings.sort((a, b) => a.atMs - b.atMs);
  const { begins } = options;
  const rows = estimateLog(config, readings, begins ? { begins } : {});
  for (const words of silenceWords(rows)) console.error(words);
  const csv = `${[HEADER, ...rows.map(csvRow)].join('\r\n')}\r\n`;
  writeText(options.out, csv, 'the estimate', 'name another file with --out');
  const last = rows.at(-1) ?? null;
  if (options.json) console.log(JSON.stringify({ out: options.out, rows: rows.length, ...summary, last }));
  else console.log(words(options.out, rows.length, last));
  if (rows.length === 0) return EXIT.no;
  return summary.faulty === 0 ? EXIT.yes : EXIT.no;
}

function csvRow(row: LogRow): string {
  const { atMs, iceOnHandKwh, lowKwh, highKwh, iceKg, inventoryPct } = row;
  return [
    formatInstant(atMs),
    iceOnHandKwh.toFixed(4),
    lowKwh.toFixed(4),
    highKwh.toFixed(4),
    iceKg.toFixed(3),
    inventoryPct.toFixed(3),
  ].join(',');
}

/** Says where the log was silent for so long that no row was made of it. */
function silenceWords(rows: readonly LogRow[]): string[] {
  const silences = rows.flatMap(({ atMs }, i) =>
    i > 0 && atMs - rows[i - 1].atMs > LONGEST_SILENCE_MS ? [{ fromMs: rows[i - 1].atMs, toMs: atMs }] : [],
  );
  if (silences.length === 0) return [];
  const longest = silences.reduce((a, b) => (b.toMs - b.fromMs > a.toMs - a.fromMs ? b : a));
  const days = Math.round((longest.toMs - longest.fromMs) / DAY_MS);
  return [
    `Passed over ${silences.length === 1 ? 'a silence' : `${silences.length} silences`} of more than ${LONGEST_SILENCE_MS / DAY_MS} days, the longest from ${formatInstant(longest.fromMs)} to ${formatInstant(longest.toMs)} (${days} days); if the log was not silent, look for a wrong date there.`,
  ];
}

function words(out: string, count: number, last: LogRow | null): string {
  if (last === null) return `The log holds no reading, so ${out} holds only its header.`;
  return `${count} rows are in ${out}. At the end: ${last.iceOnHandKwh.toFixed(2)} kWh of ice on hand (${last.lowKwh.toFixed(2)} to ${last.highKwh.toFixed(2)}), ${last.iceKg.toFixed(1)} kg.`;
}

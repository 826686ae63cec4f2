/** `rimehold nights`: the ledger of nights. */
import { EXIT, RimeholdError } from '../errors.ts';
import { readSheet } from '../reports/night-schema.ts';
import { renderCsv } from '../reports/render-csv.ts';
import { noonOf } from '../time.ts';
import { nightsKept } from './night.ts';
import { loadSite, siteStore } from './site.ts';

export function nights(options: {
  config: string;
  from?: string;
  to?: string;
  csv?: boolean;
  json?: boolean;
}): number {
  const config = loadSite(options.config);
  const { from, to } = options;
  checkDate('--from', from, config.site.zone);
  checkDate('--to', to, config.site.zone);
  const store = siteStore(config, true);
  try {
    const sheets = store.sheets(from, to).flatMap(({ body }) => readSheet(body) ?? []);
    if (options.json) console.log(JSON.stringify(sheets));
    else process.stdout.write(renderCsv(sheets));
    if (sheets.length > 0) return EXIT.yes;
    console.error(`Expected night sheets${spanWords(from, to)}, found none; ${nightsKept(store)}.`);
    return EXIT.no;
  } finally {
    store.close();
  }
}

function checkDate(option: string, date: string | undefined, zone: string): void {
  if (date === undefined) return;
  try {
    noonOf(zone, date);
  } catch (cause) {
    const sentence = `Expected ${option} with a date as YYYY-MM-DD, found "${date}".`;
    throw new RimeholdError('usage', sentence, { option, date }, { cause });
  }
}

function spanWords(from: string | undefined, to: string | undefined): string {
  return `${from === undefined ? '' : ` from ${from}`}${to === undefined ? '' : ` to ${to}`}`;
}

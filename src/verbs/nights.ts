/** `rimehold nights`: the ledger of nights and what drifts, of one site or of several side by side. */
import type { SiteConfig } from '../config.ts';
import { EXIT, RimeholdError } from '../errors.ts';
import { ledgerOf } from '../reports/ledger.ts';
import { readSheet, type NightSheet } from '../reports/night-schema.ts';
import { renderLedgerCsv, renderLedgerText } from '../reports/render-ledger.ts';
import { noonOf } from '../time.ts';
import { nightsKept } from './night.ts';
import { loadSite, siteStore } from './site.ts';

export interface NightsOptions {
  /** One site file, or several. */
  readonly config: readonly string[];
  readonly from?: string;
  readonly to?: string;
  readonly csv?: boolean;
  readonly json?: boolean;
}

export function nights(options: NightsOptions): number {
  const { from, to, csv, json } = options;
  const sites = options.config.map(loadSite);
  checkDate('--from', from, sites[0].site.zone);
  checkDate('--to', to, sites[0].site.zone);
  if (from !== undefined && to !== undefined && from > to)
    throw new RimeholdError(
      'usage',
      `Expected --from no later than --to, found ${from} and ${to}; swap them.`,
    );
  const range = { ...(from === undefined ? {} : { from }), ...(to === undefined ? {} : { to }) };
  const read = sites.map(sheetsOf);
  const sheets = read.flatMap((one) => one.sheets);
  const inRange = sheets.filter(({ night }) => night.date >= (from ?? '') && night.date <= (to ?? '9999'));
  if (json) console.log(JSON.stringify(ledgerOf(sheets, range)));
  else if (csv) process.stdout.write(renderLedgerCsv(inRange));
  else if (inRange.length > 0) process.stdout.write(`${renderLedgerText(ledgerOf(sheets, range))}\n`);
  if (inRange.length > 0) return EXIT.yes;
  console.error(
    `Expected night sheets${spanWords(from, to)}, found none; ${read.map((one) => one.kept).join('; ')}.`,
  );
  return EXIT.no;
}

/** All sheets of a site: what drifts shows only over weeks, whichever nights are looked at. */
function sheetsOf(config: SiteConfig): { sheets: NightSheet[]; kept: string } {
  const store = siteStore(config, true);
  try {
    return { sheets: store.sheets().flatMap(({ body }) => readSheet(body) ?? []), kept: nightsKept(store) };
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

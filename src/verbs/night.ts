/** `rimehold night [DATE]`: one night sheet as text, JSON or a page that prints on one sheet. */
import type { SiteConfig } from '../config.ts';
import { sheetFor, storedSheet } from '../daemon/nights.ts';
import { EXIT, RimeholdError } from '../errors.ts';
import { renderHtml } from '../reports/render-html.ts';
import { renderText } from '../reports/render-text.ts';
import type { Store } from '../store/store.ts';
import { localDate, nightOf } from '../time.ts';
import { loadSite, siteStore } from './site.ts';

export function night(
  date: string | undefined,
  options: { config: string; json?: boolean; html?: boolean; revision?: string },
): number {
  const revision = wantedRevision(options.revision);
  const config = loadSite(options.config);
  const store = siteStore(config, true);
  try {
    const wanted = wantedDate(config, store, date);
    const newest = sheetFor(config, store, wanted, nowMs(store));
    const sheet = revision === null ? newest : storedSheet(store, wanted, revision);
    if (sheet === null && newest !== null) {
      console.error(
        `Expected a revision that the sheet of ${wanted} has, found --revision ${revision}; the newest is ${newest.revision}.`,
      );
      return EXIT.no;
    }
    if (sheet === null) {
      console.error(`Expected a night with records, found none for ${wanted}; ${nightsKept(store)}.`);
      return EXIT.no;
    }
    process.stdout.write(
      options.json
        ? `${JSON.stringify(sheet)}\n`
        : options.html
          ? renderHtml(sheet)
          : `${renderText(sheet)}\n`,
    );
    if (newest !== null && sheet.revision < newest.revision)
      console.error(
        `This is revision ${sheet.revision}; the newest is ${newest.revision}, made because ${newest.revisedBecause}.`,
      );
    return EXIT.yes;
  } finally {
    store.close();
  }
}

function wantedRevision(text: string | undefined): number | null {
  if (text === undefined) return null;
  if (/^[1-9]\d{0,5}$/.test(text)) return Number(text);
  throw new RimeholdError('usage', `Expected --revision with a number from 1 on, found "${text}".`);
}

/** The date that was named, or that of the last closed night. */
function wantedDate(config: SiteConfig, store: Store, date: string | undefined): string {
  const { zone } = config.site;
  if (date !== undefined) return nightOf(zone, date).date;
  return store.sheets().at(-1)?.date ?? localDate(zone, nowMs(store));
}

/** On a lapse clock the records may be ahead of this machine's time. */
function nowMs(store: Store): number {
  return Math.max(Date.now(), store.latestRecord()?.atMs ?? 0);
}

/** Which nights can be shown, for a person who asked for another one. */
export function nightsKept(store: Store): string {
  const known = store.sheets();
  return known.length === 0
    ? 'no night is closed yet: the first sheet comes at the first noon after a night on which the daemon ran'
    : `name one from ${known[0].date} to ${known[known.length - 1].date}`;
}

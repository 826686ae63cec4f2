/** `rimehold night [DATE]`: one night sheet as text, JSON or a page that prints on one sheet. */
import type { SiteConfig } from '../config.ts';
import { sheetFor } from '../daemon/nights.ts';
import { EXIT, RimeholdError } from '../errors.ts';
import type { NightSheet } from '../reports/night-schema.ts';
import { renderHtml } from '../reports/render-html.ts';
import { renderText } from '../reports/render-text.ts';
import type { Store } from '../store/store.ts';
import { localDate, nightOf } from '../time.ts';
import { loadSite, siteStore } from './site.ts';

export function night(
  date: string | undefined,
  options: { config: string; json?: boolean; html?: boolean },
): number {
  const config = loadSite(options.config);
  const store = siteStore(config, true);
  try {
    const sheet = find(config, store, date);
    process.stdout.write(
      options.json
        ? `${JSON.stringify(sheet)}\n`
        : options.html
          ? renderHtml(sheet)
          : `${renderText(sheet)}\n`,
    );
    return EXIT.yes;
  } finally {
    store.close();
  }
}

/** The sheet of a date, or of the last closed night when none is named. */
function find(config: SiteConfig, store: Store, date: string | undefined): NightSheet {
  const { zone } = config.site;
  const nowMs = Math.max(Date.now(), store.latestRecord()?.atMs ?? 0);
  if (date !== undefined) nightOf(zone, date);
  const wanted = date ?? store.sheets().at(-1)?.date ?? localDate(zone, nowMs);
  const sheet = sheetFor(config, store, wanted, nowMs);
  if (sheet !== null) return sheet;
  const known = store.sheets();
  const have =
    known.length === 0
      ? 'no night is closed yet; the first sheet comes at the first noon after a night on which the daemon ran'
      : `nights from ${known[0].date} to ${known[known.length - 1].date} have sheets`;
  throw new RimeholdError('usage', `Expected a night with records, found none for ${wanted}; ${have}.`, {
    date: wanted,
  });
}

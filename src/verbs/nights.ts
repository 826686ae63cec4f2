/** `rimehold nights`: the ledger of nights. */
import { EXIT } from '../errors.ts';
import { readSheet } from '../reports/night-schema.ts';
import { renderCsv } from '../reports/render-csv.ts';
import { noonOf } from '../time.ts';
import { loadSite, siteStore } from './site.ts';

export function nights(options: {
  config: string;
  from?: string;
  to?: string;
  csv?: boolean;
  json?: boolean;
}): number {
  const config = loadSite(options.config);
  for (const date of [options.from, options.to]) if (date !== undefined) noonOf(config.site.zone, date);
  const store = siteStore(config, true);
  try {
    const sheets = store.sheets(options.from, options.to).flatMap(({ body }) => readSheet(body) ?? []);
    if (options.json) console.log(JSON.stringify(sheets));
    else process.stdout.write(renderCsv(sheets));
    return sheets.length > 0 ? EXIT.yes : EXIT.no;
  } finally {
    store.close();
  }
}

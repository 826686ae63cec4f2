/** `rimehold bill --month YYYY-MM`: a month's bill, recomputed from stored energy, as text, CSV or JSON. */
import type { SiteConfig } from '../config.ts';
import { EXIT } from '../errors.ts';
import { noted, PAPER_WIDTH, rule, table, wrapped } from '../reports/paper.ts';
import { csvLines } from '../reports/render-csv.ts';
import type { Bill, BillLine } from '../tariff/bill.ts';
import { billFromRecords } from '../tariff/billed.ts';
import { monthAt } from '../tariff/demand.ts';
import { meterZone } from '../tariff/terms.ts';
import { formatInstant, localDate, ZONE_DATA_VERSION } from '../time.ts';
import { loadSite, siteStore } from './site.ts';

export interface BillOptions {
  readonly config: string;
  /** The last whole month when left out. */
  readonly month?: string;
  readonly csv?: boolean;
  readonly json?: boolean;
}

export function bill(options: BillOptions): number {
  const config = loadSite(options.config);
  const store = siteStore(config, true);
  try {
    const nowMs = Math.max(Date.now(), store.latestRecord()?.atMs ?? 0);
    const month = options.month ?? monthBefore(meterZone(config), nowMs);
    const made = billFromRecords(config, month, (fromMs, toMs) => store.recordsBetween(fromMs, toMs));
    if (made.heard === 0) {
      console.error(
        `Expected stored energy in ${month}, found none; ${kept(config, store.firstRecordMs())}.`,
      );
      return EXIT.no;
    }
    const notes = notesOf(config, made);
    if (options.json) console.log(JSON.stringify(jsonOf(config, made, notes)));
    else if (options.csv) process.stdout.write(csvOf(config, made));
    else console.log(text(config, made, notes));
    return EXIT.yes;
  } finally {
    store.close();
  }
}

function monthBefore(zone: string, nowMs: number): string {
  return localDate(zone, monthAt(zone, nowMs).startMs - 1).slice(0, 7);
}

function kept(config: SiteConfig, firstMs: number | null): string {
  return firstMs === null
    ? 'nothing is recorded yet: the daemon records while it runs'
    : `name a month from ${localDate(meterZone(config), firstMs).slice(0, 7)} on`;
}

/** What keeps the figure from being the supplier's; empty when nothing does. */
function notesOf(config: SiteConfig, { heard }: Bill): string[] {
  const partial =
    heard < 0.9995
      ? [
          `Only ${(Math.min(heard, 0.999) * 100).toFixed(1)} % of the month was heard; energy of the rest is not in this bill.`,
        ]
      : [];
  const plantOnly =
    'grid-power' in config.points
      ? []
      : ['There is no grid-power point: only the electricity of the cooling plant is counted.'];
  return [...partial, ...plantOnly];
}

function text(config: SiteConfig, made: Bill, notes: readonly string[]): string {
  const { currency, name } = config.site;
  const zone = meterZone(config);
  const heading = `${name}: bill of ${made.month} on the meter's clock, ${zone}, zone rules ${ZONE_DATA_VERSION}`;
  const rows = made.lines.map((line) => [
    line.what,
    figure(line),
    `${line.price.toFixed(4)} ${currency}/${line.unit}`,
    line.amountMoney.toFixed(2),
  ]);
  const total = ['total', '', currency, made.totalMoney.toFixed(2)];
  const lines = table([...rows, total]);
  const wide = Math.min(PAPER_WIDTH, Math.max(...lines.map((line) => line.length)));
  return [
    ...wrapped(heading),
    rule().slice(0, wide),
    ...lines.slice(0, -1),
    rule().slice(0, wide),
    lines[lines.length - 1],
    ...notes.flatMap((note) => noted('', note, 0)),
  ].join('\n');
}

const figure = ({ quantity, unit }: BillLine): string =>
  unit === 'month' || unit === 'day'
    ? `${quantity} ${quantity === 1 ? unit : `${unit}s`}`
    : `${quantity.toFixed(3)} ${unit}`;

function csvOf(config: SiteConfig, made: Bill): string {
  const { id, currency } = config.site;
  const row = (what: string, line: BillLine | null, amount: number) => [
    id,
    made.month,
    what,
    line?.quantity ?? null,
    line?.unit ?? null,
    line === null ? null : Number(line.price.toFixed(6)),
    currency,
    amount,
  ];
  return csvLines([
    ['site', 'month', 'what', 'quantity', 'unit', 'price', 'currency', 'amount'],
    ...made.lines.map((line) => row(line.what, line, line.amountMoney)),
    row('total', null, made.totalMoney),
  ]);
}

function jsonOf(config: SiteConfig, made: Bill, notes: readonly string[]): Record<string, unknown> {
  return {
    site: config.site.id,
    month: made.month,
    zone: meterZone(config),
    zoneData: ZONE_DATA_VERSION,
    start: formatInstant(made.startMs),
    end: formatInstant(made.endMs),
    currency: config.site.currency,
    lines: made.lines,
    totalMoney: made.totalMoney,
    heardPct: Math.min(100, 100 * made.heard),
    notes,
  };
}

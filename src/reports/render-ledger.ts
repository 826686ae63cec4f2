/** The ledger for a terminal, 80 columns, and as CSV. */
import { displayFor, figures, fixed, monthWords, type Display } from './display.ts';
import type { Ledger, LedgerRow, LedgerSite, LedgerTotal } from './ledger.ts';
import type { NightSheet } from './night-schema.ts';
import { bothEnds, noted, rule, table, wrapped } from './paper.ts';
import { renderCsv } from './render-csv.ts';

const MARGIN = 12;

export function renderLedgerText(ledger: Ledger): string {
  if (ledger.sites.length === 0) {
    return 'No night has been written yet; the first sheet comes at the noon after the first night on which the daemon ran.\n';
  }
  const lines = ledger.sites.flatMap((site) => siteLines(site));
  return `${[...lines, ...togetherLines(ledger)].map((line) => line.trimEnd()).join('\n')}\n`;
}

function siteLines(site: LedgerSite): string[] {
  const show = displayFor(site.site);
  const count = site.rows.length;
  const head = [
    'night',
    'made',
    'melted',
    'leaked',
    'end',
    'kWh el.',
    show.currency,
    'saved',
    'COP',
    show.degreeHourUnit,
    'resid.',
  ];
  const cells = [head, ...rowsByMonth(site).map((row) => cellsOf(row, show))];
  const printed = table(cells, 1, ' ');
  const [header, ...body] = printed;
  return [
    bothEnds(`LEDGER  ${site.site.name}`, `${count} night${count === 1 ? '' : 's'}, ice in ${show.heatUnit}`),
    rule(),
    header,
    ...rowsByMonth(site).flatMap((row, at) => ruledLine(row, body[at])),
    '',
    ...driftLines(site),
    '',
  ];
}

type Line = LedgerRow | LedgerTotal;

const isTotal = (line: Line): line is LedgerTotal => 'month' in line;

/** Nights in order, each month followed by its total. */
function rowsByMonth(site: LedgerSite): Line[] {
  return site.months.flatMap((month): Line[] => [
    ...site.rows.filter((row) => row.night.startsWith(month.month)),
    month,
  ]);
}

function ruledLine(line: Line, text: string): string[] {
  if (isTotal(line)) return [rule(), text, rule()];
  return [text, ...line.notes.flatMap((note) => noted('', note, MARGIN))];
}

function cellsOf(line: Line, show: Display): string[] {
  const total = isTotal(line);
  return [
    total ? `${line.month} \u03a3` : `${line.night}${line.whole ? '' : '*'}`,
    show.heat(line.madeKwh),
    show.heat(line.meltedKwh),
    show.heat(line.leakedKwh),
    total ? `${line.nights} n` : show.heat(line.endKwh),
    figures(line.electricityKwh, 2),
    show.money(line.money),
    line.savedMoney === null ? '' : show.money(line.savedMoney),
    line.cop === null ? '' : fixed(line.cop, 2),
    show.degreeHours(line.warmKh),
    line.residualPct === null ? '' : `${fixed(line.residualPct, 1)}%`,
  ];
}

function driftLines(site: LedgerSite): string[] {
  const found =
    site.drift.length === 0
      ? ['Nothing drifts that these nights can tell.']
      : site.drift.flatMap((one) => wrapped(`${one.sentence} ${one.look}`));
  const hidden = site.watch.filter((one) => one.sight === 'out-of-sight');
  const waiting = site.watch.filter((one) => one.sight === 'not-yet').map(nameOf);
  return [
    ...found,
    ...(waiting.length === 0 ? [] : wrapped(`Not told by enough nights yet: ${waiting.join(', ')}.`)),
    ...hidden.flatMap((one) => wrapped(`Out of sight: ${nameOf(one)}; ${one.because}.`)),
  ];
}

function nameOf({ signature }: LedgerSite['watch'][number]): string {
  return signature.replaceAll('-', ' ');
}

function togetherLines(ledger: Ledger): string[] {
  if (ledger.together.length === 0) return [];
  const rows = ledger.together.map((one) => [
    monthWords(one.month),
    `${one.sites}`,
    `${one.nights}`,
    fixed(one.madeKwh, 1),
    fixed(one.electricityKwh, 1),
    `${fixed(one.money, 2)} ${one.currency}`,
    one.savedMoney === null ? '' : `${fixed(one.savedMoney, 2)} ${one.currency}`,
    one.cop === null ? '' : fixed(one.cop, 2),
  ]);
  return [
    'TOGETHER',
    rule(),
    ...table([['month', 'sites', 'nights', 'made kWh', 'electricity kWh', 'money', 'saved', 'COP'], ...rows]),
  ];
}

/** One row a night of every site, the columns of a single sheet. Month totals are left to the reader's own sums. */
export function renderLedgerCsv(sheets: readonly NightSheet[]): string {
  return renderCsv(sheets.toSorted((a, b) => (orderOf(a) < orderOf(b) ? -1 : 1)));
}

function orderOf(sheet: NightSheet): string {
  return `${sheet.site.id} ${sheet.night.date}`;
}

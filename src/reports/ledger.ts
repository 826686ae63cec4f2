/** The ledger: a row a night, a total a month, what drifts, for one site or for several side by side. */
import type { DriftFinding } from './drift.ts';
import { driftOf } from './drift.ts';
import { minorDigits } from './display.ts';
import { grouped } from './grouped.ts';
import type { NightSheet } from './night-schema.ts';
import { whyNotKnown } from './not-known.ts';
import { rounded, roundedOrNull } from './spans.ts';
import { watchOf, type Watch } from './watch.ts';

export const LEDGER_SCHEMA = 'rimehold/ledger/1';

export interface LedgerRow {
  readonly night: string;
  readonly revision: number;
  readonly whole: boolean;
  readonly madeKwh: number;
  readonly meltedKwh: number;
  readonly leakedKwh: number;
  readonly endKwh: number;
  readonly electricityKwh: number;
  readonly money: number;
  readonly savedMoney: number | null;
  readonly cop: number | null;
  readonly warmKh: number;
  readonly residualPct: number | null;
  /** The margin: why it is partial, where the balance is open, what drifts since that night. */
  readonly notes: readonly string[];
}

export interface LedgerTotal {
  /** `YYYY-MM`, by the date of the evening. */
  readonly month: string;
  readonly nights: number;
  readonly wholeNights: number;
  readonly madeKwh: number;
  readonly meltedKwh: number;
  readonly leakedKwh: number;
  readonly electricityKwh: number;
  readonly money: number;
  /** Against no storage, over the nights that were compared. */
  readonly savedMoney: number | null;
  readonly cop: number | null;
  readonly warmKh: number;
  /** Residual of the month over its throughput: errors of single nights that cancel are no drift. */
  readonly residualPct: number | null;
}

export interface LedgerSite {
  readonly site: NightSheet['site'];
  readonly rows: readonly LedgerRow[];
  readonly months: readonly LedgerTotal[];
  readonly drift: readonly DriftFinding[];
  /** Each trouble, the figures it is read from, and why it is out of sight where it is. */
  readonly watch: readonly Watch[];
}

export interface Ledger {
  readonly schema: typeof LEDGER_SCHEMA;
  readonly sites: readonly LedgerSite[];
  /** Totals of all sites of one currency by month; empty when there is only one site. */
  readonly together: readonly (LedgerTotal & { readonly currency: string; readonly sites: number })[];
}

/**
 * The newest revisions of many nights in any order, of one or several sites. Drift is read from all of them; the rows
 * shown may be fewer: `from` and `to` are dates, both included.
 */
export function ledgerOf(sheets: readonly NightSheet[], range: { from?: string; to?: string } = {}): Ledger {
  const bySite = grouped(sheets, (sheet) => sheet.site.id);
  const inRange = (sheet: NightSheet): boolean =>
    sheet.night.date >= (range.from ?? '') && sheet.night.date <= (range.to ?? '9999');
  const sites = [...bySite.values()].map((all) => {
    const nights = all.toSorted((a, b) => (a.night.date < b.night.date ? -1 : 1));
    const drift = driftOf(nights);
    const shown = nights.filter(inRange);
    return {
      site: nights[nights.length - 1].site,
      rows: shown.map((sheet) => rowOf(sheet, drift)),
      months: totalsOf(shown),
      drift,
      watch: watchOf(nights),
    };
  });
  return { schema: LEDGER_SCHEMA, sites, together: togetherOf(sheets.filter(inRange), bySite.size) };
}

function savedOf(sheet: NightSheet): number | null {
  if (whyNotKnown(sheet) !== '') return null;
  return sheet.comparisons.find((one) => one.strategy === 'no-storage')?.savedMoney ?? null;
}

function rowOf(sheet: NightSheet, drift: readonly DriftFinding[]): LedgerRow {
  const notKnown = whyNotKnown(sheet);
  const notes = [
    ...(sheet.partialBecause === '' ? [] : [`partial: ${sheet.partialBecause}`]),
    ...(notKnown === '' ? [] : [`saved and residual not known: ${notKnown}`]),
    ...(notKnown === '' && sheet.balance.verdict === 'open'
      ? [`balance open: ${sheet.balance.culprit.split(';')[0]}`]
      : []),
    ...drift.filter((one) => one.since === sheet.night.date).map((one) => one.note),
  ];
  return {
    night: sheet.night.date,
    revision: sheet.revision,
    whole: sheet.whole,
    madeKwh: sheet.made.kwh,
    meltedKwh: sheet.melted.kwh,
    leakedKwh: sheet.leaked.kwh,
    endKwh: sheet.ice.endKwh,
    electricityKwh: sheet.electricity.totalKwh,
    money: sheet.electricity.money,
    savedMoney: savedOf(sheet),
    cop: sheet.cop.machine,
    warmKh: sheet.comfort.warmKh,
    residualPct: notKnown === '' ? sheet.balance.residualPct : null,
    notes,
  };
}

/** Rounded as each row shows it, so that a total is the sum of its rows. */
function inCents({ site }: NightSheet, money: number): number {
  return rounded(money, minorDigits(site.currency));
}

function totalsOf(sheets: readonly NightSheet[]): LedgerTotal[] {
  const months = grouped(sheets, (sheet) => sheet.night.date.slice(0, 7));
  return [...months]
    .toSorted(([a], [b]) => (a < b ? -1 : 1))
    .map(([month, nights]) => totalOf(month, nights));
}

function totalOf(month: string, nights: readonly NightSheet[]): LedgerTotal {
  const sum = (pick: (sheet: NightSheet) => number): number =>
    nights.reduce((total, one) => total + pick(one), 0);
  const saved = nights.flatMap((sheet) => {
    const one = savedOf(sheet);
    return one === null ? [] : [inCents(sheet, one)];
  });
  const machineKwh = sum((sheet) => (sheet.cop.machine === null ? 0 : sheet.electricity.machineKwh));
  // what was made while the power was heard, as in the COP of each night
  const madeKwh = sum((sheet) => (sheet.cop.machine ?? 0) * sheet.electricity.machineKwh);
  const balanced = nights.filter((sheet) => whyNotKnown(sheet) === '').map((sheet) => sheet.balance);
  const over = (pick: (balance: NightSheet['balance']) => number): number =>
    balanced.reduce((total, one) => total + pick(one), 0);
  const throughput = Math.max(
    over((one) => one.inKwh),
    over((one) => one.outKwh + one.leakKwh),
  );
  return {
    month,
    nights: nights.length,
    wholeNights: nights.filter((sheet) => sheet.whole).length,
    madeKwh: rounded(
      sum((sheet) => sheet.made.kwh),
      3,
    ),
    meltedKwh: rounded(
      sum((sheet) => sheet.melted.kwh),
      3,
    ),
    leakedKwh: rounded(
      sum((sheet) => sheet.leaked.kwh),
      3,
    ),
    electricityKwh: rounded(
      sum((sheet) => sheet.electricity.totalKwh),
      3,
    ),
    money: rounded(
      sum((sheet) => inCents(sheet, sheet.electricity.money)),
      4,
    ),
    savedMoney:
      saved.length === 0
        ? null
        : rounded(
            saved.reduce((total, one) => total + one, 0),
            4,
          ),
    cop: roundedOrNull(machineKwh > 0 ? madeKwh / machineKwh : null, 3),
    warmKh: rounded(
      sum((sheet) => sheet.comfort.warmKh),
      3,
    ),
    residualPct: roundedOrNull(
      throughput > 1 ? (over((one) => one.residualKwh) / throughput) * 100 : null,
      2,
    ),
  };
}

function togetherOf(sheets: readonly NightSheet[], siteCount: number): Ledger['together'] {
  if (siteCount < 2) return [];
  const groups = [...grouped(sheets, (sheet) => sheet.site.currency)];
  return groups.flatMap(([currency, nights]) =>
    totalsOf(nights).map((total) => ({
      ...total,
      currency,
      sites: new Set(nights.filter((one) => one.night.date.startsWith(total.month)).map((one) => one.site.id))
        .size,
    })),
  );
}

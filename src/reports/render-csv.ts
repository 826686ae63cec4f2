/**
 * CSV after RFC 4180: CRLF after each record, a header, fields quoted where they must be. Times are RFC 3339 UTC and figures
 * SI with a decimal point, whatever the site shows: machines read these. A text that a spreadsheet would take for a formula gets a
 * leading apostrophe.
 */
import type { NightSheet } from './night-schema.ts';

export type CsvCell = string | number | boolean | null;

export function csvLines(rows: readonly (readonly CsvCell[])[]): string {
  return rows.map((row) => `${row.map(csvCell).join(',')}\r\n`).join('');
}

function csvCell(cell: CsvCell): string {
  if (cell === null) return '';
  if (typeof cell !== 'string') return String(cell);
  const safe = /^[=+\-@\t\r]/.test(cell) ? `'${cell}` : cell;
  return /[",\r\n]/.test(safe) ? `"${safe.replaceAll('"', '""')}"` : safe;
}

type Column = readonly [name: string, of: (sheet: NightSheet) => CsvCell];

/** One row a night; the ledger and a single sheet share the columns. */
export const NIGHT_COLUMNS: readonly Column[] = [
  ['site', (sheet) => sheet.site.id],
  ['night', (sheet) => sheet.night.date],
  ['revision', (sheet) => sheet.revision],
  ['start', (sheet) => sheet.night.start],
  ['end', (sheet) => sheet.night.end],
  ['whole', (sheet) => sheet.whole],
  ['covered_pct', (sheet) => sheet.coveredPct],
  ['partial_because', (sheet) => sheet.partialBecause],
  ['strategy', (sheet) => sheet.strategy],
  ['ice_start_kwh', (sheet) => sheet.ice.startKwh],
  ['ice_start_low_kwh', (sheet) => sheet.ice.startLowKwh],
  ['ice_start_high_kwh', (sheet) => sheet.ice.startHighKwh],
  ['ice_end_kwh', (sheet) => sheet.ice.endKwh],
  ['ice_end_low_kwh', (sheet) => sheet.ice.endLowKwh],
  ['ice_end_high_kwh', (sheet) => sheet.ice.endHighKwh],
  ['ice_lowest_kwh', (sheet) => sheet.ice.lowestKwh],
  ['made_kwh', (sheet) => sheet.made.kwh],
  ['made_kg', (sheet) => sheet.made.kg],
  ['melted_kwh', (sheet) => sheet.melted.kwh],
  ['melted_kg', (sheet) => sheet.melted.kg],
  ['leaked_kwh', (sheet) => sheet.leaked.kwh],
  ['leaked_kg', (sheet) => sheet.leaked.kg],
  ['residual_kwh', (sheet) => sheet.balance.residualKwh],
  ['residual_pct', (sheet) => sheet.balance.residualPct],
  ['balance', (sheet) => sheet.balance.verdict],
  ['culprit', (sheet) => sheet.balance.culprit],
  ['machine_kwh', (sheet) => sheet.electricity.machineKwh],
  ['pump_kwh', (sheet) => sheet.electricity.pumpKwh],
  ['fan_kwh', (sheet) => sheet.electricity.fanKwh],
  ['electricity_kwh', (sheet) => sheet.electricity.totalKwh],
  ['money', (sheet) => sheet.electricity.money],
  ['currency', (sheet) => sheet.site.currency],
  ['saved_against_no_storage', savedAgainst('no-storage')],
  ['saved_against_storage_priority', savedAgainst('storage-priority')],
  ['saved_against_chiller_priority', savedAgainst('chiller-priority')],
  ['saved_against_timetable', savedAgainst('timetable')],
  ['cop_machine', (sheet) => sheet.cop.machine],
  ['cop_with_pump_and_fan', (sheet) => sheet.cop.withPumpAndFan],
  ['delivered_kwh', (sheet) => sheet.delivered.kwh],
  ['sensible_kwh', (sheet) => sheet.delivered.sensibleKwh],
  ['latent_kwh', (sheet) => sheet.delivered.latentKwh],
  ['condensate_kg', (sheet) => sheet.delivered.condensateKg],
  ['warm_kh', (sheet) => sheet.comfort.warmKh],
  ['warm_minutes', (sheet) => sheet.comfort.warmMinutes],
  ['warmest_c', (sheet) => sheet.comfort.warmestC],
  ['outdoor_mean_c', (sheet) => sheet.weather.outdoorMeanC],
  ['outdoor_max_c', (sheet) => sheet.weather.outdoorMaxC],
  ['forecast_load_kwh', (sheet) => sheet.forecast?.load?.expectedKwh ?? null],
  ['load_kwh', (sheet) => sheet.forecast?.load?.cameKwh ?? null],
  ['forecast_outdoor_abs_error_k', (sheet) => sheet.forecast?.outdoor?.meanAbsK ?? null],
  ['commands', (sheet) => sheet.commands.length],
  ['held_back_minutes', (sheet) => sheet.interlocks.reduce((sum, one) => sum + one.minutes, 0)],
];

function savedAgainst(strategy: NightSheet['comparisons'][number]['strategy']): Column[1] {
  return (sheet) => sheet.comparisons.find((one) => one.strategy === strategy)?.savedMoney ?? null;
}

export function renderCsv(sheets: readonly NightSheet[]): string {
  return csvLines([
    NIGHT_COLUMNS.map(([name]) => name),
    ...sheets.map((sheet) => NIGHT_COLUMNS.map(([, of]) => of(sheet))),
  ]);
}

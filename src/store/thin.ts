/**
 * Old cycle records, one for each quarter of an hour and stretch of equal command, mode, price and clock. What adds up
 * is added up, what flows is averaged by time, what stands at the end is taken from the end: the energy of a night
 * summed over thinned records is the energy summed over the full ones. Thinning twice changes nothing.
 */
import type { CycleRecord } from '../record.ts';

const QUARTER_MS = 15 * 60_000;

type Field = keyof CycleRecord;

/** Means over the time of the records that have a value. All else is taken from the last record of the stretch. */
const FLOWING: readonly Field[] = [
  'leavingWaterC',
  'enteringWaterC',
  'bankTopC',
  'bankMiddleC',
  'bankBottomC',
  'bankLevelMm',
  'bankSurroundC',
  'coolantSupplyC',
  'coolantReturnC',
  'loopFlowLPerMin',
  'chillerPowerW',
  'pumpPowerW',
  'fanPowerW',
  'roomC',
  'roomHumidityPct',
  'outdoorC',
  'outdoorHumidityPct',
  'panelPowerW',
  'generatorPowerW',
  'housePowerW',
  'gridPowerW',
  'chargingW',
  'dischargingW',
  'leakW',
  'deliveredW',
  'latentW',
  'feelsLikeC',
];

/** A stretch ends where one of these changes. */
const KEPT_APART: readonly Field[] = [
  'clock',
  'command',
  'requested',
  'heldBackBy',
  'mode',
  'wish',
  'pricePeriod',
  'priceMoneyPerKwh',
  'strategy',
  'home',
  'pointsStale',
];

export function quarterOf(record: CycleRecord): number {
  return Math.floor((record.atMs - 1) / QUARTER_MS);
}

/** Records in order of time, thinned. */
export function thin(records: readonly CycleRecord[]): CycleRecord[] {
  const groups: CycleRecord[][] = [];
  for (const record of records) {
    const group = groups.at(-1);
    if (group && belongs(group[0], record)) group.push(record);
    else groups.push([record]);
  }
  return groups.map(merged);
}

function belongs(first: CycleRecord, record: CycleRecord): boolean {
  return (
    quarterOf(first) === quarterOf(record) && KEPT_APART.every((field) => first[field] === record[field])
  );
}

function merged(group: readonly CycleRecord[]): CycleRecord {
  const last = group[group.length - 1];
  if (group.length === 1) return last;
  const out: Record<string, unknown> = { ...last, reason: group[0].reason };
  for (const field of FLOWING) out[field] = meanOverTime(group, field);
  out.spanMs = group.reduce((sum, record) => sum + record.spanMs, 0);
  out.warmKh = group.reduce((sum, record) => sum + record.warmKh, 0);
  // oxlint-disable-next-line typescript/no-unsafe-type-assertion -- a record whose numbers are replaced by numbers
  return out as unknown as CycleRecord;
}

function meanOverTime(group: readonly CycleRecord[], field: Field): number | null {
  let weighted = 0;
  let time = 0;
  for (const record of group) {
    const value = record[field];
    if (typeof value !== 'number') continue;
    weighted += value * record.spanMs;
    time += record.spanMs;
  }
  return time > 0 ? weighted / time : null;
}

/** A record with what came late for it: what was not heard then and is known now. What was heard stays as it was. */
import type { SiteConfig } from '../config.ts';
import type { PointId, Reading } from '../points.ts';
import type { CycleRecord } from '../record.ts';

const FIELDS = {
  'leaving-water': 'leavingWaterC',
  'entering-water': 'enteringWaterC',
  'bank-top': 'bankTopC',
  'bank-middle': 'bankMiddleC',
  'bank-bottom': 'bankBottomC',
  'bank-level': 'bankLevelMm',
  'bank-surround': 'bankSurroundC',
  'coolant-supply': 'coolantSupplyC',
  'coolant-return': 'coolantReturnC',
  'loop-flow': 'loopFlowLPerMin',
  'chiller-power': 'chillerPowerW',
  'pump-power': 'pumpPowerW',
  'fan-power': 'fanPowerW',
  'room-temperature': 'roomC',
  'room-humidity': 'roomHumidityPct',
  'outdoor-temperature': 'outdoorC',
  'outdoor-humidity': 'outdoorHumidityPct',
  'panel-power': 'panelPowerW',
  'battery-charge': 'batteryPct',
  'generator-power': 'generatorPowerW',
  'house-power': 'housePowerW',
  'grid-power': 'gridPowerW',
} as const satisfies Partial<Record<PointId, keyof CycleRecord>>;

/** Records in order of time; readings in order of time, from a point's longest age before the first record on. */
export function heardAgain(
  config: SiteConfig,
  records: readonly CycleRecord[],
  readings: readonly Reading[],
): CycleRecord[] {
  const last = new Map<string, Reading>();
  const maxAges = new Map(Object.entries(config.points).map(([point, { maxAgeMs }]) => [point, maxAgeMs]));
  let next = 0;
  return records.map((record) => {
    for (; next < readings.length && readings[next].atMs <= record.atMs; next++)
      last.set(readings[next].point, readings[next]);
    return filled(record, last, maxAges);
  });
}

function filled(
  record: CycleRecord,
  last: ReadonlyMap<string, Reading>,
  maxAges: ReadonlyMap<string, number>,
): CycleRecord {
  const found = Object.entries(FIELDS).flatMap(([point, field]) => {
    if (record[field] !== null) return [];
    const maxAgeMs = maxAges.get(point) ?? 0;
    const reading = last.get(point);
    return reading !== undefined && record.atMs - reading.atMs <= maxAgeMs
      ? [{ point, field, value: reading.value }]
      : [];
  });
  if (found.length === 0) return record;
  const known = new Set(found.map((one) => one.point));
  return {
    ...record,
    ...Object.fromEntries(found.map(({ field, value }) => [field, value])),
    pointsStale: record.pointsStale
      .split(',')
      .filter((point) => !known.has(point.trim()))
      .join(','),
  };
}

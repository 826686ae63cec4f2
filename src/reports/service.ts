/** What the rooms had of the night: cooling delivered, moisture, warm hours, weather. */
import type { CycleRecord } from '../record.ts';
import { formatInstant, HOUR_MS } from '../time.ts';
import type { NightSheet } from './night-schema.ts';
import { energyKwh, extreme, hoursOf, meanOver, rounded, roundedOrNull, type Span } from './spans.ts';

/** Heat of condensation of water at 20 °C, 2454 kJ/kg (IAPWS-95). */
const CONDENSATION_KWH_PER_KG = 2454 / 3600;

/** Of the heat delivered, part for which the room's humidity must have been heard to speak for all of it. */
const ENOUGH_HEARD = 0.8;

export function deliveredOf(spans: readonly Span[]): NightSheet['delivered'] {
  const cooling = spans.filter(({ record }) => record.dischargingW > 0 || (record.deliveredW ?? 0) > 0);
  const known = cooling.filter(({ record }) => record.deliveredW !== null);
  const hours = hoursOf(cooling);
  const heardPct = hours > 0 ? (hoursOf(known) / hours) * 100 : 100;
  if (cooling.length > 0 && known.length === 0) {
    return { kwh: null, sensibleKwh: null, latentKwh: null, condensateKg: null, heardPct: 0 };
  }
  const kwh = energyKwh(known, (record) => record.deliveredW);
  const latentKwh = latentOf(known, kwh);
  return {
    kwh: rounded(kwh, 3),
    sensibleKwh: latentKwh === null ? null : rounded(kwh - latentKwh, 3),
    latentKwh: roundedOrNull(latentKwh, 3),
    condensateKg: latentKwh === null ? null : rounded(Math.max(0, latentKwh) / CONDENSATION_KWH_PER_KG, 2),
    heardPct: rounded(heardPct, 1),
  };
}

/** Moist part of the heat delivered, at its share while the humidity was heard; null when that was too seldom. */
function latentOf(known: readonly Span[], kwh: number): number | null {
  const heard = known.filter(({ record }) => record.latentW !== null);
  const heardKwh = energyKwh(heard, (record) => record.deliveredW);
  if (!(heardKwh >= ENOUGH_HEARD * kwh)) return null;
  return heardKwh > 0 ? (energyKwh(heard, (record) => record.latentW) / heardKwh) * kwh : 0;
}

export function comfortOf(spans: readonly Span[]): NightSheet['comfort'] {
  const warmest = extreme(spans, (record) => (record.home ? record.roomC : null), 1);
  return {
    warmKh: rounded(
      spans.reduce((sum, span) => sum + span.record.warmKh * shareOf(span), 0),
      3,
    ),
    warmMinutes: rounded(hoursOf(spans, (record) => record.warmKh > 0) * 60, 1),
    warmestC: roundedOrNull(warmest?.value ?? null, 2),
    warmestAt: warmest === null ? null : formatInstant(warmest.atMs),
    limitC: roundedOrNull(spans.at(-1)?.record.limitC ?? null, 2),
  };
}

/** Part of its own span that a record has in the night. */
function shareOf({ record, hours }: Span): number {
  return record.spanMs > 0 ? Math.min(1, (hours * HOUR_MS) / record.spanMs) : 0;
}

function outdoor(record: CycleRecord): number | null {
  return record.outdoorC;
}

export function weatherOf(spans: readonly Span[]): NightSheet['weather'] {
  return {
    outdoorMeanC: roundedOrNull(meanOver(spans, outdoor), 2),
    outdoorMaxC: roundedOrNull(extreme(spans, outdoor, 1)?.value ?? null, 2),
    outdoorMinC: roundedOrNull(extreme(spans, outdoor, -1)?.value ?? null, 2),
  };
}

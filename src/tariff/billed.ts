/** A month's bill from the records of its cycles: energy by the minute, and the dated prices that held. */
import type { SiteConfig } from '../config.ts';
import type { CycleRecord } from '../record.ts';
import { HOUR_MS, MINUTE_MS } from '../time.ts';
import { monthBill, monthStretch, type Bill } from './bill.ts';
import type { DatedPrice } from './dated.ts';
import { energyBySlot } from './energy.ts';
import { blockAdds, meterZone, type Block } from './terms.ts';

/** Every period begins on a whole minute, so no price changes inside a slot of this length. */
const SLOT_MS = MINUTE_MS;
/** The last record of a month may reach over its end, and is heard within two cycles of it. */
const OVER_MS = HOUR_MS;

/**
 * `recordsBetween` is asked for the month on the meter's clock. Throws `usage` on a malformed month or an island.
 */
export function billFromRecords(
  config: SiteConfig,
  month: string,
  recordsBetween: (fromMs: number, toMs: number) => readonly CycleRecord[],
): Bill {
  const { startMs, endMs } = monthStretch(meterZone(config), month);
  const records = recordsBetween(startMs, endMs + OVER_MS);
  const energy = energyBySlot(records, SLOT_MS);
  return monthBill(config, month, energy, datedOf(records, config.power.tariff?.blocks ?? []));
}

/** A record keeps the price of its next kWh, so what the month's blocks had added by then is taken off again. */
function datedOf(records: readonly CycleRecord[], blocks: readonly Block[]): DatedPrice[] {
  const dated: DatedPrice[] = [];
  let kwh = 0;
  for (const record of records) {
    const { atMs, spanMs, pricePeriod, priceMoneyPerKwh } = record;
    const adds = blockAdds(blocks, kwh);
    for (const slot of blocks.length > 0 ? energyBySlot([record], HOUR_MS) : []) kwh += slot.importKwh;
    if (pricePeriod !== 'dated' || priceMoneyPerKwh === null) continue;
    const buy = priceMoneyPerKwh - adds;
    const last = dated.at(-1);
    if (last && last.buy === buy && last.endMs >= atMs - spanMs)
      dated[dated.length - 1] = { ...last, endMs: atMs };
    else dated.push({ startMs: atMs - spanMs, endMs: atMs, buy, sell: null });
  }
  return dated;
}

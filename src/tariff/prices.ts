/**
 * What a kWh costs in each slot. Dated prices hold where there are any; where they end, the periods of the site file
 * take over again. A slot that a change of price cuts carries the time-weighted mean; its name is that of the part that
 * fills most of it. On an island the figures here are only the outer bound (battery wear, else fuel): what the sun
 * leaves over is known by forecast alone, see island.ts.
 */
import type { IslandConfig, SiteConfig } from '../config.ts';
import type { DatedPrice } from './dated.ts';
import { cutsOf, pricedStretches, type PricedStretch } from './periods.ts';
import { blockAdds, meterZone } from './terms.ts';

export type PriceSource = 'dated' | 'period' | 'default' | 'island';

export interface PriceSlot {
  readonly startMs: number;
  /** Money per kWh drawn. */
  readonly buy: number;
  /** Money per kWh fed in. */
  readonly sell: number;
  /** Name of the period as the bill has it; `dated`, `default` or `island` where none has a name. */
  readonly period: string;
  readonly source: PriceSource;
}

/** A stretch with one price to buy and one to sell. */
export interface PricePart {
  readonly startMs: number;
  readonly endMs: number;
  readonly buy: number;
  readonly sell: number;
  readonly period: string;
  readonly source: PriceSource;
}

/** Energy drawn in the month so far, and when the month ends. */
export interface MonthSoFar {
  readonly kwh: number;
  readonly untilMs: number;
}

/**
 * The price of every slot from `startMs`: of the next kWh, what the month's blocks add by now included. A slot of the
 * next month carries what the blocks add from its first kWh. Throws `config` on a malformed season.
 */
export function priceSlots(
  config: SiteConfig,
  startMs: number,
  slotMs: number,
  count: number,
  dated: readonly DatedPrice[] = [],
  month: MonthSoFar | null = null,
): PriceSlot[] {
  const parts = priceParts(config, startMs, startMs + slotMs * count, dated);
  const blocks = config.power.tariff?.blocks ?? [];
  const slots: PriceSlot[] = [];
  let first = 0;
  for (let i = 0; i < count; i += 1) {
    const from = startMs + i * slotMs;
    while (parts[first].endMs <= from) first += 1;
    const slot = slotOf(parts, first, from, from + slotMs);
    const adds = blockAdds(blocks, month !== null && from < month.untilMs ? month.kwh : 0);
    slots.push(adds === 0 ? slot : { ...slot, buy: slot.buy + adds });
  }
  return slots;
}

function slotOf(parts: readonly PricePart[], first: number, from: number, to: number): PriceSlot {
  let buy = 0;
  let sell = 0;
  let longest = parts[first];
  let longestMs = 0;
  for (let i = first; i < parts.length && parts[i].startMs < to; i += 1) {
    const partMs = Math.min(to, parts[i].endMs) - Math.max(from, parts[i].startMs);
    buy += parts[i].buy * (partMs / (to - from));
    sell += parts[i].sell * (partMs / (to - from));
    if (partMs > longestMs) {
      longest = parts[i];
      longestMs = partMs;
    }
  }
  return { startMs: from, buy, sell, period: longest.period, source: longest.source };
}

/** Prices over [fromMs, toMs) without a gap, cut wherever they change. */
export function priceParts(
  config: SiteConfig,
  fromMs: number,
  toMs: number,
  dated: readonly DatedPrice[] = [],
): PricePart[] {
  const { tariff, island } = config.power;
  if (!tariff) return [islandPart(island, fromMs, toMs)];
  const base = pricedStretches(tariff, meterZone(config), fromMs, toMs);
  const near = dated.filter((price) => price.endMs > fromMs && price.startMs < toMs);
  const cuts = cutsOf([...base, ...near], fromMs, toMs);
  return cuts.slice(0, -1).map((startMs, i) => partOf(base, near, tariff.feedIn, startMs, cuts[i + 1]));
}

function partOf(
  base: readonly PricedStretch[],
  dated: readonly DatedPrice[],
  feedIn: number,
  startMs: number,
  endMs: number,
): PricePart {
  const holds = (at: { startMs: number; endMs: number }): boolean =>
    at.startMs <= startMs && startMs < at.endMs;
  const sell = dated.find((price) => price.sell !== null && holds(price))?.sell ?? feedIn;
  const now = dated.find((price) => price.buy !== null && holds(price));
  if (now?.buy != null) return { startMs, endMs, buy: now.buy, sell, period: 'dated', source: 'dated' };
  const stretch = base.find(holds) ?? base[0];
  const named = stretch.name !== null;
  return {
    startMs,
    endMs,
    buy: stretch.price,
    sell,
    period: stretch.name ?? 'default',
    source: named ? 'period' : 'default',
  };
}

function islandPart(island: IslandConfig | null, startMs: number, endMs: number): PricePart {
  const buy = island?.battery?.wear ?? island?.generator?.price ?? 0;
  return { startMs, endMs, buy, sell: 0, period: 'island', source: 'island' };
}

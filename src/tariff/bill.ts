/**
 * A month's bill, recomputed from stored energy. Each line is rounded to the cent, half up (credits: half away from
 * zero), and the total is the sum of the rounded lines, as printed bills do it. Energy of a slot that a change of
 * price cuts is shared by time.
 */
import type { SiteConfig, TariffConfig } from '../config.ts';
import { RimeholdError } from '../errors.ts';
import { DAY_MS, fromWall } from '../time.ts';
import type { DatedPrice } from './dated.ts';
import { demandSoFar } from './demand.ts';
import type { EnergySlot } from './energy.ts';
import type { Stretch } from './periods.ts';
import { priceParts, type PricePart } from './prices.ts';
import { meterZone, type Block } from './terms.ts';

export interface BillLine {
  readonly what: string;
  readonly quantity: number;
  readonly unit: 'kWh' | 'kW' | 'month' | 'day';
  /** Money per unit; the mean where prices are dated. */
  readonly price: number;
  readonly amountMoney: number;
}

export interface Bill {
  readonly month: string;
  readonly startMs: number;
  readonly endMs: number;
  readonly lines: readonly BillLine[];
  readonly totalMoney: number;
  /** Part of the month that the stored energy covers, 0–1. */
  readonly heard: number;
}

const MONTH = /^(\d{4})-(0[1-9]|1[0-2])$/;

/**
 * The bill of a month (`YYYY-MM`, on the meter's clock). Throws `usage` on a malformed month and on a site that has no
 * tariff.
 */
export function monthBill(
  config: SiteConfig,
  month: string,
  energy: readonly EnergySlot[],
  dated: readonly DatedPrice[] = [],
): Bill {
  const terms = config.power.tariff;
  if (!terms)
    throw new RimeholdError(
      'usage',
      'Expected a site with power.tariff for a bill, found an island, which has no meter to be billed by.',
    );
  const { startMs, endMs } = monthStretch(meterZone(config), month);
  const inside = energy.filter((slot) => slot.startMs >= startMs && slot.startMs < endMs);
  const parts = priceParts(config, startMs, endMs, dated);
  const drawnKwh = inside.reduce((sum, slot) => sum + slot.importKwh, 0);
  const lines = [
    ...fixedLines(terms, startMs, endMs),
    ...energyLines(parts, inside),
    ...blockLines(terms.blocks, drawnKwh),
    ...demandLines(config, inside, endMs),
    ...feedInLines(parts, inside),
  ];
  const totalMoney = roundMoney(lines.reduce((sum, { amountMoney }) => sum + amountMoney, 0));
  const heardMs = inside.reduce((sum, slot) => sum + slot.heardMs, 0);
  return { month, startMs, endMs, lines, totalMoney, heard: heardMs / (endMs - startMs) };
}

/** The calendar month `YYYY-MM` on a zone's clock. Throws `usage` when it is none. */
export function monthStretch(zone: string, month: string): Stretch {
  const match = MONTH.exec(month);
  if (!match) throw new RimeholdError('usage', `Expected a month as YYYY-MM, found "${month}".`, { month });
  const [year, number] = [Number(match[1]), Number(match[2])];
  return { startMs: fromWall(zone, year, number, 1), endMs: fromWall(zone, year, number + 1, 1) };
}

/**
 * Half up to the cent; half away from zero below zero. The amount is first cut to 12 significant digits, so that a
 * half cent which binary fractions hold a hair too low (1.005) still counts as a half.
 */
export function roundMoney(amount: number): number {
  const cents = Number((Math.abs(amount) * 100).toPrecision(12));
  const rounded = Math.floor(cents + 0.5) / 100;
  return amount < 0 && rounded > 0 ? -rounded : rounded;
}

function line(what: string, quantity: number, unit: BillLine['unit'], price: number): BillLine {
  return { what, quantity, unit, price, amountMoney: roundMoney(quantity * price) };
}

function fixedLines(terms: TariffConfig, startMs: number, endMs: number): BillLine[] {
  const days = Math.round((endMs - startMs) / DAY_MS);
  return [
    ...(terms.fixedPerMonth ? [line('fixed charge', 1, 'month', terms.fixedPerMonth)] : []),
    ...(terms.fixedPerDay ? [line('daily charge', days, 'day', terms.fixedPerDay)] : []),
  ];
}

interface Sum {
  readonly what: string;
  readonly kwh: number;
  readonly money: number;
}

/** One line for each period and price; all dated prices together in one, at their mean. */
function energyLines(parts: readonly PricePart[], energy: readonly EnergySlot[]): BillLine[] {
  const sums = summed(parts, energy, 'importKwh', (part) => [
    part.source === 'dated' ? 'dated prices' : part.period,
    part.buy,
  ]);
  return lineOf(sums, 1);
}

function feedInLines(parts: readonly PricePart[], energy: readonly EnergySlot[]): BillLine[] {
  const sums = summed(parts, energy, 'exportKwh', (part) => ['feed-in', part.sell]);
  return lineOf(sums, -1).filter(({ amountMoney }) => amountMoney !== 0);
}

/** Energy by name and price. Sorted energy and gapless sorted parts, so one walk along both suffices. */
function summed(
  parts: readonly PricePart[],
  energy: readonly EnergySlot[],
  side: 'importKwh' | 'exportKwh',
  label: (part: PricePart) => readonly [what: string, price: number],
): Sum[] {
  const sums = new Map<string, Sum>();
  let first = 0;
  for (const slot of energy.toSorted((a, b) => a.startMs - b.startMs)) {
    while (first < parts.length - 1 && parts[first].endMs <= slot.startMs) first += 1;
    for (let i = first; i < parts.length && parts[i].startMs < slot.endMs; i += 1) {
      const sharedMs = Math.min(slot.endMs, parts[i].endMs) - Math.max(slot.startMs, parts[i].startMs);
      const kwh = slot[side] * (sharedMs / (slot.endMs - slot.startMs));
      const [what, price] = label(parts[i]);
      const key = what === 'dated prices' ? what : `${what} ${price}`;
      const sum = sums.get(key) ?? { what, kwh: 0, money: 0 };
      sums.set(key, { what, kwh: sum.kwh + kwh, money: sum.money + kwh * price });
    }
  }
  return [...sums.values()].filter((sum) => sum.kwh > 0);
}

function lineOf(sums: readonly Sum[], sign: 1 | -1): BillLine[] {
  return sums.map(({ what, kwh, money }) => ({
    what,
    quantity: kwh,
    unit: 'kWh',
    price: (sign * money) / kwh,
    amountMoney: roundMoney(sign * money),
  }));
}

function blockLines(blocks: readonly Block[], drawnKwh: number): BillLine[] {
  return blocks
    .filter((block) => drawnKwh > block.aboveKwh)
    .map((block) => line(`above ${block.aboveKwh} kWh`, drawnKwh - block.aboveKwh, 'kWh', block.adds));
}

function demandLines(config: SiteConfig, energy: readonly EnergySlot[], endMs: number): BillLine[] {
  const demand = demandSoFar(config, energy, endMs - 1);
  return demand && demand.peakKw > 0 ? [line('demand', demand.peakKw, 'kW', demand.price)] : [];
}

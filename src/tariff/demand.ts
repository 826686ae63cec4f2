/**
 * The demand charge: money for each kW of the month's highest mean power. Means are taken over whole steps of the
 * contract's averaging time, counted from the epoch, that begin inside the measured hours of the meter's clock.
 */
import type { SiteConfig } from '../config.ts';
import { HOUR_MS, slotStart, toWall, fromWall } from '../time.ts';
import type { EnergySlot } from './energy.ts';
import { clockStretches, type Stretch } from './periods.ts';
import { meterZone } from './terms.ts';

export interface DemandState {
  /** Money per kW and month. */
  readonly price: number;
  readonly peakKw: number;
  /** Start of the step that set the peak; null before anything was drawn. */
  readonly peakAtMs: number | null;
  readonly overMs: number;
  /** End of the month on the meter's clock; the peak starts afresh there. */
  readonly untilMs: number;
}

/** The calendar month on a zone's clock that holds an instant. */
export function monthAt(zone: string, atMs: number): Stretch {
  const { year, month } = toWall(zone, atMs);
  return { startMs: fromWall(zone, year, month, 1), endMs: fromWall(zone, year, month + 1, 1) };
}

/** The month's peak up to `nowMs` from energy by slot; null where the contract has no demand charge. */
export function demandSoFar(
  config: SiteConfig,
  energy: readonly EnergySlot[],
  nowMs: number,
): DemandState | null {
  const demand = config.power.tariff?.demand;
  if (!demand) return null;
  const zone = meterZone(config);
  const month = monthAt(zone, nowMs);
  const measured = clockStretches(zone, demand.from, demand.to, month.startMs, month.endMs);
  const inMonth = energy.filter(
    (slot) => slot.startMs >= month.startMs && slot.startMs < Math.min(nowMs, month.endMs),
  );
  let peakKw = 0;
  let peakAtMs: number | null = null;
  for (const [startMs, kwh] of stepEnergy(inMonth, demand.overMs)) {
    const kw = kwh / (demand.overMs / HOUR_MS);
    if (kw <= peakKw || !measured.some((at) => at.startMs <= startMs && startMs < at.endMs)) continue;
    peakKw = kw;
    peakAtMs = startMs;
  }
  return { price: demand.price, peakKw, peakAtMs, overMs: demand.overMs, untilMs: month.endMs };
}

/** kWh drawn by averaging step; a slot longer than a step is spread evenly over its steps. */
function stepEnergy(energy: readonly EnergySlot[], overMs: number): Map<number, number> {
  const steps = new Map<number, number>();
  for (const slot of energy) {
    for (let at = slotStart(slot.startMs, overMs); at < slot.endMs; at += overMs) {
      const partMs = Math.min(slot.endMs, at + overMs) - Math.max(slot.startMs, at);
      steps.set(at, (steps.get(at) ?? 0) + slot.importKwh * (partMs / (slot.endMs - slot.startMs)));
    }
  }
  return steps;
}

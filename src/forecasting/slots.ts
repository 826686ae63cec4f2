/** From hours of lead to the slots of the plan. */
import type { SiteConfig } from '../config.ts';
import { expectedHome, limitAt } from '../comfort-hours.ts';
import { HOUR_MS, nightAt, slotStart } from '../time.ts';

export interface SlotGrid {
  readonly startMs: number;
  readonly slotMs: number;
  readonly count: number;
}

export function slotGrid(config: SiteConfig, nowMs: number): SlotGrid {
  const { slotMs, horizonMs } = config.planning;
  return { startMs: slotStart(nowMs, slotMs), slotMs, count: Math.ceil(horizonMs / slotMs) };
}

export const slotMiddleMs = (grid: SlotGrid, i: number): number => grid.startMs + (i + 0.5) * grid.slotMs;

/** Hours of lead after `lastHour` that cover the grid. */
export function leadsFor(grid: SlotGrid, lastHour: number): number {
  return Math.ceil((grid.startMs + grid.slotMs * grid.count) / HOUR_MS) - lastHour;
}

/**
 * Means by hour as values in the middle of each slot, linear between the middles of the hours. `byLead[0]` is lead 1;
 * `lastValue` is that of the last whole hour.
 */
export function onSlots(
  grid: SlotGrid,
  lastHour: number,
  lastValue: number,
  byLead: Float64Array,
): Float64Array {
  const valueAt = (lead: number): number =>
    lead <= 0 ? lastValue : byLead[Math.min(byLead.length, lead) - 1];
  return Float64Array.from({ length: grid.count }, (_, i) => {
    const position = slotMiddleMs(grid, i) / HOUR_MS - 0.5 - lastHour;
    const lead = Math.floor(position);
    const share = position - lead;
    return valueAt(lead) * (1 - share) + valueAt(lead + 1) * share;
  });
}

/** Comfort limit of each slot, °C; null while nobody is expected home. */
export function slotLimits(config: SiteConfig, grid: SlotGrid): (number | null)[] {
  const { zone } = config.site;
  return Array.from({ length: grid.count }, (_, i) => {
    const atMs = slotMiddleMs(grid, i);
    return expectedHome(config.cabin, zone, atMs) ? limitAt(config.comfort, zone, atMs) : null;
  });
}

/** From this long before noon on, the night to come is meant rather than the tail of the last one. */
const NEXT_NIGHT_BEFORE_MS = 3 * HOUR_MS;

/** Slots from now to the end of the night (noon); in the last three hours before noon to the end of the next one. */
export function eveningSlots(config: SiteConfig, grid: SlotGrid, nowMs: number): number {
  const night = nightAt(config.site.zone, nowMs + NEXT_NIGHT_BEFORE_MS);
  return Math.min(grid.count, Math.max(0, Math.ceil((night.endMs - grid.startMs) / grid.slotMs)));
}

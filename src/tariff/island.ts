/**
 * What a kWh costs on an island, slot by slot, given what sun, house and battery are expected to do without the ice
 * plant. Sun that would be curtailed is free. Beyond it a kWh comes from the battery, and its price is what takes that
 * kWh's place later: if the battery comes to be full before it comes to its floor, only wear; if it comes to its
 * floor first, the generator's fuel as well. With no generator, a kWh that a later floor would miss is not for sale:
 * the price is null. Sun that still goes into the battery is priced like the battery, though it spares the wear: what
 * is curtailed shall be used first. Losses of battery and inverter are left out (they change the price by a tenth, the forecast of
 * the sun by far more); a generator is counted only outside its quiet hours.
 */
import type { IslandConfig, SiteConfig } from '../config.ts';
import { HOUR_MS } from '../time.ts';
import { clockStretches } from './periods.ts';

export interface IslandOutlook {
  readonly startMs: number;
  readonly slotMs: number;
  /** Panel power by slot, W. */
  readonly panelW: ArrayLike<number>;
  /** House power without the ice plant by slot, W. */
  readonly houseW: ArrayLike<number>;
  /** Charge now, %; null without a battery or when it is not heard (then it counts as at its floor). */
  readonly batteryPct: number | null;
}

export interface IslandSlot {
  readonly startMs: number;
  /** Power that would be curtailed, W: free. */
  readonly freeW: number;
  /** Money per kWh beyond the free power; null when there is none to be had. */
  readonly buy: number | null;
  readonly period: 'sun' | 'battery' | 'generator' | 'none';
  /** Most power that the ice plant may draw: inverter limit, battery limit and generator counted, W. */
  readonly mostW: number;
  /** Expected charge at the start of the slot, kWh above empty. */
  readonly batteryKwh: number;
}

type Event = 'full' | 'floor' | null;

interface Walk {
  readonly event: Event;
  readonly freeW: number;
  readonly batteryKwh: number;
  readonly shortW: number;
}

export function islandSlots(config: SiteConfig, outlook: IslandOutlook): IslandSlot[] {
  const { island } = config.power;
  if (!island) return [];
  const walks = walkBattery(island, outlook);
  const quiet = quietSlots(config, island, outlook);
  const later = laterEvents(walks);
  return walks.map((walk, i) => slotOf(island, outlook, walk, later[i], quiet[i], i));
}

/** The battery without the ice plant: charged by what the house leaves, never below its floor. */
function walkBattery(island: IslandConfig, outlook: IslandOutlook): Walk[] {
  const { battery } = island;
  const hours = outlook.slotMs / HOUR_MS;
  const fullKwh = battery?.capacityKwh ?? 0;
  const floorKwh = (fullKwh * (battery?.floorPct ?? 0)) / 100;
  let kwh = outlook.batteryPct === null ? floorKwh : (fullKwh * outlook.batteryPct) / 100;
  return Array.from({ length: outlook.panelW.length }, (_, i) => {
    const batteryKwh = kwh;
    const spareW = outlook.panelW[i] - outlook.houseW[i];
    const wantedKwh = (spareW / 1000) * hours;
    const takenKwh = Math.max(
      Math.min(wantedKwh, fullKwh - kwh, ((battery?.mostChargeW ?? 0) / 1000) * hours),
      Math.min(0, floorKwh - kwh),
      -((battery?.mostDischargeW ?? 0) / 1000) * hours,
    );
    kwh += takenKwh;
    const leftW = ((wantedKwh - takenKwh) * 1000) / hours;
    const event = leftW > 1 ? 'full' : leftW < -1 ? 'floor' : null;
    return { event, freeW: Math.max(0, leftW), shortW: Math.max(0, -leftW), batteryKwh };
  });
}

/** For each slot the first of curtailing and reaching the floor that comes from then on. */
function laterEvents(walks: readonly Walk[]): Event[] {
  const later: Event[] = Array.from({ length: walks.length }, () => null);
  let next: Event = null;
  for (let i = walks.length - 1; i >= 0; i -= 1) {
    next = walks[i].event ?? next;
    later[i] = next;
  }
  return later;
}

function quietSlots(config: SiteConfig, island: IslandConfig, outlook: IslandOutlook): boolean[] {
  const { startMs, slotMs } = outlook;
  const count = outlook.panelW.length;
  const { generator } = island;
  if (!generator) return Array.from({ length: count }, () => true);
  const quiet = clockStretches(
    config.site.zone,
    generator.quietFrom,
    generator.quietTo,
    startMs,
    startMs + slotMs * count,
  );
  return Array.from({ length: count }, (_, i) => {
    const at = startMs + i * slotMs;
    return quiet.some((stretch) => stretch.startMs < at + slotMs && at < stretch.endMs);
  });
}

function slotOf(
  island: IslandConfig,
  outlook: IslandOutlook,
  walk: Walk,
  later: Event,
  quiet: boolean,
  i: number,
): IslandSlot {
  const { battery, generator } = island;
  const floorKwh = ((battery?.capacityKwh ?? 0) * (battery?.floorPct ?? 0)) / 100;
  const hours = outlook.slotMs / HOUR_MS;
  const aboveFloorW = (Math.max(0, walk.batteryKwh - floorKwh) * 1000) / hours;
  const batteryW = battery ? Math.min(battery.mostDischargeW, aboveFloorW) : 0;
  const generatorW = generator && !quiet ? generator.powerW : 0;
  const spareW = outlook.panelW[i] - outlook.houseW[i];
  const inverterLeftW = Math.max(0, island.inverterW - outlook.houseW[i]);
  const base = {
    startMs: outlook.startMs + i * outlook.slotMs,
    freeW: walk.freeW,
    batteryKwh: walk.batteryKwh,
  };
  const withoutGeneratorW = Math.max(0, Math.min(inverterLeftW, spareW + batteryW));
  const mostW = Math.max(0, Math.min(inverterLeftW, spareW + batteryW + generatorW));
  if (walk.freeW > 0) return { ...base, buy: battery?.wear ?? 0, period: 'sun', mostW };
  const missed = later === 'floor';
  if (withoutGeneratorW > 0 && !missed)
    return { ...base, buy: battery?.wear ?? 0, period: 'battery', mostW: withoutGeneratorW };
  if (!generator) return { ...base, buy: null, period: 'none', mostW: 0 };
  if (generatorW > 0) return { ...base, buy: generator.price, period: 'generator', mostW };
  return withoutGeneratorW > 0
    ? { ...base, buy: (battery?.wear ?? 0) + generator.price, period: 'battery', mostW: withoutGeneratorW }
    : { ...base, buy: null, period: 'none', mostW: 0 };
}

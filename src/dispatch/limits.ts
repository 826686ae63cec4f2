/** The limits of a site, taken from its file once. */
import type { SiteConfig } from '../config.ts';
import type { DispatchMemory, Limits } from './types.ts';

export function limitsOf(config: SiteConfig): Limits {
  const { bank, chiller, delivery, power, site } = config;
  return {
    units: site.units,
    minOnMs: chiller.minOnMs,
    minOffMs: chiller.minOffMs,
    chillerRunningAboveW: chiller.runningAboveW,
    chillerW: chiller.powerW,
    startW: chiller.startW,
    mostOutdoorC: chiller.mostOutdoorC,
    coilFreezeC: delivery.coilFreezeC,
    pumpRunningAboveW: delivery.runningAboveW,
    dryPumpW: delivery.dryPumpW,
    flowLPerMin: delivery.flowLPerMin,
    fullCoolantC: bank.fullCoolantC,
    fullLevelMm: bank.fullLevelMm,
    electrodeMeansFull: bank.electrodeIceKg !== null && bank.electrodeIceKg >= bank.mostIceKg,
    batteryFloorPct: power.island?.battery?.floorPct ?? null,
    inverterW: power.island?.inverterW ?? null,
    houseW: power.island?.houseW ?? 0,
  };
}

/** At a cold start nothing is known: the chiller counts as just stopped, so that a power cut cannot short-cycle it. */
export function freshMemory(nowMs: number): DispatchMemory {
  return {
    chillerOn: false,
    chillerSinceMs: nowMs,
    chillerSeenMs: null,
    chillerKnown: false,
    pumpOnSinceMs: null,
    overFrozen: false,
    coilCold: false,
    hotOutdoors: false,
    batteryLow: false,
    dryUntilMs: null,
    trippedUntilMs: null,
  };
}

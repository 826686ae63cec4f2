/** A cabin site and records for the forecaster's tests. */
import { siteSchema, type SiteConfig } from '../../src/config.ts';
import type { Observed } from '../../src/forecasting/hours.ts';

export function cabinSite(sections: Record<string, unknown> = {}): SiteConfig {
  return siteSchema.parse({
    site: {
      id: 'juniper',
      name: 'Juniper hut',
      zone: 'Europe/Madrid',
      latitude: '38.4 deg',
      longitude: '-2.9 deg',
      elevation: '1080 m',
    },
    points: {},
    bank: { form: 'ice-on-coil-external', water: '240 L', 'most-ice': '150 kg' },
    chiller: { 'ice-making': '1.05 kW', power: '0.55 kW' },
    delivery: { flow: '12 L/min' },
    cabin: { floor: '52 m2', 'design-day': '36 degC', 'design-range': '16 K' },
    power: { tariff: { default: 0.2 } },
    ...sections,
  });
}

export const MIDSUMMER_MS = Date.parse('2026-07-01T00:00:00Z');

/** A record of a quarter hour that ends at `atMs`; what is not given was not heard. */
export function record(atMs: number, heard: Partial<Observed> = {}): Observed {
  return {
    atMs,
    spanMs: 900_000,
    clock: 'set',
    outdoorC: null,
    outdoorHumidityPct: null,
    roomC: null,
    roomHumidityPct: null,
    panelPowerW: null,
    batteryPct: null,
    chillerPowerW: null,
    fanPowerW: null,
    chargingW: 0,
    dischargingW: 0,
    deliveredW: null,
    latentW: null,
    home: false,
    ...heard,
  };
}

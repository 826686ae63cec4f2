/** The site that forecasts are made for, and what its forecaster hears. */
import { siteSchema, type SiteConfig } from '../../src/config.ts';
import type { Observed } from '../../src/forecasting/hours.ts';
import type { Place } from './forecast-data.ts';
import { QUARTER_MS } from './forecast-truth.ts';

export function siteAt(place: Place): SiteConfig {
  return siteSchema.parse({
    site: {
      id: 'bench',
      name: 'Bench cabin',
      zone: place.zone,
      latitude: `${place.latitudeDeg} deg`,
      longitude: `${place.longitudeDeg} deg`,
      elevation: `${place.elevationM} m`,
    },
    points: {},
    bank: { form: 'ice-on-coil-external', water: '240 L', 'most-ice': '150 kg' },
    chiller: { 'ice-making': '1.05 kW', power: '0.55 kW' },
    delivery: { flow: '12 L/min' },
    cabin: { floor: '52 m2', 'heat-loss': '110 W/K', 'heat-capacity': '3 kWh/K', 'solar-aperture': '3 m2' },
    comfort: { limit: '26 degC', 'sleeping-limit': '24 degC' },
    power: { tariff: { default: 0.2 } },
  });
}

const BLANK = {
  spanMs: QUARTER_MS,
  clock: 'set',
  chillerPowerW: null,
  batteryPct: null,
  chargingW: 0,
  dischargingW: 0,
} as const;

export const recordAt = (startMs: number, heard: Omit<Observed, keyof typeof BLANK | 'atMs'>): Observed => ({
  ...BLANK,
  atMs: startMs + QUARTER_MS,
  ...heard,
});

export const quantised = (value: number): number => Math.round(value / 0.0625) * 0.0625;

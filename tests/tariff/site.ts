/** A small site file for tests, written as an owner would, with its power section given. */
import { siteSchema, type SiteConfig } from '../../src/config.ts';

export function siteWith(power: unknown, site: Record<string, unknown> = {}): SiteConfig {
  return siteSchema.parse({
    site: {
      id: 'juniper',
      name: 'Juniper hut',
      zone: 'Europe/Madrid',
      latitude: '38.4 deg',
      longitude: '-2.9 deg',
      ...site,
    },
    points: {},
    bank: { form: 'ice-on-coil-external', water: '240 L', 'most-ice': '150 kg' },
    chiller: { 'ice-making': '1.05 kW', power: '0.55 kW' },
    delivery: { flow: '12 L/min' },
    power,
  });
}

export const utc = (text: string): number => Date.parse(text);

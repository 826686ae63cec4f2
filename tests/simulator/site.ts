/** The invented sites as the simulator's tests use them, and runs over many days. */
import { existsSync, readFileSync } from 'node:fs';
import type { BankForm, SiteConfig } from '../../src/config.ts';
import { createRandom } from '../../src/numerics/random.ts';
import { parseSiteFile } from '../../src/site-file.ts';
import { AS_WRITTEN } from '../../src/simulator/parameters.ts';
import { createSimulator, type Simulator, type SimulatorOptions } from '../../src/simulator/simulator.ts';
import { seededWeather } from '../../src/simulator/seeded-weather.ts';
import { constantWeather, type WeatherSource } from '../../src/simulator/weather.ts';
import { HOUR_MS } from '../../src/time.ts';

export const START_MS = Date.UTC(2026, 6, 10, 12);

export function siteNamed(name: 'juniper' | 'juniper-island' | 'saltmarsh'): SiteConfig {
  const file = parseSiteFile(readFileSync(new URL(`../../config/${name}.yaml`, import.meta.url), 'utf8'));
  if (!file.ok) throw new Error(`config/${name}.yaml has faults: ${JSON.stringify(file.faults)}`);
  return file.config;
}

export function juniperAs(form: BankForm, bank: Partial<SiteConfig['bank']> = {}): SiteConfig {
  const site = siteNamed('juniper');
  return { ...site, bank: { ...site.bank, form, ...bank } };
}

export const summer = (seed = 1): WeatherSource =>
  seededWeather({ seed, latitudeDeg: 38.4, longitudeDeg: -2.9, elevationM: 1080 });

export const stillAir = (outdoorC: number, outdoorRhPct = 40): WeatherSource =>
  constantWeather({ outdoorC, outdoorRhPct, ghiWPerM2: 0, windMPerS: 2 });

export function simulate(options: Partial<SimulatorOptions> & { site: SiteConfig }): Simulator {
  return createSimulator({ seed: 1, startMs: START_MS, weather: summer(), truth: AS_WRITTEN, ...options });
}

/** Charges at night and discharges in the evening, by a random amount each: partial cycles that differ every day. */
export function runPartialCycles(
  simulator: Simulator,
  days: number,
  seed = 5,
): { least: number; most: number } {
  const random = createRandom(seed);
  const seen = { least: 100, most: 0 };
  for (let day = 0; day < days; day++) {
    const chargeH = 2 + 8 * random.next();
    const meltH = 0.5 + 5 * random.next();
    for (let quarter = 0; quarter < 96; quarter++) {
      const hour = quarter / 4;
      const { inventoryPct } = simulator.truth();
      simulator.switch('chiller', hour >= 10 && hour < 10 + chargeH && inventoryPct < 97);
      simulator.switch('pump', hour >= 5 && hour < 5 + meltH);
      simulator.switch('fan', hour >= 5 && hour < 5 + meltH);
      simulator.advance(simulator.nowMs() + HOUR_MS / 4);
      seen.least = Math.min(seen.least, inventoryPct);
      seen.most = Math.max(seen.most, inventoryPct);
    }
  }
  return seen;
}

/** Text of a file of the open data, or null with a loud word when it is not there. */
export function openData(path: string): string | null {
  const url = new URL(`../../../shared/data/${path}`, import.meta.url);
  if (existsSync(url)) return readFileSync(url, 'utf8');
  console.warn(`SKIPPED: ../shared/data/${path} is not here, so nothing was checked against it`);
  return null;
}

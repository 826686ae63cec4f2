import { readFileSync } from 'node:fs';
import type { SiteConfig } from '../../src/config.ts';
import { simpleWays } from '../../src/reports/compare.ts';
import { nightSheet, type NightInput, type NightSheet } from '../../src/reports/night.ts';
import { parseSiteFile } from '../../src/site-file.ts';
import { nightOf, type Night } from '../../src/time.ts';
import { tellNight, tellPlan, type StoryOptions } from './night-story.ts';

export function juniper(units: 'SI' | 'IP' = 'SI', currency = 'EUR'): SiteConfig {
  const path = new URL('../../config/juniper.yaml', import.meta.url);
  const file = parseSiteFile(readFileSync(path, 'utf8'));
  if (!file.ok) throw new Error(JSON.stringify(file.faults));
  return { ...file.config, site: { ...file.config.site, units, currency } };
}

export const ZONE = 'Europe/Madrid';
export const JULY: Night = nightOf(ZONE, '2026-07-14');

/** The sheet of an invented night, all of it told unless something is replaced. */
export function toldSheet(story: Partial<StoryOptions> = {}, input: Partial<NightInput> = {}): NightSheet {
  const site = input.site ?? juniper();
  const night = input.night ?? story.night ?? JULY;
  const records = input.records ?? tellNight({ zone: ZONE, night, stepMs: 60_000, ...story });
  return nightSheet({
    site,
    night,
    records,
    plans: [tellPlan(ZONE, night.startMs)],
    ways: simpleWays({ site, night, records }),
    revision: 1,
    issuedMs: night.endMs + 60_000,
    probes: [
      {
        point: 'leaving-water',
        errorAtIcePointK: 0.12,
        sd: 0.03,
        atMs: night.startMs + 3.6e7,
        setAside: null,
      },
    ],
    learned: [{ name: 'heat leak', value: 2.13, sd: 0.1, unit: 'W/K' }],
    ...input,
  });
}

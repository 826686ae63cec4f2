/** The four sites and tariffs that the plan is tried on; all invented, all seeded. */
import { readFileSync } from 'node:fs';
import type { SiteConfig } from '../../src/config.ts';
import { createRandom } from '../../src/numerics/random.ts';
import { parseSiteFile } from '../../src/site-file.ts';
import type { DatedPrice } from '../../src/tariff/dated.ts';
import { DAY_MS, fromWall, HOUR_MS, toWall } from '../../src/time.ts';

/** One look every two minutes instead of every half: a quarter of the time, and little in a cabin changes faster. */
export const TICK_MS = 120_000;

export interface PlanCase {
  readonly name: string;
  readonly config: SiteConfig;
  /** Dated prices that are out by an instant. */
  dated(nowMs: number): readonly DatedPrice[];
}

function siteFrom(file: string): SiteConfig {
  const read = parseSiteFile(readFileSync(new URL(`../../config/${file}`, import.meta.url), 'utf8'));
  if (!read.ok) throw new Error(`${file}: ${read.faults.map((fault) => fault.sentence).join('; ')}`);
  return { ...read.config, planning: { ...read.config.planning, cycleMs: TICK_MS, scenarios: 16 } };
}

type Tariff = NonNullable<SiteConfig['power']['tariff']>;

function withTariff(config: SiteConfig, parts: Partial<Tariff>): SiteConfig {
  const tariff = { ...(config.power.tariff as Tariff), ...parts };
  const points = {
    ...config.points,
    'house-power': { ...config.points['chiller-power'], topic: 'bench/house' },
  };
  return { ...config, points, power: { ...config.power, tariff } };
}

export function planCases(seed: number): PlanCase[] {
  const juniper = siteFrom('juniper.yaml');
  const none = (): readonly DatedPrice[] => [];
  return [
    { name: 'three periods', config: juniper, dated: none },
    {
      name: 'flat and demand',
      config: withTariff(juniper, {
        default: 0.17,
        periods: [],
        demand: { price: 6, overMs: 900_000, from: '00:00', to: '00:00' },
      }),
      dated: none,
    },
    {
      name: 'dated hourly',
      config: withTariff(juniper, { default: 0.16, periods: [] }),
      dated: hourlyPrices(seed, juniper.site.zone),
    },
    { name: 'island', config: siteFrom('juniper-island.yaml'), dated: none },
  ];
}

/**
 * Hourly prices with a morning and an evening hump and a hollow at noon that differs from day to day; tomorrow's come
 * out at 14:00, as day-ahead markets do.
 */
function hourlyPrices(seed: number, zone: string): PlanCase['dated'] {
  const days = new Map<string, readonly DatedPrice[]>();
  const day = (year: number, month: number, date: number): readonly DatedPrice[] => {
    const key = `${year}-${month}-${date}`;
    const known = days.get(key);
    if (known) return known;
    const random = createRandom(seed).fork(`prices ${key}`);
    const level = 0.14 + 0.03 * random.normal();
    const hollow = 0.1 * random.next();
    const hump = 0.08 + 0.06 * random.next();
    const startMs = fromWall(zone, year, month, date);
    const made = Array.from({ length: 24 }, (_, h) => {
      const bell = (at: number, wide: number): number => Math.exp(-(((h - at) / wide) ** 2));
      const price = level + hump * bell(20, 2.2) + 0.5 * hump * bell(8, 1.8) - hollow * bell(14, 2.5);
      const buy = Math.max(0.01, price - 0.03 * bell(3, 3) + 0.008 * random.normal());
      return { startMs: startMs + h * HOUR_MS, endMs: startMs + (h + 1) * HOUR_MS, buy, sell: null };
    });
    days.set(key, made);
    return made;
  };
  return (nowMs) => {
    const now = toWall(zone, nowMs);
    const next = toWall(zone, fromWall(zone, now.year, now.month, now.day, 720) + DAY_MS);
    const today = day(now.year, now.month, now.day);
    return now.hour < 14 ? today : [...today, ...day(next.year, next.month, next.day)];
  };
}

/**
 * Sunshine: what a cloudless sky would give, and clearness, the part of it that comes. Clearness is learned from panel
 * power (`panels.ts`); without panels from the daily range of temperature, which is wide under a clear sky.
 */
import type { SiteConfig } from '../config.ts';
import {
  clearSkyGhiWPerM2,
  extraterrestrialWPerM2,
  splitGlobal,
  sunPosition,
  type Irradiance,
  type SunPosition,
} from '../physics/sun.ts';
import { HOUR_MS } from '../time.ts';
import type { HourLine } from './hour-line.ts';

/** Hours that a table keeps: two books. */
const MOST_HOURS = 90 * 24;
/** Below this the sun is too low for a ratio of powers to mean anything, W/m². */
export const LEAST_CLEAR_W_PER_M2 = 40;
/** A cloud edge can focus sunshine above that of a clear sky. */
export const MOST_CLEARNESS = 1.2;

/** Sun and cloudless sky at the middle of an hour. */
export interface SunHour {
  readonly sun: SunPosition;
  readonly sky: Irradiance;
}

/** A cloudless sky in the middle of an hour since the epoch. */
export function sunHourOf(config: SiteConfig, hour: number): SunHour {
  const atMs = (hour + 0.5) * HOUR_MS;
  const { latitudeDeg, longitudeDeg, elevationM } = config.site;
  const sun = sunPosition(atMs, latitudeDeg, longitudeDeg);
  const clearWPerM2 = clearSkyGhiWPerM2(atMs, latitudeDeg, longitudeDeg, elevationM);
  return { sun, sky: splitGlobal(clearWPerM2, sun.elevationDeg, extraterrestrialWPerM2(atMs)) };
}

export const clearSkyOf = (config: SiteConfig, hour: number): number =>
  sunHourOf(config, hour).sky.globalHorizontalWPerM2;

/** Hours of the sun, each worked out once: the same weeks are looked through again every hour. */
export class SunTable {
  private readonly config: SiteConfig;
  private readonly hours = new Map<number, SunHour>();

  constructor(config: SiteConfig) {
    this.config = config;
  }

  at(hour: number): SunHour {
    const known = this.hours.get(hour);
    if (known) return known;
    if (this.hours.size >= MOST_HOURS) this.hours.clear();
    const found = sunHourOf(this.config, hour);
    this.hours.set(hour, found);
    return found;
  }
}

/**
 * Clearness of each line from the daily range of temperature: Bristow & Campbell 1984, "On the relationship between
 * incoming solar radiation and daily maximum and minimum temperature", Agricultural and Forest Meteorology 31 (form and
 * B from memory): clearness = 1 − exp(−B ΔT^2.4), B = 0.036 exp(−0.154 mean ΔT). Days are those of the sun.
 */
export function rangeClearness(lines: readonly HourLine[], longitudeDeg: number): (number | null)[] {
  const dayOf = (line: HourLine): number => Math.floor((line.hour + longitudeDeg / 15) / 24);
  const days = new Map<number, { low: number; high: number; count: number }>();
  for (const line of lines) {
    if (line.outdoorC === null) continue;
    const day = days.get(dayOf(line)) ?? { low: line.outdoorC, high: line.outdoorC, count: 0 };
    days.set(dayOf(line), {
      low: Math.min(day.low, line.outdoorC),
      high: Math.max(day.high, line.outdoorC),
      count: day.count + 1,
    });
  }
  const whole = [...days.values()].filter((day) => day.count >= 20);
  const meanRange = whole.reduce((sum, day) => sum + day.high - day.low, 0) / Math.max(1, whole.length);
  const b = 0.036 * Math.exp(-0.154 * meanRange);
  return lines.map((line) => {
    const day = days.get(dayOf(line));
    if (!day || day.count < 20 || line.clearWPerM2 < LEAST_CLEAR_W_PER_M2) return null;
    return 1 - Math.exp(-b * (day.high - day.low) ** 2.4);
  });
}

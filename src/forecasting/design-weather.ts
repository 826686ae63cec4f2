/** The weather of a site that has no history yet: its design day, moved through the year, and a usual summer sky. */
import type { SiteConfig } from '../config.ts';
import { designProfileC } from '../physics/sun.ts';
import { DAY_MS, HOUR_MS } from '../time.ts';

/** Where the file names no design day. Crude climate of the temperate zone from memory: the first readings correct it. */
const SUMMER_AT_30_DEG_C = 36;
const COOLER_K_PER_DEG = 0.35;
const COOLER_K_PER_M = 0.0065;
/** Half the difference between summer and winter, K for each degree of latitude. */
const SEASON_K_PER_DEG = 0.25;
const WARMEST_DAY = 200;
/** A design day is the hottest of summer; the usual summer day stays this much below it. */
const BELOW_DESIGN_K = 4;
/** Clearness of a usual summer sky: sunshine over that of a cloudless one. */
export const USUAL_CLEARNESS = 0.75;

/** Outdoor temperature of a usual midsummer day for each UTC hour of the day, °C. */
export function designBinsC(config: SiteConfig): number[] {
  const { cabin, site } = config;
  const latitude = Math.abs(site.latitudeDeg);
  const climate =
    SUMMER_AT_30_DEG_C - COOLER_K_PER_DEG * Math.max(0, latitude - 30) - COOLER_K_PER_M * site.elevationM;
  const maximumC = (cabin.designDayC ?? climate) - BELOW_DESIGN_K;
  return Array.from({ length: 24 }, (_, utcHour) =>
    designProfileC(utcHour + 0.5 + solarOffsetHours(config), maximumC, cabin.designRangeK),
  );
}

/** The profile is told by the clock of the sun: longitude over 15, plus the hour that summer clocks are ahead. */
function solarOffsetHours(config: SiteConfig): number {
  return config.site.longitudeDeg / 15 + 1;
}

/** How much warmer an hour of the year usually is than the same hour at midsummer, K; not above 0. */
export function seasonK(config: SiteConfig, hour: number): number {
  const atMs = hour * HOUR_MS;
  const yearStartMs = Date.UTC(new Date(atMs).getUTCFullYear(), 0, 1);
  const day = (atMs - yearStartMs) / DAY_MS;
  const southern = config.site.latitudeDeg < 0 ? 182.5 : 0;
  const phase = Math.cos((2 * Math.PI * (day - WARMEST_DAY - southern)) / 365);
  return -SEASON_K_PER_DEG * Math.abs(config.site.latitudeDeg) * (1 - phase);
}

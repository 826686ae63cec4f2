/**
 * Sunshine: what a cloudless sky would give, and clearness, the part of it that comes. Clearness is learned from panel
 * power; without panels from the daily range of temperature, which is wide under a clear sky.
 */
import type { SiteConfig } from '../config.ts';
import { weightedQuantile } from '../numerics/quantile.ts';
import {
  clearSkyGhiWPerM2,
  extraterrestrialWPerM2,
  planeOfArray,
  splitGlobal,
  sunPosition,
} from '../physics/sun.ts';
import { HOUR_MS } from '../time.ts';
import { hourOfDay } from './bins.ts';
import type { HourLine } from './hour-line.ts';

export interface ClearSky {
  readonly clearWPerM2: number;
  readonly clearOnPanelsWPerM2: number;
}

/** Tilt of panels whose slope the file does not tell; facing the equator. Common practice, no source. */
const USUAL_TILT_DEG = 30;
/** Below this the sun is too low for a ratio of powers to mean anything, W/m². */
const LEAST_CLEAR_W_PER_M2 = 40;
/** A cloud edge can focus sunshine above that of a clear sky. */
export const MOST_CLEARNESS = 1.2;
/** Days that show what the panels give under a clear sky. */
const SHOWING_DAYS = 30;
/** Newer days show better: the sun's path moves over a plane that the file may not tell rightly. */
const SHOWING_FADE_DAYS = 10;
/** Power of panels under 1000 W/m² over their rating: inverter, heat and dirt (common practice, no source). */
const USUAL_YIELD = 0.8;

/** A cloudless sky in the middle of an hour since the epoch. */
export function clearSkyOf(config: SiteConfig, hour: number): ClearSky {
  const atMs = (hour + 0.5) * HOUR_MS;
  const { latitudeDeg, longitudeDeg, elevationM } = config.site;
  const clearWPerM2 = clearSkyGhiWPerM2(atMs, latitudeDeg, longitudeDeg, elevationM);
  if (!(clearWPerM2 > 0)) return { clearWPerM2: 0, clearOnPanelsWPerM2: 0 };
  const sun = sunPosition(atMs, latitudeDeg, longitudeDeg);
  const sky = splitGlobal(clearWPerM2, sun.elevationDeg, extraterrestrialWPerM2(atMs));
  const { island } = config.power;
  const plane = {
    tiltDeg: island?.panelTiltDeg ?? USUAL_TILT_DEG,
    azimuthDeg: island?.panelAzimuthDeg ?? (latitudeDeg < 0 ? 0 : 180),
  };
  return { clearWPerM2, clearOnPanelsWPerM2: Math.max(0, planeOfArray(sun, sky, plane)) };
}

/**
 * W from the panels for each W/m² that a cloudless sky puts on their plane, by UTC hour of the day: the 90th percentile
 * of what was seen lately, so shade and a crooked roof are learned. null when no panel was ever heard and none is named.
 */
export function panelScale(config: SiteConfig, lines: readonly HourLine[]): Float64Array | null {
  const rated = config.power.island ? (config.power.island.panelsW / 1000) * USUAL_YIELD : null;
  const last = lines.at(-1)?.hour ?? 0;
  const byHour: Seen[] = Array.from({ length: 24 }, () => ({ ratios: [], weights: [] }));
  const all: Seen = { ratios: [], weights: [] };
  for (const line of lines) {
    if (line.panelW === null || line.clearOnPanelsWPerM2 < LEAST_CLEAR_W_PER_M2) continue;
    const ageDays = (last - line.hour) / 24;
    if (ageDays > SHOWING_DAYS) continue;
    for (const seen of [byHour[hourOfDay(line.hour)], all]) {
      seen.ratios.push(Math.max(0, line.panelW) / line.clearOnPanelsWPerM2);
      seen.weights.push(Math.exp(-ageDays / SHOWING_FADE_DAYS));
    }
  }
  if (all.ratios.length === 0 && !rated) return null;
  const overall = all.ratios.length >= 24 ? clearRatio(all) : (rated ?? Math.max(...all.ratios));
  return Float64Array.from(byHour, (seen) => (seen.ratios.length >= 5 ? clearRatio(seen) : overall));
}

interface Seen {
  readonly ratios: number[];
  readonly weights: number[];
}

const clearRatio = ({ ratios, weights }: Seen): number => weightedQuantile(ratios, weights, 0.9);

/** Clearness of each line from panel power; null at night and where no power was heard. */
function panelClearness(lines: readonly HourLine[], scale: Float64Array): (number | null)[] {
  return lines.map((line) => {
    const clearW = line.clearOnPanelsWPerM2 * scale[hourOfDay(line.hour)];
    if (line.panelW === null || line.clearOnPanelsWPerM2 < LEAST_CLEAR_W_PER_M2 || !(clearW > 0)) return null;
    return Math.min(MOST_CLEARNESS, Math.max(0, line.panelW / clearW));
  });
}

/**
 * Clearness of each line from the daily range of temperature: Bristow & Campbell 1984, "On the relationship between
 * incoming solar radiation and daily maximum and minimum temperature", Agricultural and Forest Meteorology 31 (form and
 * B from memory): clearness = 1 − exp(−B ΔT^2.4), B = 0.036 exp(−0.154 mean ΔT). Days are those of the sun.
 */
function rangeClearness(lines: readonly HourLine[], longitudeDeg: number): (number | null)[] {
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

/** Clearness of each line by the best means there are. */
export function clearnessOf(config: SiteConfig, lines: readonly HourLine[]): (number | null)[] {
  const scale = panelScale(config, lines);
  const heard = scale !== null && lines.some((line) => line.panelW !== null);
  return heard ? panelClearness(lines, scale) : rangeClearness(lines, config.site.longitudeDeg);
}

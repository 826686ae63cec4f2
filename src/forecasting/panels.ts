/**
 * The panels as they show themselves. What they give under a clear sky is learned from their own hours: first the plane
 * that they face (a plane is physics, so it holds when the sun's path moves on), then by hour of the day what is left,
 * shade and dirt. Warm panels give less, which a summer's afternoon would else hide in the plane.
 */
import type { SiteConfig } from '../config.ts';
import { weightedQuantile } from '../numerics/quantile.ts';
import { planeOfArray, type Plane } from '../physics/sun.ts';
import { hourOfDay } from './bins.ts';
import type { HourLine } from './hour-line.ts';
import { LEAST_CLEAR_W_PER_M2, MOST_CLEARNESS, type SunHour, type SunTable } from './sky.ts';

/** A clear sky is the upper part of what was seen: this quantile of it. */
const CLEAR_QUANTILE = 0.9;
/** Days that show what the panels give, and the age at which a day weighs 1/e. */
const SHOWING_DAYS = 30;
const SHOWING_FADE_DAYS = 10;
const PLANE_FADE_DAYS = 20;
/** Days after which a scale stands on its own: clearness of earlier days is read by the scale of this one. */
const LEAST_SHOWING_DAYS = 10;
/** Hours of daylight (a week) from which a plane may be learned, and how much better than the file's it must fit. */
const LEAST_PLANE_HOURS = 84;
const BETTER = 0.9;
/** Power of panels under 1000 W/m² over their rating: inverter and dirt (common practice, no source). */
const USUAL_YIELD = 0.85;
/** Power lost by heat, 1/K, above 25 °C, and how much warmer sunshine makes the cells, K m²/W (common practice). */
const LOSS_PER_K = 0.004;
const WARMING_K_M2_PER_W = 0.03;
const RATED_AT_C = 25;
const UNHEARD_AIR_C = 20;

/** W from the panels for each W/m² on their plane, by UTC hour of the day. */
export type PanelScale = Float64Array;

export interface Panels {
  readonly plane: Plane;
  /** Scale as it is known now. */
  readonly scale: PanelScale;
  /** Days since the epoch that the scale was learned at, and what it was then, from the first day of the book. */
  readonly day: number;
  readonly scaleByDay: ReadonlyMap<number, PanelScale>;
}

interface Daylight {
  readonly hour: number;
  readonly panelW: number;
  readonly airC: number;
  readonly sun: SunHour;
}

const dayOf = (hour: number): number => Math.floor(hour / 24);

/** What a cloudless sky puts on a plane, W/m². */
export function clearOnPlane(plane: Plane, { sun, sky }: SunHour): number {
  return sky.globalHorizontalWPerM2 > 0 ? Math.max(0, planeOfArray(sun, sky, plane)) : 0;
}

/** The part of it that is left when heat has taken its share, W/m². */
export const lessHeat = (onPlaneWPerM2: number, airC: number): number =>
  onPlaneWPerM2 * (1 - LOSS_PER_K * (airC + WARMING_K_M2_PER_W * onPlaneWPerM2 - RATED_AT_C));

export const clearOnPanels = (plane: Plane, at: SunHour, airC: number): number =>
  lessHeat(clearOnPlane(plane, at), airC);

/** null when no panel was ever heard and none is named. */
export function learnPanels(config: SiteConfig, lines: readonly HourLine[], table: SunTable): Panels | null {
  const { island } = config.power;
  const daylight = daylightOf(lines, table);
  if (daylight.length === 0 && !island) return null;
  const rated = island ? (island.panelsW / 1000) * USUAL_YIELD : null;
  const nextHour = (lines.at(-1)?.hour ?? -1) + 1;
  // Whole days only: a restart in the middle of one finds the same plane.
  const whole = daylight.filter(({ hour }) => dayOf(hour) < dayOf(nextHour));
  const plane = learnPlane(whole, filePlane(config));
  const ratios = daylight.map((at) => ratioOf(plane, at));
  const scaleBefore = (hour: number): PanelScale =>
    scaleAt(daylight, ratios, Math.min(hour, nextHour), rated);
  const [firstDay, day] = [dayOf(lines[0]?.hour ?? 0), dayOf(nextHour)];
  const showing = scaleBefore((firstDay + LEAST_SHOWING_DAYS) * 24);
  const scaleByDay = new Map<number, PanelScale>();
  for (let at = firstDay; at <= day; at += 1) {
    scaleByDay.set(at, at < firstDay + LEAST_SHOWING_DAYS ? showing : scaleBefore(at * 24));
  }
  return { plane, scale: scaleByDay.get(day) ?? showing, day, scaleByDay };
}

/** Whether what was learned still stands, or another day (in the first days: another hour) has come. */
export function stillStands({ day, scaleByDay }: Panels, lastHour: number): boolean {
  return dayOf(lastHour + 1) === day && scaleByDay.size > LEAST_SHOWING_DAYS;
}

/** Clearness of each line: what the panels gave over what they would have given, as known on its day; null at night. */
export function panelClearness(
  panels: Panels,
  lines: readonly HourLine[],
  table: SunTable,
): (number | null)[] {
  return lines.map(({ hour, panelW, outdoorC }) => {
    const clear = clearOnPanels(panels.plane, table.at(hour), outdoorC ?? UNHEARD_AIR_C);
    const scale = panels.scaleByDay.get(dayOf(hour)) ?? panels.scale;
    const clearW = clear * scale[hourOfDay(hour)];
    if (panelW === null || clear < LEAST_CLEAR_W_PER_M2 || !(clearW > 0)) return null;
    return Math.min(MOST_CLEARNESS, Math.max(0, panelW / clearW));
  });
}

export const filePlane = ({ power, site }: SiteConfig): Plane => ({
  tiltDeg: power.island?.panelTiltDeg ?? USUAL_TILT_DEG,
  azimuthDeg: power.island?.panelAzimuthDeg ?? (site.latitudeDeg < 0 ? 0 : 180),
});

/** Tilt of panels whose slope the file does not tell; facing the equator. Common practice, no source. */
const USUAL_TILT_DEG = 30;

function daylightOf(lines: readonly HourLine[], table: SunTable): Daylight[] {
  return lines.flatMap(({ hour, panelW, outdoorC }) => {
    const sun = table.at(hour);
    if (panelW === null || sun.sky.globalHorizontalWPerM2 < LEAST_CLEAR_W_PER_M2) return [];
    return [{ hour, panelW: Math.max(0, panelW), airC: outdoorC ?? UNHEARD_AIR_C, sun }];
  });
}

/** null where the plane is turned away from the sun: scattered light alone tells nothing of its size. */
function ratioOf(plane: Plane, at: Daylight): number | null {
  const clear = clearOnPanels(plane, at.sun, at.airC);
  return clear < LEAST_CLEAR_W_PER_M2 ? null : at.panelW / clear;
}

/** Scale from what was seen before an hour: an hour by itself once five of its days were seen. */
function scaleAt(
  daylight: readonly Daylight[],
  ratios: readonly (number | null)[],
  beforeHour: number,
  rated: number | null,
): PanelScale {
  const byHour = Array.from({ length: 24 }, () => ({ ratios: [] as number[], weights: [] as number[] }));
  const all = { ratios: [] as number[], weights: [] as number[] };
  for (const [i, { hour }] of daylight.entries()) {
    const ratio = ratios[i];
    const ageDays = (beforeHour - 1 - hour) / 24;
    if (ratio === null || ageDays < 0 || ageDays > SHOWING_DAYS) continue;
    for (const seen of [byHour[hourOfDay(hour)], all]) {
      seen.ratios.push(ratio);
      seen.weights.push(Math.exp(-ageDays / SHOWING_FADE_DAYS));
    }
  }
  const clear = (seen: typeof all): number => weightedQuantile(seen.ratios, seen.weights, CLEAR_QUANTILE);
  const overall = all.ratios.length >= 24 ? clear(all) : (rated ?? Math.max(0, ...all.ratios));
  return Float64Array.from(byHour, (seen) => (seen.ratios.length >= 5 ? clear(seen) : overall));
}

/** The file's plane, or one that fits the upper edge of what was seen clearly better. */
function learnPlane(daylight: readonly Daylight[], fromFile: Plane): Plane {
  if (daylight.length < LEAST_PLANE_HOURS) return fromFile;
  const last = daylight[daylight.length - 1].hour;
  const weights = daylight.map(({ hour }) => Math.exp((hour - last) / 24 / PLANE_FADE_DAYS));
  const lossOf = (plane: Plane): number => edgeLoss(daylight, weights, plane);
  let best = { plane: fromFile, loss: BETTER * lossOf(fromFile) };
  const tryPlane = (plane: Plane): void => {
    const loss = lossOf(plane);
    if (loss < best.loss) best = { plane, loss };
  };
  for (let tiltDeg = 0; tiltDeg <= 90; tiltDeg += 15) {
    for (let azimuthDeg = 0; azimuthDeg < (tiltDeg === 0 ? 45 : 360); azimuthDeg += 45) {
      tryPlane({ tiltDeg, azimuthDeg });
    }
  }
  if (best.plane === fromFile) return fromFile;
  for (const stepDeg of [10, 5]) {
    const { tiltDeg, azimuthDeg } = best.plane;
    for (const up of [-1, 0, 1]) {
      for (const round of [-2, -1, 0, 1, 2]) {
        const tilt = Math.min(90, Math.max(0, tiltDeg + up * stepDeg));
        tryPlane({ tiltDeg: tilt, azimuthDeg: (azimuthDeg + round * stepDeg + 360) % 360 });
      }
    }
  }
  return best.plane;
}

/**
 * How badly the best size of a plane follows the upper edge of what was seen: quantile regression through the origin
 * (Koenker & Bassett 1978), so clouds below the edge count little and power above it much.
 */
function edgeLoss(daylight: readonly Daylight[], weights: readonly number[], plane: Plane): number {
  const clear = daylight.map((at) => Math.max(1, clearOnPanels(plane, at.sun, at.airC)));
  const ratios = daylight.map((at, i) => at.panelW / clear[i]);
  const size = weightedQuantile(
    ratios,
    clear.map((value, i) => value * weights[i]),
    CLEAR_QUANTILE,
  );
  return daylight.reduce((sum, at, i) => {
    const over = at.panelW - size * clear[i];
    return sum + weights[i] * (over > 0 ? CLEAR_QUANTILE * over : (CLEAR_QUANTILE - 1) * over);
  }, 0);
}

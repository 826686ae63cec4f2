/** One scenario: the weather with one error trajectory on it, the cabin run through it, the panels under it. */
import type { SiteConfig } from '../config.ts';
import { HOUR_MS } from '../time.ts';
import { hourOfDay } from './bins.ts';
import { restingFabricC } from './cabin.ts';
import { coilOf, type Coil } from './coil.ts';
import { dryAirOf, type DryAir } from './dry-air.ts';
import type { HourLine } from './hour-line.ts';
import type { Book } from './book.ts';
import { holdLimit, warmKhPerKwh, type LoadFrame, type RoomState } from './load.ts';
import type { OwnCabin } from './own-cabin.ts';
import { gainAt } from './own-cabin.ts';
import type { HoursAhead } from './own-weather.ts';
import { saturationAt, type Saturation } from './saturation.ts';
import { clearOnPlane, lessHeat } from './panels.ts';
import { sunHourOf } from './sky.ts';
import { onSlots, slotLimits, slotMiddleMs, type SlotGrid } from './slots.ts';
import type { Trajectory } from './trajectories.ts';
import { latentScale } from './latent.ts';

/** One value a slot, from the slot that holds now. */
export interface Scenario {
  readonly weight: number;
  readonly outdoorC: Float64Array;
  /** On the level. */
  readonly sunWPerM2: Float64Array;
  /** Cooling to be delivered to hold the comfort limit, sensible, latent and the heat of the fans. */
  readonly loadW: Float64Array;
  readonly latentW: Float64Array;
  /** 0 throughout without panels. */
  readonly panelW: Float64Array;
  /** Warm degree-hours for each kWh of load not delivered. */
  readonly warmKhPerKwh: number;
}

export interface LastSeen {
  readonly atMs: number;
  readonly outdoorC: number | null;
  readonly roomC: number | null;
}

/** What all scenarios of a forecast share. */
export interface ScenarioFrame {
  readonly grid: SlotGrid;
  readonly lastHour: number;
  readonly nowMs: number;
  /** Outdoor reading now; null when it is stale. */
  readonly nowC: number | null;
  readonly last: HourLine | null;
  readonly load: LoadFrame;
  readonly start: RoomState;
  readonly saturation: Saturation;
  readonly clearWPerM2: Float64Array;
  /** Clear sky on the plane of the panels. */
  readonly clearOnPlaneWPerM2: Float64Array;
  /** W for each W/m² on the plane, by slot. */
  readonly panelScale: Float64Array;
  readonly hasPanels: boolean;
}

/** What the site file alone says about how the room is cooled. */
export interface LoadPlant {
  readonly coil: Coil;
  readonly dryAir: DryAir | null;
  readonly saturation: Saturation;
}

export function loadPlantOf(config: SiteConfig): LoadPlant {
  const saturation = saturationAt(config.site.elevationM);
  return { coil: coilOf(config, saturation), dryAir: dryAirOf(config), saturation };
}

export interface Expected extends HoursAhead {
  readonly disturbanceW: Float64Array;
}

/** A reading older than this says nothing of now. */
const FRESH_MS = HOUR_MS;
/** Fading of the difference between the reading now and the hourly forecast, h. */
const NOW_FADE_HOURS = 3;
/** Where neither room nor outdoor humidity was ever heard: a usual indoor one, kg/kg. */
const USUAL_RATIO = 0.0095;

export function scenarioFrame(
  config: SiteConfig,
  plant: LoadPlant,
  book: Book,
  cabin: OwnCabin,
  grid: SlotGrid,
  lastHour: number,
  seen: LastSeen,
  nowMs: number,
): ScenarioFrame {
  const fresh = nowMs - seen.atMs <= FRESH_MS;
  const last = book.last && lastHour - book.last.hour < 3 ? book.last : null;
  const p = cabin.parameters;
  const limitC = slotLimits(config, grid);
  const airC = (fresh ? seen.roomC : null) ?? last?.roomEndC ?? config.comfort.limitC;
  const fabricC =
    (last ? cabin.track(book).fabricC : null) ?? restingFabricC(p, airC, last?.outdoorC ?? airC, 0);
  const { coil, dryAir } = plant;
  const { panels } = book;
  const sky = Array.from({ length: grid.count }, (_, i) =>
    sunHourOf(config, slotMiddleMs(grid, i) / HOUR_MS - 0.5),
  );
  return {
    grid,
    lastHour,
    nowMs,
    nowC: fresh ? seen.outdoorC : null,
    last,
    start: { airC, fabricC, ratio: last?.roomW ?? USUAL_RATIO },
    saturation: plant.saturation,
    clearWPerM2: Float64Array.from(sky, (at) => at.sky.globalHorizontalWPerM2),
    clearOnPlaneWPerM2: Float64Array.from(sky, (at) => (panels ? clearOnPlane(panels.plane, at) : 0)),
    panelScale: Float64Array.from(sky, (_, i) => panels?.scale[hourOfDay(slotHour(grid, i))] ?? 0),
    hasPanels: panels !== null,
    load: {
      slotMs: grid.slotMs,
      cabin: p,
      coil,
      dryAir,
      limitC,
      gainsW: Float64Array.from({ length: grid.count }, (_, i) => gainAt(p, slotMiddleMs(grid, i) / HOUR_MS)),
      floorM2: config.cabin.floorM2,
      people: config.cabin.occupants,
      latentScale: latentScale(coil, book.lines),
    },
  };
}

const sum = (values: Float64Array, errors: Float64Array): Float64Array =>
  values.map((value, i) => value + errors[i]);

export function runScenario(
  frame: ScenarioFrame,
  expected: Expected,
  error: Trajectory,
  weight: number,
): Scenario {
  const { grid, lastHour, last } = frame;
  const slots = (byLead: Float64Array, lastValue: number | null | undefined): Float64Array =>
    onSlots(grid, lastHour, lastValue ?? byLead[0], byLead);
  const outdoorC = nowcast(frame, slots(sum(expected.outdoorC, error.outdoorC), last?.outdoorC));
  const dewC = slots(sum(expected.dewC, error.dewC), last?.dewC);
  const scores = sum(expected.skyScore, error.skyScore);
  const clearnessByLead = Float64Array.from(scores, (score, i) =>
    expected.sky.clearnessOf(lastHour + i + 1, score),
  );
  const clearness = byHour(grid, lastHour, clearnessByLead);
  const sunWPerM2 = frame.clearWPerM2.map((clear, i) => clear * clearness[i]);
  const weather = {
    outdoorC,
    sunWPerM2,
    outdoorRatio: dewC.map((dew, i) => frame.saturation(Math.min(dew, outdoorC[i]))),
    disturbanceW: slots(sum(expected.disturbanceW, error.disturbanceW), null),
  };
  const load = holdLimit(frame.load, frame.start, weather);
  return {
    weight,
    outdoorC,
    sunWPerM2,
    loadW: load.loadW,
    latentW: load.latentW,
    panelW: clearness.map(
      (share, i) => share * frame.panelScale[i] * lessHeat(frame.clearOnPlaneWPerM2[i], outdoorC[i]),
    ),
    warmKhPerKwh: warmKhPerKwh(frame.load, frame.start, weather, load),
  };
}

const slotHour = (grid: SlotGrid, i: number): number => Math.floor(slotMiddleMs(grid, i) / HOUR_MS);

/** Clouds come and go: the mean of an hour spread evenly keeps its extremes, one drawn to its neighbours would not. */
function byHour(grid: SlotGrid, lastHour: number, byLead: Float64Array): Float64Array {
  return Float64Array.from({ length: grid.count }, (_, i) => {
    const lead = slotHour(grid, i) - lastHour;
    return byLead[Math.min(byLead.length, Math.max(1, lead)) - 1];
  });
}

/** Bends the first hours to the reading of now. */
function nowcast(frame: ScenarioFrame, outdoorC: Float64Array): Float64Array {
  const { nowC, nowMs, grid } = frame;
  if (nowC === null) return outdoorC;
  const offK = nowC - outdoorC[0];
  return outdoorC.map((value, i) => {
    const hours = Math.max(0, slotMiddleMs(grid, i) - nowMs) / HOUR_MS;
    return value + offK * Math.exp(-hours / NOW_FADE_HOURS);
  });
}

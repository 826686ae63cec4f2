/**
 * The cooling that must be delivered to hold the comfort limit: the cabin is run through one weather, free while nobody
 * is home or it stays below the limit, held at the limit otherwise as far as the coil can. Sensible heat, moisture and
 * the heat of the fans are counted; dry air is used first where the site has it.
 */
import { CabinRun, type CabinParameters } from './cabin.ts';
import { VAPORISATION_J_PER_KG, type Coil } from './coil.ts';
import type { DryAir } from './dry-air.ts';

export interface RoomState {
  readonly airC: number;
  readonly fabricC: number;
  /** Humidity ratio of the room air, kg/kg. */
  readonly ratio: number;
}

/** What does not depend on the weather. Arrays have one value a slot. */
export interface LoadFrame {
  readonly slotMs: number;
  readonly cabin: CabinParameters;
  readonly coil: Coil;
  readonly dryAir: DryAir | null;
  /** Comfort limit; null while nobody is home. */
  readonly limitC: readonly (number | null)[];
  readonly gainsW: ArrayLike<number>;
  readonly floorM2: number;
  readonly people: number;
  /** Learned size of the moisture that the coil takes, over what the model gives. */
  readonly latentScale: number;
}

export interface LoadWeather {
  readonly outdoorC: Float64Array;
  readonly sunWPerM2: Float64Array;
  /** Outdoor humidity ratio, kg/kg. */
  readonly outdoorRatio: Float64Array;
  /** Heat that the cabin model is expected to leave unexplained, W. */
  readonly disturbanceW: Float64Array;
}

export interface HeldLoad {
  readonly loadW: Float64Array;
  readonly latentW: Float64Array;
  /** Net of the heat of the fans. */
  readonly sensibleW: Float64Array;
  /** Degree-hours above the limit that stay although the coil runs in full, K h. */
  readonly warmKh: number;
}

const ROOM_HEIGHT_M = 2.5;
const AIR_KG_PER_M3 = 1.2;
/** Air changes by leakage, 1/h; moisture that walls and cloth take up beside the air; vapour of a person, kg/s. */
const LEAKAGE_PER_H = 0.5;
const MOISTURE_BUFFER = 8;
const PERSON_KG_PER_S = 0.05 / 3600;

/** A temperature this little above the limit is rounding, K. */
const ROUNDING_K = 1e-6;

/** Runs the cabin through one weather. `given` (W, sensible) replaces what would be delivered, slot by slot. */
export function holdLimit(
  frame: LoadFrame,
  start: RoomState,
  weather: LoadWeather,
  given: Float64Array | null = null,
): HeldLoad {
  const { cabin, coil, dryAir } = frame;
  const count = frame.limitC.length;
  const stepS = frame.slotMs / 1000;
  const room = new CabinRun(cabin, start.airC, start.fabricC, stepS);
  const held = {
    loadW: new Float64Array(count),
    latentW: new Float64Array(count),
    sensibleW: new Float64Array(count),
  };
  let ratio = start.ratio;
  let warmKh = 0;
  for (let i = 0; i < count; i += 1) {
    const limitC = frame.limitC[i];
    const outdoorC = weather.outdoorC[i];
    const sun = weather.sunWPerM2[i];
    const heatW = frame.gainsW[i] + (limitC === null ? 0 : cabin.homeW) + weather.disturbanceW[i];
    const neededW = limitC === null ? 0 : Math.max(0, room.heatToEndAt(limitC, outdoorC, sun, heatW));
    const dryW =
      neededW > 0 && dryAir && limitC !== null
        ? Math.min(neededW, dryAir(limitC, outdoorC, weather.outdoorRatio[i]))
        : 0;
    const mostW = coil.sensibleMostW(Math.max(room.airC, limitC ?? 0));
    const sensibleW = given ? given[i] : Math.min(mostW, neededW - dryW);
    const duty = mostW > 0 ? Math.min(1, sensibleW / mostW) : 0;
    const latentW = duty > 0 ? duty * frame.latentScale * coil.latentMostW(room.airC, ratio) : 0;
    room.step(outdoorC, sun, heatW - sensibleW - dryW);
    ratio = nextRatio(frame, ratio, weather.outdoorRatio[i], latentW, limitC !== null, stepS);
    held.sensibleW[i] = sensibleW;
    held.latentW[i] = latentW;
    held.loadW[i] = sensibleW + duty * coil.fanW + latentW;
    if (limitC !== null) warmKh += Math.max(0, room.airC - limitC - ROUNDING_K) * (stepS / 3600);
  }
  return { ...held, warmKh };
}

/** Room moisture after a step, implicit in the leakage. */
function nextRatio(
  frame: LoadFrame,
  ratio: number,
  outdoorRatio: number,
  latentW: number,
  home: boolean,
  stepS: number,
): number {
  const airKg = frame.floorM2 * ROOM_HEIGHT_M * AIR_KG_PER_M3;
  const leakKgPerS = (airKg * LEAKAGE_PER_H) / 3600;
  const storedRate = (airKg * MOISTURE_BUFFER) / stepS;
  const sourceKgPerS = (home ? frame.people * PERSON_KG_PER_S : 0) - latentW / VAPORISATION_J_PER_KG;
  return Math.max(
    0,
    (storedRate * ratio + leakKgPerS * outdoorRatio + sourceKgPerS) / (storedRate + leakKgPerS),
  );
}

/** Part that is withheld to see how warm it becomes. */
const WITHHELD = 0.15;

/** Degree-hours above the limit for each kWh of load that is not delivered, K h/kWh; 0 where nothing is needed. */
export function warmKhPerKwh(
  frame: LoadFrame,
  start: RoomState,
  weather: LoadWeather,
  full: HeldLoad,
): number {
  const loadKwh = (full.loadW.reduce((sum, w) => sum + w, 0) * frame.slotMs) / 3.6e9;
  if (!(loadKwh > 0.05)) return 0;
  const given = full.sensibleW.map((w) => w * (1 - WITHHELD));
  const less = holdLimit(frame, start, weather, given);
  const lessKwh = (less.loadW.reduce((sum, w) => sum + w, 0) * frame.slotMs) / 3.6e9;
  return Math.max(0, less.warmKh - full.warmKh) / Math.max(1e-6, loadKwh - lessKwh);
}

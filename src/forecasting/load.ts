/**
 * The cooling that must be delivered to hold the comfort limit: the cabin is run through one weather, free while nobody
 * is home or it stays below the limit, held at the limit otherwise as far as the coil can. Sensible heat, moisture and
 * the heat of the fans are counted; dry air is used first where the site has it.
 */
import { heatToHoldW, stepFree, type CabinParameters, type CabinState } from './cabin.ts';
import { VAPORISATION_J_PER_KG, type Coil } from './coil.ts';
import type { DryAir } from './dry-air.ts';

export interface RoomState extends CabinState {
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

export interface Load {
  readonly loadW: Float64Array;
  readonly latentW: Float64Array;
  /** Degree-hours above the limit that stay although the coil runs in full, K h. */
  readonly warmKh: number;
}

const ROOM_HEIGHT_M = 2.5;
const AIR_KG_PER_M3 = 1.2;
/** Air changes by leakage, 1/h; moisture that walls and cloth take up beside the air; vapour of a person, kg/s. */
const LEAKAGE_PER_H = 0.5;
const MOISTURE_BUFFER = 8;
const PERSON_KG_PER_S = 0.05 / 3600;

/** Runs the cabin through one weather. `given` (W, sensible) replaces what would be delivered, slot by slot. */
export function holdLimit(
  frame: LoadFrame,
  start: RoomState,
  weather: LoadWeather,
  given: Float64Array | null = null,
): Load & { readonly sensibleW: Float64Array } {
  const count = frame.limitC.length;
  const loadW = new Float64Array(count);
  const latentW = new Float64Array(count);
  const sensibleW = new Float64Array(count);
  const hours = frame.slotMs / 3_600_000;
  let state: RoomState = start;
  let warmKh = 0;
  for (let i = 0; i < count; i += 1) {
    const step = stepSlot(frame, state, weather, i, given?.[i] ?? null);
    sensibleW[i] = step.sensibleW;
    latentW[i] = step.latentW;
    loadW[i] = step.sensibleW === 0 ? 0 : step.sensibleW + step.fanW + step.latentW;
    state = step.state;
    const limitC = frame.limitC[i];
    if (limitC !== null) warmKh += Math.max(0, state.airC - limitC - ROUNDING_K) * hours;
  }
  return { loadW, latentW, sensibleW, warmKh };
}

const ROUNDING_K = 1e-6;

interface SlotStep {
  readonly state: RoomState;
  readonly sensibleW: number;
  readonly latentW: number;
  readonly fanW: number;
}

function stepSlot(
  frame: LoadFrame,
  from: RoomState,
  weather: LoadWeather,
  i: number,
  givenW: number | null,
): SlotStep {
  const { cabin, coil } = frame;
  const limitC = frame.limitC[i];
  const stepS = frame.slotMs / 1000;
  const home = limitC === null ? 0 : 1;
  const input = {
    outdoorC: weather.outdoorC[i],
    sunWPerM2: weather.sunWPerM2[i],
    heatW: frame.gainsW[i] + cabin.homeW * home + weather.disturbanceW[i],
  };
  const free = stepFree(cabin, from, input, stepS);
  const mostW = coil.sensibleMostW(Math.max(from.airC, limitC ?? from.airC));
  let next: CabinState = free;
  let sensibleW = 0;
  if (givenW !== null || (limitC !== null && free.airC > limitC)) {
    const heldC = limitC ?? free.airC;
    const held = heatToHoldW(cabin, from, heldC, input, stepS);
    const dryW = home && frame.dryAir ? frame.dryAir(heldC, input.outdoorC, weather.outdoorRatio[i]) : 0;
    sensibleW = givenW ?? Math.min(mostW, Math.max(0, held.takeW - dryW));
    const takenW = sensibleW + Math.max(0, Math.min(dryW, held.takeW));
    next = stepFree(cabin, from, { ...input, heatW: input.heatW - takenW }, stepS);
  }
  const duty = mostW > 0 ? Math.min(1, sensibleW / mostW) : 0;
  const latentW = duty > 0 ? duty * frame.latentScale * coil.latentMostW(from.airC, from.ratio) : 0;
  const ratio = nextRatio(frame, from.ratio, weather.outdoorRatio[i], latentW, home, stepS);
  return { state: { ...next, ratio }, sensibleW, latentW, fanW: duty * coil.fanW };
}

/** Room moisture after a step, implicit in the leakage. */
function nextRatio(
  frame: LoadFrame,
  ratio: number,
  outdoorRatio: number,
  latentW: number,
  home: number,
  stepS: number,
): number {
  const airKg = frame.floorM2 * ROOM_HEIGHT_M * AIR_KG_PER_M3;
  const leakKgPerS = (airKg * LEAKAGE_PER_H) / 3600;
  const storedRate = (airKg * MOISTURE_BUFFER) / stepS;
  const sourceKgPerS = frame.people * home * PERSON_KG_PER_S - latentW / VAPORISATION_J_PER_KG;
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
  full: Load & { readonly sensibleW: Float64Array },
): number {
  const loadKwh = (full.loadW.reduce((sum, w) => sum + w, 0) * frame.slotMs) / 3.6e9;
  if (!(loadKwh > 0.05)) return 0;
  const given = full.sensibleW.map((w) => w * (1 - WITHHELD));
  const less = holdLimit(frame, start, weather, given);
  const lessKwh = (less.loadW.reduce((sum, w) => sum + w, 0) * frame.slotMs) / 3.6e9;
  return Math.max(0, less.warmKh - full.warmKh) / Math.max(1e-6, loadKwh - lessKwh);
}

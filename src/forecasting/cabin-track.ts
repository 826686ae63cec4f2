/**
 * The measured room run through a cabin model: the hidden fabric follows, and whatever heat the model cannot explain is
 * left over hour by hour.
 */
import { hourOfDay } from './bins.ts';
import { restingFabricC, stepFabric, type CabinParameters } from './cabin.ts';

/** One hour of what moved the cabin; null room or outdoor air makes a gap. */
export interface CabinHour {
  readonly hour: number;
  readonly outdoorC: number | null;
  readonly sunWPerM2: number;
  readonly roomC: number | null;
  readonly roomEndC: number | null;
  readonly machineHeatW: number | null;
  readonly home: number;
}

export interface CabinTrack {
  /** Heat into the air that the model leaves unexplained, W; null across gaps and while the fabric settles. */
  readonly unexplainedW: readonly (number | null)[];
  /** Fabric at the end of the last hour; null when the room was never heard. */
  readonly fabricC: number | null;
}

const STEPS = 4;
const HOUR_S = 3600;
/** Hours after a gap in which the fabric is still being found. */
export const SETTLING_HOURS = 24;

export function trackCabin(p: CabinParameters, hours: readonly CabinHour[]): CabinTrack {
  let fabricC: number | null = null;
  let settled = 0;
  let lastEndC: number | null = null;
  const unexplainedW = hours.map((hour) => {
    const { outdoorC, roomC, roomEndC } = hour;
    if (outdoorC === null || roomC === null || roomEndC === null) {
      lastEndC = null;
      settled = Math.min(settled, SETTLING_HOURS / 2);
      return null;
    }
    const startC = lastEndC ?? 2 * roomC - roomEndC;
    const begin = fabricC ?? restingFabricC(p, roomC, outdoorC, hour.sunWPerM2);
    const follow = followFabric(p, begin, startC, roomEndC, outdoorC, hour.sunWPerM2);
    fabricC = follow.endC;
    lastEndC = roomEndC;
    settled += 1;
    if (hour.machineHeatW === null || settled <= SETTLING_HOURS) return null;
    const inflowW =
      p.airFabricWPerK * (follow.meanC - roomC) +
      p.airOutdoorWPerK * (outdoorC - roomC) +
      p.airApertureM2 * hour.sunWPerM2 +
      hour.machineHeatW +
      p.homeW * hour.home +
      p.gainsW[hourOfDay(hour.hour)];
    return (p.airJPerK * (roomEndC - startC)) / HOUR_S - inflowW;
  });
  return { unexplainedW, fabricC };
}

function followFabric(
  p: CabinParameters,
  beginC: number,
  startC: number,
  endC: number,
  outdoorC: number,
  sunWPerM2: number,
): { meanC: number; endC: number } {
  const input = { outdoorC, sunWPerM2 };
  let fabricC = beginC;
  let sum = 0;
  for (let step = 1; step <= STEPS; step += 1) {
    const before = fabricC;
    fabricC = stepFabric(p, fabricC, startC + ((endC - startC) * step) / STEPS, input, HOUR_S / STEPS);
    sum += (before + fabricC) / 2;
  }
  return { meanC: sum / STEPS, endC: fabricC };
}

/**
 * Cooling that needs no ice: night air through open windows or vents, or an evaporative pad. It counts where the air
 * allows it: cooler than the room, and not so moist that the room becomes sticky.
 */
import type { SiteConfig } from '../config.ts';
import {
  relativeHumidityPct,
  saturationHumidityRatio,
  standardPressurePa,
  wetBulbC,
} from '../physics/moist-air.ts';

/** Air changes an hour through open windows, and through a pad cooler; room height. Common practice, no source. */
const NIGHT_CHANGES_PER_H = 5;
const PAD_CHANGES_PER_H = 12;
const ROOM_HEIGHT_M = 2.5;
const AIR_J_PER_M3_K = 1.2 * 1006;
/** Part of the way to the wet bulb that a pad brings the air (common practice, no source). */
const PAD_EFFECTIVENESS = 0.8;
/** Incoming air must be cooler than the room by this, K. */
const WORTHWHILE_K = 1.5;
/** Room humidity that incoming air must not exceed once it is at room temperature, %. */
const STICKY_PCT = 65;

/** Heat that dry air takes out of a room, W; 0 where it cannot. */
export type DryAir = (roomC: number, outdoorC: number, outdoorW: number) => number;

export function dryAirOf(config: SiteConfig): DryAir | null {
  const { cabin, site } = config;
  if (cabin.dryAir === 'none') return null;
  const pressurePa = standardPressurePa(site.elevationM);
  const volumeM3 = cabin.floorM2 * ROOM_HEIGHT_M;
  const pad = cabin.dryAir === 'evaporative-pad';
  const flowWPerK = ((pad ? PAD_CHANGES_PER_H : NIGHT_CHANGES_PER_H) * volumeM3 * AIR_J_PER_M3_K) / 3600;
  return (roomC, outdoorC, outdoorW) => {
    const ratio = Math.min(outdoorW, saturationHumidityRatio(outdoorC, pressurePa));
    const supply = pad ? afterPad(outdoorC, ratio, pressurePa) : { airC: outdoorC, ratio };
    const sticky = saturationHumidityRatio(roomC, pressurePa) * (STICKY_PCT / 100);
    if (!(supply.airC < roomC - WORTHWHILE_K) || supply.ratio > sticky) return 0;
    return flowWPerK * (roomC - supply.airC);
  };
}

/** Air cooled along its wet bulb: what it loses in sensible heat it gains in moisture. */
function afterPad(outdoorC: number, ratio: number, pressurePa: number): { airC: number; ratio: number } {
  const humidityPct = Math.min(100, relativeHumidityPct(outdoorC, ratio, pressurePa));
  const wetC = wetBulbC(outdoorC, humidityPct, pressurePa);
  const airC = outdoorC - PAD_EFFECTIVENESS * (outdoorC - wetC);
  const wetRatio = saturationHumidityRatio(wetC, pressurePa);
  return { airC, ratio: ratio + PAD_EFFECTIVENESS * (wetRatio - ratio) };
}

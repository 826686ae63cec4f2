/** How well the fan coil takes heat from the room, from three temperatures and the room's humidity: no flow meter, no learned figure. */
import type { SiteConfig } from '../config.ts';
import type { CycleRecord } from '../record.ts';

/** The coil is judged at work: on cold water, with enough between it and the room. */
const [LEAST_DRIVE_K, MOST_LEAVING_C] = [8, 8];
const AIR_J_PER_KG_K = 1006;
const VAPOUR_J_PER_KG = 2.501e6;
/** Alduchov & Eskridge 1996, Journal of Applied Meteorology 35(4). */
const [MAGNUS_A, MAGNUS_C] = [17.625, 243.04];
/** Molar mass of water over that of dry air. */
const WATER_TO_AIR = 0.622;

/**
 * Transfer units on the water's side. On a dry coil water warms towards the room's temperature; below the dew point towards its enthalpy, as air saturated
 * at the water's temperature (Braun, Klein & Mitchell 1989, ASHRAE Transactions 95(2)). The greater drive counts, so moist
 * air does not pass for a clean coil. Null unless the coil works on cold water; without humidity it is taken as dry.
 */
export function coilTransferUnits(site: SiteConfig, record: CycleRecord): number | null {
  const { enteringWaterC: entering, leavingWaterC: leaving, roomC, roomHumidityPct } = record;
  if (entering === null || leaving === null || roomC === null) return null;
  if (!(roomC - leaving > LEAST_DRIVE_K && leaving < MOST_LEAVING_C && entering > leaving)) return null;
  const dry = unitsFrom(roomC - leaving, roomC - entering);
  if (dry === null || roomHumidityPct === null) return dry;
  const pressurePa = standardPressurePa(site.site.elevationM);
  const saturated = (atC: number): number => enthalpyJPerKg(atC, 100, pressurePa);
  const room = enthalpyJPerKg(roomC, roomHumidityPct, pressurePa);
  const wet = unitsFrom(room - saturated(leaving), room - saturated(entering));
  if (wet === null) return dry;
  // a kelvin of water stands for this much more enthalpy than a kelvin of dry air
  const steeper = (saturated(entering) - saturated(leaving)) / (AIR_J_PER_KG_K * (entering - leaving));
  return Math.min(dry, wet / steeper);
}

/** ln of the drive at one end over that at the other. */
function unitsFrom(greater: number, lesser: number): number | null {
  const share = 1 - lesser / greater;
  return share > 0.02 && share < 0.98 ? -Math.log(1 - share) : null;
}

/**
 * By how much the water stands above the room's dew point, K, 0 on a wet coil; null without humidity. A dry coil passes its heat
 * through the water's side as easily as a wet one but has less to pass, so the two read some tenths apart.
 */
export function coilDryK({
  enteringWaterC,
  leavingWaterC,
  roomC,
  roomHumidityPct,
}: CycleRecord): number | null {
  if (enteringWaterC === null || leavingWaterC === null || roomC === null || roomHumidityPct === null)
    return null;
  const gamma = Math.log(Math.max(1, roomHumidityPct) / 100) + (MAGNUS_A * roomC) / (roomC + MAGNUS_C);
  const dewPointC = (MAGNUS_C * gamma) / (MAGNUS_A - gamma);
  return Math.max(0, (enteringWaterC + leavingWaterC) / 2 - dewPointC);
}

/** Saturation pressure after Alduchov & Eskridge, within 0.4 % from −40 to 50 °C. */
function enthalpyJPerKg(atC: number, humidityPct: number, pressurePa: number): number {
  const vapourPa = (humidityPct / 100) * 610.94 * Math.exp((MAGNUS_A * atC) / (atC + MAGNUS_C));
  return AIR_J_PER_KG_K * atC + VAPOUR_J_PER_KG * ((WATER_TO_AIR * vapourPa) / (pressurePa - vapourPa));
}

/** ICAO standard atmosphere, troposphere. */
function standardPressurePa(elevationM: number): number {
  return 101_325 * (1 - 2.25577e-5 * elevationM) ** 5.25588;
}

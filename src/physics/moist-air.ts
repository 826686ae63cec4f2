/**
 * Moist air by PsychroLib (ASHRAE Handbook—Fundamentals 2017, chapter 1). That library keeps its unit system
 * in one global place; it is set to SI here, once, and nothing else imports the library. Relative humidity is
 * in % here (0–1 inside the library). Each function throws on what has no physical meaning (NaN, a humidity
 * outside 0–100 %, a temperature outside -100 to 200 °C). Humidity ratio is kg of vapour per kg of dry air.
 */
import psychrolib from 'psychrolib';
import { RimeholdError } from '../errors.ts';

psychrolib.SetUnitSystem(psychrolib.SI);

function checked(pressurePa: number): number {
  if (!(pressurePa > 0)) {
    throw new RimeholdError('internal', `Expected an air pressure above 0 Pa, found ${pressurePa}.`, {
      pressurePa,
    });
  }
  return pressurePa;
}

/** Pressure of saturated vapour over ice or water, Pa: eq. 5 and 6. */
export function saturationPressurePa(airC: number): number {
  return psychrolib.GetSatVapPres(airC);
}

/** Humidity ratio, kg/kg: eq. 12 and 20. Never below 1e-7. */
export function humidityRatio(airC: number, rhPct: number, pressurePa: number): number {
  return psychrolib.GetHumRatioFromRelHum(airC, rhPct / 100, checked(pressurePa));
}

/** Humidity ratio at saturation, kg/kg: eq. 21. */
export function saturationHumidityRatio(airC: number, pressurePa: number): number {
  return psychrolib.GetSatHumRatio(airC, checked(pressurePa));
}

/** Humidity ratio from dry bulb and wet bulb, kg/kg: eq. 33 (over water) and 35 (over ice). */
export function humidityRatioFromWetBulb(airC: number, wetBulb: number, pressurePa: number): number {
  return psychrolib.GetHumRatioFromTWetBulb(airC, wetBulb, checked(pressurePa));
}

/** Relative humidity, %; above 100 the air is supersaturated (fog). */
export function relativeHumidityPct(airC: number, ratio: number, pressurePa: number): number {
  return 100 * psychrolib.GetRelHumFromHumRatio(airC, ratio, checked(pressurePa));
}

/** Dew point, °C, of air known by its relative humidity. */
export function dewPointC(airC: number, rhPct: number, pressurePa: number): number {
  return dewPointFromRatioC(airC, humidityRatio(airC, rhPct, pressurePa), pressurePa);
}

/** Dew point, °C, of air known by its humidity ratio; not above `airC`. */
export function dewPointFromRatioC(airC: number, ratio: number, pressurePa: number): number {
  return psychrolib.GetTDewPointFromHumRatio(airC, ratio, checked(pressurePa));
}

/** Thermodynamic wet bulb, °C, of air known by its relative humidity; within 0.001 K. */
export function wetBulbC(airC: number, rhPct: number, pressurePa: number): number {
  const ratio = humidityRatio(airC, rhPct, pressurePa);
  return psychrolib.GetTWetBulbFromHumRatio(airC, ratio, pressurePa);
}

/** Enthalpy of moist air per kg of dry air, J/kg, zero for dry air at 0 °C: eq. 30. */
export function moistEnthalpyJPerKg(airC: number, ratio: number): number {
  return psychrolib.GetMoistAirEnthalpy(airC, ratio);
}

/** Volume of moist air per kg of dry air, m³/kg: eq. 26. */
export function moistVolumeM3PerKg(airC: number, ratio: number, pressurePa: number): number {
  return psychrolib.GetMoistAirVolume(airC, ratio, checked(pressurePa));
}

/** Density of moist air, dry air and vapour together, kg/m³: eq. 11. */
export function airDensityKgPerM3(airC: number, ratio: number, pressurePa: number): number {
  return psychrolib.GetMoistAirDensity(airC, ratio, checked(pressurePa));
}

/** Pressure of the standard atmosphere at a height above the sea, Pa: eq. 3. */
export function standardPressurePa(elevationM: number): number {
  return psychrolib.GetStandardAtmPressure(elevationM);
}

/** Pump loop and fan coil: how much heat a room gives to water of a temperature, and what ice and coil do together. */
import type { SiteConfig } from '../config.ts';
import { effectiveness } from '../physics/heat-exchanger.ts';
import { humidityRatio, standardPressurePa } from '../physics/moist-air.ts';
import { WATER_CP_J_PER_KG_K } from '../physics/water.ts';

/** Air at 20 °C near sea level: 1.2 kg/m³ × 1006 J/(kg K), J/(m³ K); thin mountain air is learned as coil gain. */
const AIR_J_PER_M3_K = 1207;

/** 30 % propylene glycol, J/(kg K), as used with the measured tank; an internal-melt loop carries it. */
export const GLYCOL_CP_J_PER_KG_K = 3850;

export interface DeliveryModel {
  /** Heat capacity of what the loop carries, J/(kg K). */
  readonly loopCpJPerKgK: number;
  /** Loop capacity rate at the site file's flow, W/K. */
  readonly loopWPerK: number;
  /**
   * Heat per kelvin between room air and water sent to the coil, W/K, for a loop capacity rate and a dry coil
   * conductance multiplied by `gain`.
   */
  coilWPerK(loopWPerK: number, gain: number): number;
  /** Steady heat taken from a room when the melt conductance faces ice (or water) at `bankC`; 0 when it is warmer. */
  deliverableW(meltWPerK: number, bankC: number, roomC: number): number;
}

export function deliveryModel(config: SiteConfig): DeliveryModel {
  const { delivery, bank } = config;
  const loopCpJPerKgK = bank.form === 'ice-on-coil-internal' ? GLYCOL_CP_J_PER_KG_K : WATER_CP_J_PER_KG_K;
  const airWPerK = (delivery.airM3PerH / 3600) * AIR_J_PER_M3_K;
  const loopWPerK = (delivery.flowLPerMin / 60) * loopCpJPerKgK;
  const coilWPerK = (loop: number, gain: number): number => {
    const least = Math.min(airWPerK, loop);
    if (!(least > 0)) return 0;
    const most = Math.max(airWPerK, loop);
    return least * effectiveness((delivery.coilWPerK * gain) / least, least / most, 'counterflow');
  };
  return {
    loopCpJPerKgK,
    loopWPerK,
    coilWPerK,
    deliverableW: (meltWPerK, bankC, roomC) => {
      const coil = coilWPerK(loopWPerK, 1);
      // Water leaves at bank + (entering − bank)·exp(−NTU); the coil sees room − leaving. Two linear equations.
      const passes = meltWPerK > 0 ? Math.exp(-meltWPerK / loopWPerK) : 0;
      const approachKPerW = passes / (loopWPerK * Math.max(1e-9, 1 - passes));
      return Math.max(0, (roomC - bankC) / (1 / coil + approachKPerW));
    },
  };
}

/**
 * Ratio of total to sensible heat of a wet coil, at least 1: moist air against saturated air at the surface, on the
 * same bypass (Lewis number 1). `roomRatio` and `surfaceRatio` are humidity ratios, kg/kg.
 */
export function wetFactor(roomC: number, roomRatio: number, surfaceC: number, surfaceRatio: number): number {
  const drop = roomC - surfaceC;
  if (!(drop > 1)) return 1;
  const latentK = (2.5e6 * Math.max(0, roomRatio - surfaceRatio)) / 1006;
  return Math.min(2.5, 1 + latentK / drop);
}

/** Air leaves a coil's surface this part of the way from water to room (common practice, no source). */
const SURFACE_SHARE = 0.35;

/** `wetFactor` of the coil for water of `leavingC` sent to it, from room temperature and relative humidity. */
export function coilWetFactor(
  roomC: number,
  humidityPct: number,
  leavingC: number,
  elevationM: number,
): number {
  const surfaceC = Math.max(0, leavingC) + SURFACE_SHARE * (roomC - leavingC);
  if (!(roomC - surfaceC > 1)) return 1;
  const pressurePa = standardPressurePa(elevationM);
  const humid = Math.min(100, Math.max(1, humidityPct));
  return wetFactor(
    roomC,
    humidityRatio(roomC, humid, pressurePa),
    surfaceC,
    humidityRatio(surfaceC, 100, pressurePa),
  );
}

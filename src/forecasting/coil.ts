/**
 * What the fan coil takes out of the room air at full run: sensible heat by effectiveness, moisture by the bypass factor
 * (air that touches the surface leaves saturated at its temperature, the rest passes unchanged; common practice).
 */
import type { SiteConfig } from '../config.ts';
import { effectiveness } from '../physics/heat-exchanger.ts';
import type { Saturation } from './saturation.ts';

/** Melt water as it usually comes from a bank with ice, °C (common practice, no source). */
const LEAVING_C = 4;
const AIR_KG_PER_M3 = 1.2;
const AIR_J_PER_KG_K = 1006;
const WATER_J_PER_KG_K = 4190;
/** Heat of condensing at the coil, J/kg. */
export const VAPORISATION_J_PER_KG = 2.47e6;

export interface Coil {
  /** Sensible cooling at full run less the heat of its own fans, W. */
  sensibleMostW(roomC: number): number;
  /** Latent cooling at full run, W. */
  latentMostW(roomC: number, roomW: number): number;
  /** Heat of the fans at full run, W. */
  readonly fanW: number;
}

export function coilOf({ delivery }: SiteConfig, saturation: Saturation): Coil {
  const airKgPerS = (delivery.airM3PerH / 3600) * AIR_KG_PER_M3;
  const airWPerK = airKgPerS * AIR_J_PER_KG_K;
  const waterWPerK = (delivery.flowLPerMin / 60) * WATER_J_PER_KG_K;
  const leastWPerK = Math.min(airWPerK, waterWPerK);
  const share = effectiveness(
    delivery.coilWPerK / leastWPerK,
    leastWPerK / Math.max(airWPerK, waterWPerK),
    'counterflow',
  );
  const touching = 1 - Math.exp(-delivery.coilWPerK / airWPerK);
  const grossW = (roomC: number): number => share * leastWPerK * Math.max(0, roomC - LEAVING_C);
  return {
    fanW: delivery.fanW,
    sensibleMostW: (roomC) => Math.max(0, grossW(roomC) - delivery.fanW),
    latentMostW: (roomC, roomW) => {
      const surfaceC = roomC - grossW(roomC) / airWPerK / touching;
      const dryness = roomW - saturation(surfaceC);
      return airKgPerS * touching * Math.max(0, dryness) * VAPORISATION_J_PER_KG;
    },
  };
}

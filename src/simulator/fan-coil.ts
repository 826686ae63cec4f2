/**
 * A fan coil, dry or wet: effectiveness–NTU on temperatures when dry, on enthalpies when wet, after Braun, Klein &
 * Mitchell 1989, "Effectiveness models for cooling towers and cooling coils", ASHRAE Transactions 95(2). The greater of
 * the dry and the wet heat is taken. Sensible and latent part by bypass factor and apparatus dew point.
 * Frost is neglected: water below 0 °C is kept from coils by the interlocks.
 */
import { effectiveness } from '../physics/heat-exchanger.ts';
import { WATER_CP_J_PER_KG_K } from '../physics/water.ts';
import { VAPOUR_J_PER_KG } from './bank.ts';
import type { SaturationTable } from './saturation.ts';

export const AIR_CP = 1006;
/** Air's share of the dry coil's resistance; common practice, no source. */
const AIR_SHARE = 0.7;

export class FanCoil {
  sensibleW = 0;
  latentW = 0;
  /** Water given off by the air, kg/s. */
  condensateKgPerS = 0;
  private readonly saturation: SaturationTable;
  /** Mean slope of saturated enthalpy along the coil, from the last answer, J/(kg K). */
  private slope = 3000;

  constructor(saturation: SaturationTable) {
    this.saturation = saturation;
  }

  off(): void {
    this.sensibleW = 0;
    this.latentW = 0;
    this.condensateKgPerS = 0;
  }

  /** Air and water entering; flows in kg/s; dry conductance of the whole coil. */
  run(
    airC: number,
    ratio: number,
    waterC: number,
    airKgPerS: number,
    waterKgPerS: number,
    dryWPerK: number,
  ): void {
    const dryW = this.dryW(airC, waterC, airKgPerS, waterKgPerS, dryWPerK);
    this.sensibleW = dryW;
    this.latentW = 0;
    this.condensateKgPerS = 0;
    if (waterC < airC && this.saturation.ratio(waterC) < ratio) {
      this.wet(airC, ratio, waterC, airKgPerS, waterKgPerS, dryWPerK, dryW);
    }
  }

  private dryW(
    airC: number,
    waterC: number,
    airKgPerS: number,
    waterKgPerS: number,
    dryWPerK: number,
  ): number {
    const air = airKgPerS * AIR_CP;
    const water = waterKgPerS * WATER_CP_J_PER_KG_K;
    const least = Math.min(air, water);
    if (!(least > 0)) return 0;
    const ratio = least / Math.max(air, water);
    return effectiveness(dryWPerK / least, ratio, 'counterflow') * least * (airC - waterC);
  }

  private saturatedJPerKg(atC: number): number {
    return AIR_CP * atC + VAPOUR_J_PER_KG * this.saturation.ratio(atC);
  }

  private wet(
    airC: number,
    ratio: number,
    waterC: number,
    airKgPerS: number,
    waterKgPerS: number,
    dryWPerK: number,
    dryW: number,
  ): void {
    const airJPerKg = AIR_CP * airC + VAPOUR_J_PER_KG * ratio;
    const inJPerKg = this.saturatedJPerKg(waterC);
    const water = waterKgPerS * WATER_CP_J_PER_KG_K;
    const airside = dryWPerK / AIR_SHARE;
    const waterside = dryWPerK / (1 - AIR_SHARE);
    let heatW = dryW;
    for (let turn = 0; turn < 2; turn++) {
      const conductance = airside / AIR_CP / (1 + (this.slope / AIR_CP) * (airside / waterside));
      const waterRate = water / this.slope;
      const least = Math.min(airKgPerS, waterRate);
      const rates = least / Math.max(airKgPerS, waterRate);
      heatW = effectiveness(conductance / least, rates, 'counterflow') * least * (airJPerKg - inJPerKg);
      const outC = waterC + Math.max(0.1, heatW / water);
      this.slope = (this.saturatedJPerKg(outC) - inJPerKg) / (outC - waterC);
    }
    if (heatW > dryW) this.split(ratio, airKgPerS, airside, airJPerKg, heatW);
  }

  /** Leaving air lies on the line from the entering state to saturation at the apparatus dew point. */
  private split(ratio: number, airKgPerS: number, airside: number, airJPerKg: number, heatW: number): void {
    const bypass = Math.exp(-airside / (airKgPerS * AIR_CP));
    const apparatusJPerKg = airJPerKg - heatW / airKgPerS / (1 - bypass);
    const apparatusC = this.saturation.inverse(apparatusJPerKg, AIR_CP, VAPOUR_J_PER_KG);
    const condensate = airKgPerS * (1 - bypass) * (ratio - this.saturation.ratio(apparatusC));
    if (!(condensate > 0)) return;
    this.condensateKgPerS = condensate;
    this.latentW = condensate * VAPOUR_J_PER_KG;
    this.sensibleW = heatW - this.latentW;
  }
}

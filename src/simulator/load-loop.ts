/**
 * The melt-water loop between bank and rooms: a pipe each way with its water, the pump's heat, what leaks in on the way,
 * and one fan coil for each room.
 */
import type { SiteConfig } from '../config.ts';
import { WATER_CP_J_PER_KG_K } from '../physics/water.ts';
import type { Cabin } from './cabin.ts';
import { FanCoil } from './fan-coil.ts';
import type { SaturationTable } from './saturation.ts';

const CP = WATER_CP_J_PER_KG_K;
/** Water in each pipe, as seconds of full flow; heat through its insulation. Common practice, no source. */
const PIPE_S = 20;
const PIPE_W_PER_K = 1.2;
/** Part of the pump's electrical power that ends in the water; the rest warms the air round it. */
const PUMP_TO_WATER = 0.75;
/** A coil whose fan rests still takes a little by natural convection: part of its air flow. */
const STILL_AIR_PART = 0.04;
const AIR_DENSITY = 1.15;

export class LoadLoop {
  supplyC: number;
  returnC: number;
  deliveredW = 0;
  latentW = 0;
  condensateKg = 0;
  /** Heat that the pipes took from the room and the pump, J, in the last step. */
  pipeGainJ = 0;
  pumpAirW = 0;
  coilFactor = 1;
  private readonly pipeKg: number;
  private readonly coilWPerK: number;
  private readonly airKgPerS: number;
  private readonly coils: readonly FanCoil[];

  constructor(site: SiteConfig, rooms: number, saturation: SaturationTable, startC: number) {
    this.supplyC = startC;
    this.returnC = startC;
    this.pipeKg = (site.delivery.flowLPerMin / 60) * PIPE_S;
    this.coilWPerK = site.delivery.coilWPerK;
    this.airKgPerS = (site.delivery.airM3PerH / 3600) * AIR_DENSITY;
    this.coils = Array.from({ length: rooms }, () => new FanCoil(saturation));
  }

  /** Heat held by the water of both pipes above 0 °C, J. */
  storedJ(): number {
    return this.pipeKg * CP * (this.supplyC + this.returnC);
  }

  /** One step after the bank's: water leaving the bank runs to the coils and back. Heat goes out of the rooms' air. */
  step(
    dtS: number,
    flowKgPerS: number,
    bankLeavingC: number,
    pumpW: number,
    fanOn: boolean,
    cabin: Cabin,
  ): void {
    this.deliveredW = 0;
    this.latentW = 0;
    this.condensateKg = 0;
    this.pumpAirW = (1 - PUMP_TO_WATER) * pumpW;
    const coilInC = this.supplyC;
    let coilOutC = coilInC;
    if (flowKgPerS > 0) {
      this.runCoils(dtS, flowKgPerS, coilInC, fanOn, cabin);
      coilOutC = coilInC + this.deliveredW / (flowKgPerS * CP);
    }
    const moved = Math.min(1, (flowKgPerS * dtS) / this.pipeKg);
    this.supplyC += moved * (bankLeavingC - this.supplyC);
    this.returnC += moved * (coilOutC - this.returnC);
    this.warmPipes(dtS, flowKgPerS > 0 ? PUMP_TO_WATER * pumpW : 0, cabin);
    if (!(flowKgPerS > 0)) this.pumpAirW = pumpW;
  }

  private warmPipes(dtS: number, pumpHeatW: number, cabin: Cabin): void {
    const capacity = this.pipeKg * CP;
    const roomC = cabin.airC[0];
    const supplyW = PIPE_W_PER_K * (roomC - this.supplyC);
    const returnW = PIPE_W_PER_K * (roomC - this.returnC);
    this.supplyC += ((supplyW + pumpHeatW) * dtS) / capacity;
    this.returnC += (returnW * dtS) / capacity;
    cabin.heatW[0] -= supplyW + returnW;
    this.pipeGainJ = (supplyW + returnW + pumpHeatW) * dtS;
  }

  private runCoils(dtS: number, flowKgPerS: number, waterC: number, fanOn: boolean, cabin: Cabin): void {
    const dry = this.coilWPerK * this.coilFactor * (fanOn ? 1 : STILL_AIR_PART * 2);
    const air = this.airKgPerS * this.coilFactor * (fanOn ? 1 : STILL_AIR_PART);
    for (let r = 0; r < cabin.rooms; r++) {
      const share = cabin.share[r];
      const coil = this.coils[r];
      coil.run(cabin.airC[r], cabin.ratio[r], waterC, share * air, share * flowKgPerS, share * dry);
      cabin.heatW[r] -= coil.sensibleW;
      cabin.moistureKgPerS[r] -= coil.condensateKgPerS;
      this.deliveredW += coil.sensibleW + coil.latentW;
      this.latentW += coil.latentW;
      this.condensateKg += coil.condensateKgPerS * dtS;
    }
  }
}

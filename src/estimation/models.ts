/**
 * One point of the state space as a bank: what drives it, what its state amounts to, and the heat that flows for it.
 */
import {
  FUSION_J_PER_KG,
  J_PER_KWH,
  freezeConductanceWPerK,
  iceOnHandKwh,
  meltConductanceWPerK,
  type BankModel,
} from '../plant/bank.ts';
import type { DeliveryModel } from '../plant/delivery.ts';
import type { IceMachineModel } from '../plant/ice-machine.ts';
import { iceOnWall } from './hollow.ts';
import { containerIce, X } from './layout.ts';
import { meanOf, scale } from './water.ts';

/** What drives one step; means over it. */
export interface Drive {
  readonly dtS: number;
  /** Part of the step in which the ice machine runs, 0–1, and its electrical power while it runs (null: not heard). */
  readonly charging: number;
  readonly chillerW: number | null;
  /** Air that takes the condenser's heat. */
  readonly condenserAirC: number;
  readonly surroundC: number;
  /** Part of the step in which melt water flows, 0–1, and the flow then. */
  readonly flowing: number;
  readonly flowKgPerS: number;
  /** What the entering probe says; null when it is not heard. */
  readonly enteringC: number | null;
  /** Room air, total over sensible heat of the coil, and pump heat, for a loop without an entering probe. */
  readonly roomC: number;
  readonly wet: number;
  readonly pumpW: number;
}

export interface PlantModels {
  readonly bank: BankModel;
  readonly machine: IceMachineModel;
  readonly delivery: DeliveryModel;
  readonly ratedOutdoorC: number;
  readonly nominalIceMakingW: number;
  readonly internal: boolean;
  /** Ice shut in containers: the water that moves is another than the water that freezes. */
  readonly sealed: boolean;
}

/** Heat flows of the last evaluation, W, means over the step. */
export interface Flows {
  chargingW: number;
  loopW: number;
  leakW: number;
}

export const newFlows = (): Flows => ({ chargingW: 0, loopW: 0, leakW: 0 });

const LEAST_LIQUID = 0.06;

export function iceKgOf(models: PlantModels, x: Float64Array): number {
  if (!models.sealed) return Math.max(0, x[X.ice]) * models.bank.mostIceKg;
  const ice = containerIce(x);
  return (ice.reduce((sum, part) => sum + Math.max(0, part), 0) / ice.length) * models.bank.mostIceKg;
}

/** Mean temperature of the water that moves: of what is not frozen, or of the bath round sealed containers. */
export function waterCOf(models: PlantModels, x: Float64Array): number {
  return models.internal ? x[X.top] : meanOf(x);
}

export function onHandKwhOf(models: PlantModels, x: Float64Array): number {
  if (!models.sealed) return iceOnHandKwh(models.bank, iceKgOf(models, x), waterCOf(models, x));
  const storedJ =
    x[X.ice] * FUSION_J_PER_KG * models.bank.mostIceKg - bathJPerK(models) * waterCOf(models, x);
  const usefulJ = models.bank.heatCapacityJPerK * models.bank.config.usefulLeavingC;
  return Math.max(0, (storedJ + usefulJ) / J_PER_KWH);
}

/** Heat capacity of the bath round sealed containers, J/K. */
export function bathJPerK({ bank }: PlantModels): number {
  return bank.heatCapacityJPerK * Math.max(LEAST_LIQUID, 1 - bank.mostIceKg / bank.waterKg);
}

/** Melt conductance, pump on, with what is learned of it. */
export function meltWPerKOf(models: PlantModels, x: Float64Array): number {
  return meltConductanceWPerK(
    models.bank,
    x[X.ice],
    Math.max(0.05, x[X.meltExponent]),
    x[X.melt] + x[X.meltNow],
    x[X.meltBend],
  );
}

function iceOnCoil(models: PlantModels, x: Float64Array): number {
  if (!models.bank.guess.iceHeld) return Math.max(0, x[X.rim]);
  return models.internal ? iceOnWall(x) : x[X.ice];
}

/** From coolant to the freezing front; where containers stand between, to the bath: half of the way. */
export function freezeWPerKOf(models: PlantModels, x: Float64Array): number {
  const gain = x[X.freeze] + x[X.freezeNow];
  if (models.sealed) return 2 * freezeConductanceWPerK(models.bank, 0, 0, gain);
  return freezeConductanceWPerK(
    models.bank,
    iceOnCoil(models, x),
    Math.exp(x[X.thickening]),
    gain,
    Math.exp(x[X.growth]),
  );
}

/**
 * A bare coil's face is colder than the water round it, so that ice grows on it while the water is still this warm:
 * natural convection of some 350 W/(m² K) lets a part of 0.6 of a coil of 250 W/(m² K) through, ten degrees below
 * zero. Common practice, no source.
 */
export const COIL = { freezesBelowC: 6, barePart: 0.6 };

/** What the freezing coil faces: ice, or as much of warm water as it feels, or the bath round containers. */
export function facedC(models: PlantModels, x: Float64Array): number {
  if (models.sealed) return waterCOf(models, x);
  return x[X.ice] > 0.01 ? 0 : COIL.barePart * Math.max(0, waterCOf(models, x) - COIL.freezesBelowC);
}

/** Heat that the running machine takes from the bank, W. */
export function chargingWOf(models: PlantModels, x: Float64Array, drive: Drive): number {
  const { machine } = models;
  const freezeWPerK = freezeWPerKOf(models, x);
  const faced = facedC(models, x);
  const gain =
    x[X.cop] +
    (x[X.copOutdoor] * (drive.condenserAirC - models.ratedOutdoorC)) / 10 +
    x[X.copIce] * Math.min(1.2, Math.max(0, x[X.ice]));
  if (drive.chillerW === null) {
    return machine.balance(drive.condenserAirC, freezeWPerK, faced).iceMakingW * Math.exp(gain);
  }
  const evaporatingC = machine.evaporatingC(drive.condenserAirC, freezeWPerK, faced);
  return drive.chillerW * machine.cop(evaporatingC, drive.condenserAirC) * Math.exp(gain);
}

/** Water that comes back to the bank, °C, from the entering probe or from the coil in the room. */
export function enteringCOf(models: PlantModels, x: Float64Array, drive: Drive, loopWPerK: number): number {
  if (drive.enteringC !== null) return drive.enteringC - x[X.enteringOffset];
  const coil = Math.min(
    0.95 * loopWPerK,
    models.delivery.coilWPerK(loopWPerK, Math.exp(x[X.coil])) * drive.wet,
  );
  return x[X.out] + (coil * Math.max(0, drive.roomC - x[X.out]) + drive.pumpW) / loopWPerK;
}

export function loopWPerKOf(models: PlantModels, x: Float64Array, drive: Drive): number {
  return drive.flowKgPerS * Math.exp(x[X.flow]) * models.delivery.loopCpJPerKgK;
}

/** Latent heat of a full bank, J. */
export const fullJ = ({ bank }: PlantModels): number => FUSION_J_PER_KG * bank.mostIceKg;

/** Latent heat of a full bank, kWh. */
export function latentKwh(models: PlantModels): number {
  return (models.bank.mostIceKg * FUSION_J_PER_KG) / J_PER_KWH;
}

/** Heat capacity of the water that is not frozen, J/K. */
export function liquidJPerK(models: PlantModels, ice: number): number {
  const frozen = (Math.max(0, ice) * models.bank.mostIceKg) / models.bank.waterKg;
  return models.bank.heatCapacityJPerK * Math.max(LEAST_LIQUID, 1 - frozen);
}

/** Melts heat's worth of ice and keeps the water's enthalpy, of which there is now more at 0 °C. */
export function melt(models: PlantModels, x: Float64Array, heatJ: number): void {
  const before = liquidJPerK(models, x[X.ice]);
  x[X.ice] -= heatJ / (FUSION_J_PER_KG * models.bank.mostIceKg);
  const dilution = before / liquidJPerK(models, x[X.ice]);
  if (models.internal) x[X.top] *= dilution;
  else scale(x, dilution);
}

/** The loop of a step as the layers feel it. */
export function loopOf(
  models: PlantModels,
  x: Float64Array,
  drive: Drive,
): { loopWPerK: number; enteringC: number } {
  if (!(drive.flowing > 0)) return { loopWPerK: 0, enteringC: 0 };
  const full = loopWPerKOf(models, x, drive);
  return { loopWPerK: drive.flowing * full, enteringC: enteringCOf(models, x, drive, full) };
}

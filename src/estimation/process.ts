/**
 * How the bank moves through one step, for one point of the state space. Energy closes exactly: whatever comes in is
 * found again in the water and the ice. Works in place on a state vector; called some fifty times for each step.
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
import { X } from './layout.ts';

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
}

/** Heat flows of the last evaluation, W, means over the step. */
export interface Flows {
  chargingW: number;
  loopW: number;
  leakW: number;
}

export const newFlows = (): Flows => ({ chargingW: 0, loopW: 0, leakW: 0 });

const LEAST_LIQUID = 0.06;
/** Time in which the coolant within an internal-melt coil is renewed, s; no source. */
const COIL_CONTENT_S = 90;
/** The last ice round an internal-melt coil still meets it through water; share of the conductance at half inventory. */
const LEAST_SHARE = 0.45;
/** Mixing between the two halves of the water at rest, as a share of heat capacity a second; no source. */
const REST_MIXING_PER_S = 1 / 5400;

export function iceKgOf(models: PlantModels, x: Float64Array): number {
  return Math.max(0, x[X.ice]) * models.bank.mostIceKg;
}

/** Mean temperature of the water that is not frozen. */
export function waterCOf(models: PlantModels, x: Float64Array): number {
  return models.internal ? x[X.bulk] : 0.5 * (x[X.out] + x[X.bulk]);
}

export function onHandKwhOf(models: PlantModels, x: Float64Array): number {
  return iceOnHandKwh(models.bank, iceKgOf(models, x), waterCOf(models, x));
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

export function freezeWPerKOf(models: PlantModels, x: Float64Array): number {
  const gain = x[X.freeze] + x[X.freezeNow];
  return freezeConductanceWPerK(models.bank, x[X.ice], Math.exp(x[X.thickening]), gain);
}

/** What the freezing coil faces: ice, or the water that has to be cooled first. */
function facedC(models: PlantModels, x: Float64Array): number {
  return x[X.ice] > 0.01 ? 0 : Math.max(0, waterCOf(models, x));
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

/** One step in place; `flows` is filled with what went where. */
export function advance(models: PlantModels, x: Float64Array, drive: Drive, flows: Flows): void {
  if (x[X.ice] < 0) meltDebt(models, x);
  const leakW = models.bank.leakWPerK * Math.exp(x[X.leak]) * (drive.surroundC - waterCOf(models, x));
  const chargingW = drive.charging > 0 ? drive.charging * chargingWOf(models, x, drive) : 0;
  flows.leakW = leakW;
  flows.chargingW = chargingW;
  flows.loopW = models.internal
    ? advanceInternal(models, x, drive, leakW)
    : advanceExternal(models, x, drive, leakW);
  charge(models, x, chargingW * drive.dtS);
  settle(models, x);
}

/** Heat capacity of the water that is not frozen, J/K. */
function liquidJPerK(models: PlantModels, ice: number): number {
  const frozen = (Math.max(0, ice) * models.bank.mostIceKg) / models.bank.waterKg;
  return models.bank.heatCapacityJPerK * Math.max(LEAST_LIQUID, 1 - frozen);
}

/** Melts heat's worth of ice and keeps the water's enthalpy, of which there is now more at 0 °C. */
function melt(models: PlantModels, x: Float64Array, heatJ: number): void {
  const before = liquidJPerK(models, x[X.ice]);
  x[X.ice] -= heatJ / (FUSION_J_PER_KG * models.bank.mostIceKg);
  const dilution = before / liquidJPerK(models, x[X.ice]);
  x[X.bulk] *= dilution;
  if (!models.internal) x[X.out] *= dilution;
}

/** Water round ice, in two halves that the melt water passes one after the other. Gives the heat brought in, W. */
function advanceExternal(models: PlantModels, x: Float64Array, drive: Drive, leakW: number): number {
  const half = liquidJPerK(models, x[X.ice]) / 2;
  const loop = drive.flowing > 0 ? drive.flowing * loopWPerKOf(models, x, drive) : 0;
  const enteringC = loop > 0 ? enteringCOf(models, x, drive, loop / drive.flowing) : 0;
  const stirred = models.bank.guess.restFactor + (1 - models.bank.guess.restFactor) * drive.flowing;
  const toIce = 0.5 * stirred * meltWPerKOf(models, x);
  const mixing = half * REST_MIXING_PER_S;
  const dt = drive.dtS;
  const { bulk, out } = X;

  const bulkPull = loop + toIce + mixing;
  const bulkLeads = (loop * enteringC + leakW / 2 + mixing * x[out]) / bulkPull;
  const bulkKept = Math.exp((-bulkPull * dt) / half);
  const bulkMean = bulkLeads + ((x[bulk] - bulkLeads) * (1 - bulkKept) * half) / (bulkPull * dt);
  const outPull = loop + toIce + mixing;
  const outLeads = (loop * bulkMean + leakW / 2 + mixing * bulkMean) / outPull;
  const outKept = Math.exp((-outPull * dt) / half);
  const outMean = outLeads + ((x[out] - outLeads) * (1 - outKept) * half) / (outPull * dt);

  const before = x[bulk] + x[out];
  x[bulk] = bulkLeads + (x[bulk] - bulkLeads) * bulkKept;
  x[out] = outLeads + (x[out] - outLeads) * outKept;
  const loopW = loop * (enteringC - outMean);
  // Whatever came in and is not in the water has melted ice; without ice it stays in the water.
  const meltJ = (loopW + leakW) * dt - half * (x[bulk] + x[out] - before);
  if (toIce > 0) melt(models, x, meltJ);
  else {
    x[bulk] += meltJ / (2 * half);
    x[out] += meltJ / (2 * half);
  }
  return loopW;
}

/** Coolant in a coil within ice or water. Colder coolant than the bank freezes. Gives the heat brought in, W. */
function advanceInternal(models: PlantModels, x: Float64Array, drive: Drive, leakW: number): number {
  const capacity = liquidJPerK(models, x[X.ice]);
  const dt = drive.dtS;
  const iced = x[X.ice] > 0;
  const loopW = drive.flowing > 0 ? throughCoil(models, x, drive, dt) : 0;
  const toIce = iced ? models.bank.guess.restFactor * meltWPerKOf(models, x) : 0;
  const leads = toIce > 0 ? leakW / toIce : 0;
  const kept = toIce > 0 ? Math.exp((-toIce * dt) / capacity) : 1;
  const before = x[X.bulk];
  if (iced) x[X.bulk] = leads + (x[X.bulk] - leads) * kept;
  const storedJ = capacity * (x[X.bulk] - before);
  const heatJ = (loopW + leakW) * dt - storedJ;
  if (iced) melt(models, x, heatJ);
  else x[X.bulk] += heatJ / capacity;
  return loopW;
}

function throughCoil(models: PlantModels, x: Float64Array, drive: Drive, dt: number): number {
  const loop = loopWPerKOf(models, x, drive);
  const enteringC = enteringCOf(models, x, drive, loop);
  const facedBankC = x[X.ice] > 0 ? 0 : x[X.bulk];
  const conductance = coilConductanceWPerK(models, x, enteringC < facedBankC);
  const leads = facedBankC + (enteringC - facedBankC) * Math.exp(-conductance / loop);
  const kept = Math.exp(-dt / COIL_CONTENT_S);
  const mean = leads + ((x[X.out] - leads) * (1 - kept) * COIL_CONTENT_S) / dt;
  x[X.out] = leads + (x[X.out] - leads) * kept;
  return drive.flowing * loop * (enteringC - mean);
}

/** Without ice the coil faces water alone, as at the start of freezing. */
function coilConductanceWPerK(models: PlantModels, x: Float64Array, freezing: boolean): number {
  if (freezing || !(x[X.ice] > 0)) return freezeWPerKOf(models, x);
  const least = LEAST_SHARE * models.bank.config.meltWPerK * Math.exp(x[X.melt] + x[X.meltNow]);
  return Math.max(least, meltWPerKOf(models, x));
}

/** Takes the machine's heat out: from the ice when there is some, from warm water first when there is little. */
function charge(models: PlantModels, x: Float64Array, heatJ: number): void {
  if (!(heatJ > 0)) return;
  const warm = Math.min(1, Math.max(0, waterCOf(models, x) / 4));
  const scarce = 1 - Math.min(1, Math.max(0, x[X.ice] / 0.05));
  const fromWaterJ = heatJ * (x[X.ice] > 0 ? warm * scarce : 1);
  const cooler = fromWaterJ / liquidJPerK(models, x[X.ice]);
  x[X.bulk] -= cooler;
  if (!models.internal) x[X.out] -= cooler;
  melt(models, x, fromWaterJ - heatJ);
}

/** Ice below none is heat in the water. */
function meltDebt(models: PlantModels, x: Float64Array): void {
  const debtJ = -x[X.ice] * models.bank.mostIceKg * FUSION_J_PER_KG;
  x[X.ice] = 0;
  const warmer = debtJ / liquidJPerK(models, 0);
  x[X.bulk] += warmer;
  if (!models.internal) x[X.out] += warmer;
}

/** Water below 0 °C is ice (supercooled water has the same enthalpy), and ice below none is warm water. */
function settle(models: PlantModels, x: Float64Array): void {
  if (x[X.ice] < 0) meltDebt(models, x);
  const waterC = waterCOf(models, x);
  if (waterC < 0) {
    const coldJ = -waterC * liquidJPerK(models, x[X.ice]);
    x[X.ice] += coldJ / (FUSION_J_PER_KG * models.bank.mostIceKg);
    x[X.bulk] -= waterC;
    if (!models.internal) x[X.out] -= waterC;
  }
}

/** Latent heat of a full bank, kWh. */
export function latentKwh(models: PlantModels): number {
  return (models.bank.mostIceKg * FUSION_J_PER_KG) / J_PER_KWH;
}

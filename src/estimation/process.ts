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
import { iceOnWall, meltedThrough, passWall } from './hollow.ts';
import { X } from './layout.ts';
import { meanOf, overturn, passLayers, scale, shift, type Passed } from './water.ts';

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
/** Time in which the coolant within an internal-melt coil is renewed, s; no source. */
const COIL_CONTENT_S = 90;
/** Least melt conductance of an internal-melt coil with ice round it, of that at half inventory; measured tank: a half. */
const LEAST_SHARE = 0.45;
/** A coil that warms or cools water alone does so by natural convection: part of the start of freezing. No source. */
const BARE_PART = 0.6;

/**
 * In sealed containers the state's ice may go below none: it then stands for the warmth of the molten water in them,
 * on the same scale of heat.
 */
const SEALED_LEAST = -0.4;

export function iceKgOf(models: PlantModels, x: Float64Array): number {
  return Math.max(0, x[X.ice]) * models.bank.mostIceKg;
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
function bathJPerK({ bank }: PlantModels): number {
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

/** From coolant to the freezing front; where containers stand between, to the bath: half of the way. */
export function freezeWPerKOf(models: PlantModels, x: Float64Array): number {
  const gain = x[X.freeze] + x[X.freezeNow];
  if (models.sealed) return 2 * freezeConductanceWPerK(models.bank, 0, 0, gain);
  return freezeConductanceWPerK(
    models.bank,
    models.internal ? iceOnWall(x) : x[X.ice],
    Math.exp(x[X.thickening]),
    gain,
    Math.exp(x[X.growth]),
  );
}

/** What the freezing coil faces: ice, or the water that has to be cooled first, or the bath round containers. */
export function facedC(models: PlantModels, x: Float64Array): number {
  if (models.sealed) return waterCOf(models, x);
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
  if (x[X.ice] < 0 && !models.sealed) meltDebt(models, x);
  const leakW = models.bank.leakWPerK * Math.exp(x[X.leak]) * (drive.surroundC - waterCOf(models, x));
  const chargingW = drive.charging > 0 ? drive.charging * chargingWOf(models, x, drive) : 0;
  flows.leakW = leakW;
  flows.chargingW = chargingW;
  if (models.sealed) {
    flows.loopW = advanceSealed(models, x, drive, leakW - chargingW);
    return;
  }
  flows.loopW = models.internal
    ? advanceInternal(models, x, drive, leakW)
    : advanceExternal(models, x, drive, leakW);
  charge(models, x, chargingW * drive.dtS);
  if (models.internal) passWall(x, (-chargingW * drive.dtS) / fullJ(models));
  settle(models, x);
}

/** Latent heat of a full bank, J. */
const fullJ = ({ bank }: PlantModels): number => FUSION_J_PER_KG * bank.mostIceKg;

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
  if (models.internal) x[X.top] *= dilution;
  else scale(x, dilution);
}

/** Melting is better with the pump on. */
function stirredShare(models: PlantModels, drive: Drive): number {
  const { restFactor } = models.bank.guess;
  return restFactor + (1 - restFactor) * drive.flowing;
}

/** The loop of a step as the layers feel it. */
function loopOf(
  models: PlantModels,
  x: Float64Array,
  drive: Drive,
): { loopWPerK: number; enteringC: number } {
  if (!(drive.flowing > 0)) return { loopWPerK: 0, enteringC: 0 };
  const full = loopWPerKOf(models, x, drive);
  return { loopWPerK: drive.flowing * full, enteringC: enteringCOf(models, x, drive, full) };
}

/** Water round ice. Gives the heat brought in by the loop, W. */
function advanceExternal(models: PlantModels, x: Float64Array, drive: Drive, leakW: number): number {
  const layerJPerK = liquidJPerK(models, x[X.ice]) / 4;
  const toIce = stirredShare(models, drive) * meltWPerKOf(models, x);
  const passed: Passed = { loopW: 0, toIceJ: 0 };
  passLayers(
    x,
    {
      layerJPerK,
      ...loopOf(models, x, drive),
      toIceWPerK: spread(models, x, toIce),
      iceC: 0,
      otherW: leakW / 4,
      dtS: drive.dtS,
    },
    passed,
  );
  if (toIce > 0) melt(models, x, passed.toIceJ);
  else shift(x, passed.toIceJ / (4 * layerJPerK));
  overturn(x, false);
  return passed.loopW;
}

/** Floating ice fills this part of a layer's water before it reaches into the next (loose packing; no source). */
const PACKING = 0.6;

/** Conductance by layer: alike where ice is held at all heights, from the top down where it floats. */
function spread(models: PlantModels, x: Float64Array, total: number): readonly number[] {
  const each = total / 4;
  if (models.bank.guess.iceHeld) return [each, each, each, each];
  const filled = (Math.max(0, x[X.ice]) * models.bank.mostIceKg) / (PACKING * 0.25 * models.bank.waterKg);
  const parts = [0, 1, 2, 3].map((k) => Math.min(1, Math.max(0.02, filled - k)));
  const sum = parts[0] + parts[1] + parts[2] + parts[3];
  return parts.map((part) => (total * part) / sum);
}

/** A bath round containers that freeze and melt from their walls. Gives the heat brought in by the loop, W. */
function advanceSealed(models: PlantModels, x: Float64Array, drive: Drive, otherW: number): number {
  const full = fullJ(models);
  const shutJPerK = models.bank.heatCapacityJPerK - bathJPerK(models);
  const iceC = x[X.ice] < 0 ? (-x[X.ice] * full) / shutJPerK : 0;
  const each = 0.25 * containerWPerK(models, x, drive, meanOf(x) < iceC);
  const passed: Passed = { loopW: 0, toIceJ: 0 };
  passLayers(
    x,
    {
      layerJPerK: bathJPerK(models) / 4,
      ...loopOf(models, x, drive),
      toIceWPerK: [each, each, each, each],
      iceC,
      otherW: otherW / 4,
      dtS: drive.dtS,
    },
    passed,
  );
  x[X.ice] = Math.max(SEALED_LEAST, x[X.ice] - passed.toIceJ / full);
  passWall(x, passed.toIceJ / full);
  overturn(x, true);
  return passed.loopW;
}

/**
 * Bath to the front inside the containers, W/K: the wall's two sides in series. Outside, half of the nameplate's
 * resistance; inside, a cylinder that freezes or melts from its wall, ln(1/remaining) with half of the nameplate's
 * resistance at half inventory. Ice carries worse than stirred water: `thickening`.
 */
function containerWPerK(models: PlantModels, x: Float64Array, drive: Drive, freezing: boolean): number {
  const { meltWPerK, freezeWPerK } = models.bank.config;
  const melt = 2 * meltWPerK * Math.exp(x[X.melt] + x[X.meltNow]);
  const still = 2 * freezeWPerK * Math.exp(x[X.freeze] + x[X.freezeNow]);
  const outside = 1 / (drive.flowing * melt + (1 - drive.flowing) * Math.min(still, melt));
  if (freezing) {
    const ice = Math.min(0.985, iceOnWall(x));
    return 1 / (outside + (Math.exp(x[X.thickening]) * -Math.log1p(-ice)) / (Math.LN2 * melt));
  }
  const water = Math.min(0.985, x[X.ice] > 0 ? meltedThrough(x) : 1);
  const shape =
    (x[X.meltExponent] - models.bank.guess.meltExponent) * Math.log(2 * Math.max(0.015, 1 - water));
  const inside = -Math.log1p(-water) / (Math.LN2 * melt);
  return Math.exp(shape + x[X.meltBend] * (1 - 2 * water)) / (outside + inside);
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
  const before = x[X.top];
  if (iced) x[X.top] = leads + (x[X.top] - leads) * kept;
  const storedJ = capacity * (x[X.top] - before);
  const heatJ = (loopW + leakW) * dt - storedJ;
  if (iced) melt(models, x, heatJ);
  else x[X.top] += heatJ / capacity;
  passWall(x, (loopW * dt) / fullJ(models));
  return loopW;
}

function throughCoil(models: PlantModels, x: Float64Array, drive: Drive, dt: number): number {
  const loop = loopWPerKOf(models, x, drive);
  const enteringC = enteringCOf(models, x, drive, loop);
  const facedBankC = x[X.ice] > 0 ? 0 : x[X.top];
  const conductance = coilConductanceWPerK(models, x, enteringC < facedBankC);
  const leads = facedBankC + (enteringC - facedBankC) * Math.exp(-conductance / loop);
  const kept = Math.exp(-dt / COIL_CONTENT_S);
  const mean = leads + ((x[X.out] - leads) * (1 - kept) * COIL_CONTENT_S) / dt;
  x[X.out] = leads + (x[X.out] - leads) * kept;
  return drive.flowing * loop * (enteringC - mean);
}

function coilConductanceWPerK(models: PlantModels, x: Float64Array, freezing: boolean): number {
  const bare = BARE_PART * freezeWPerKOf(models, x);
  if (!(x[X.ice] > 0)) return bare;
  return freezing ? freezeWPerKOf(models, x) : Math.max(0.5 * bare, meltFromWithinWPerK(models, x));
}

/**
 * From brine to ice that recedes from its tube, W/K. The nameplate, meant at half a full bank melted, is shared evenly
 * between the tube and the water round it (no source), whose resistance grows as the logarithm of its radius. Ice is
 * gone where the brine comes in before it is elsewhere: the less of it, the less of the coil it covers.
 */
function meltFromWithinWPerK(models: PlantModels, x: Float64Array): number {
  const growth = Math.exp(x[X.growth]);
  const water = Math.log1p(growth * meltedThrough(x)) / Math.log1p(0.5 * growth);
  const covered = x[X.meltExponent] * Math.log((x[X.ice] + 0.01) / 0.51);
  const shape = covered + x[X.meltBend] * (1 - 2 * meltedThrough(x));
  const nominal = models.bank.config.meltWPerK * Math.exp(x[X.melt] + x[X.meltNow]);
  const least = LEAST_SHARE * Math.min(1, x[X.ice] / 0.03);
  return nominal * Math.max(least, (2 * Math.exp(shape)) / (1 + water));
}

/** Takes the machine's heat out: from the ice when there is some, from warm water first when there is little. */
function charge(models: PlantModels, x: Float64Array, heatJ: number): void {
  if (!(heatJ > 0)) return;
  const warm = Math.min(1, Math.max(0, waterCOf(models, x) / 4));
  const scarce = 1 - Math.min(1, Math.max(0, x[X.ice] / 0.05));
  const fromWaterJ = heatJ * (x[X.ice] > 0 ? warm * scarce : 1);
  const cooler = fromWaterJ / liquidJPerK(models, x[X.ice]);
  if (models.internal) x[X.top] -= cooler;
  else shift(x, -cooler);
  melt(models, x, fromWaterJ - heatJ);
}

/** Ice below none is heat in the water. */
function meltDebt(models: PlantModels, x: Float64Array): void {
  const debtJ = -x[X.ice] * models.bank.mostIceKg * FUSION_J_PER_KG;
  x[X.ice] = 0;
  const warmer = debtJ / liquidJPerK(models, 0);
  if (models.internal) x[X.top] += warmer;
  else shift(x, warmer);
}

/** Water below 0 °C is ice (supercooled water has the same enthalpy), and ice below none is warm water. */
function settle(models: PlantModels, x: Float64Array): void {
  if (x[X.ice] < 0) meltDebt(models, x);
  const waterC = waterCOf(models, x);
  if (waterC < 0) {
    const coldJ = -waterC * liquidJPerK(models, x[X.ice]);
    x[X.ice] += coldJ / (FUSION_J_PER_KG * models.bank.mostIceKg);
    if (models.internal) x[X.top] -= waterC;
    else shift(x, -waterC);
  }
}

/** Latent heat of a full bank, kWh. */
export function latentKwh(models: PlantModels): number {
  return (models.bank.mostIceKg * FUSION_J_PER_KG) / J_PER_KWH;
}

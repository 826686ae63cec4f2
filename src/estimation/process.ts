/**
 * How the bank moves through one step, for one point of the state space. Energy closes exactly: whatever comes in is
 * found again in the water and the ice. Works in place on a state vector; called some fifty times for each step.
 */
import { FUSION_J_PER_KG } from '../plant/bank.ts';
import { passLoose, passWall } from './hollow.ts';
import { advanceInternal } from './internal.ts';
import { X } from './layout.ts';
import {
  COIL,
  chargingWOf,
  fullJ,
  liquidJPerK,
  loopOf,
  melt,
  meltWPerKOf,
  waterCOf,
  type Drive,
  type Flows,
  type PlantModels,
} from './models.ts';
import { advanceSealed } from './sealed.ts';
import { overturn, passLayers, shift } from './water.ts';

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
  const made = (chargingW * drive.dtS) / fullJ(models);
  if (models.internal) passWall(x, -made);
  else if (!models.bank.guess.iceHeld) passLoose(x, made, drive.dtS);
  settle(models, x);
}

/** Melting is better with the pump on. */
function stirredShare(models: PlantModels, drive: Drive): number {
  const { restFactor } = models.bank.guess;
  return restFactor + (1 - restFactor) * drive.flowing;
}

/** Water round ice. Gives the heat brought in by the loop, W. */
function advanceExternal(models: PlantModels, x: Float64Array, drive: Drive, leakW: number): number {
  const layerJPerK = liquidJPerK(models, x[X.ice]) / 4;
  const toIce = stirredShare(models, drive) * meltWPerKOf(models, x);
  const passed = { loopW: 0, toIceJ: [0, 0, 0, 0] };
  passLayers(
    x,
    {
      layerJPerK,
      ...loopOf(models, x, drive),
      toIceWPerK: spread(models, x, toIce),
      iceC: [0, 0, 0, 0],
      otherW: leakW / 4,
      dtS: drive.dtS,
    },
    passed,
  );
  const toIceJ = passed.toIceJ[0] + passed.toIceJ[1] + passed.toIceJ[2] + passed.toIceJ[3];
  if (toIce > 0) melt(models, x, toIceJ);
  else shift(x, toIceJ / (4 * layerJPerK));
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

/** Takes the machine's heat out: from warm water as long as there is little ice, else from what freezes. */
function charge(models: PlantModels, x: Float64Array, heatJ: number): void {
  if (!(heatJ > 0)) return;
  const warm = Math.min(1, Math.max(0, (waterCOf(models, x) - COIL.freezesBelowC + 1) / 2));
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

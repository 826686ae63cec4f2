/** A bank whose brine melts the ice from within the tube that froze it. */
import {
  COIL,
  freezeWPerKOf,
  meltWPerKOf,
  enteringCOf,
  fullJ,
  liquidJPerK,
  loopWPerKOf,
  melt,
  type Drive,
  type PlantModels,
} from './models.ts';
import { meltedThrough, passWall } from './hollow.ts';
import { X } from './layout.ts';

/** Time in which the coolant within an internal-melt coil is renewed, s; no source. */
const COIL_CONTENT_S = 90;
/** Least melt conductance of an internal-melt coil with ice round it, of that at half inventory; measured tank: a half. */
const LEAST_SHARE = 0.45;

/** Coolant in a coil within ice or water. Colder coolant than the bank freezes. Gives the heat brought in, W. */
export function advanceInternal(models: PlantModels, x: Float64Array, drive: Drive, leakW: number): number {
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
  const bare = COIL.barePart * freezeWPerKOf(models, x);
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

/**
 * Containers in a bath: they freeze and melt from their walls, those that the loop meets first before the others. The
 * state keeps their heat by layer of the bath, on the scale of ice: below none it stands for the warmth of the molten
 * water in them.
 */
import { passWall, throughRim } from './hollow.ts';
import { containerIce, LAYERS, setContainerIce, X } from './layout.ts';
import { bathJPerK, fullJ, loopOf, type Drive, type PlantModels } from './models.ts';
import { overturn, passLayers } from './water.ts';

/** The warmest that containers are followed to. */
export const SEALED_LEAST = -0.4;

/** One step; gives the heat brought in by the loop, W. `otherW` comes evenly into the bath: leak less machine. */
export function advanceSealed(models: PlantModels, x: Float64Array, drive: Drive, otherW: number): number {
  const full = fullJ(models);
  const shutJPerK = models.bank.heatCapacityJPerK - bathJPerK(models);
  const ice = containerIce(x);
  const iceC = ice.map((part) => (part < 0 ? (-part * full) / shutJPerK : 0));
  const passed = { loopW: 0, toIceJ: [0, 0, 0, 0] };
  passLayers(
    x,
    {
      layerJPerK: bathJPerK(models) / 4,
      ...loopOf(models, x, drive),
      toIceWPerK: ice.map((part, k) => 0.25 * containerWPerK(models, x, drive, part, x[LAYERS[k]] < iceC[k])),
      iceC,
      otherW: otherW / 4,
      dtS: drive.dtS,
    },
    passed,
  );
  let melted = 0;
  for (let k = 0; k < LAYERS.length; k++) {
    const part = (LAYERS.length * passed.toIceJ[k]) / full;
    ice[k] = Math.max(SEALED_LEAST, ice[k] - part);
    melted += part / LAYERS.length;
  }
  setContainerIce(x, ice);
  passWall(x, melted);
  overturn(x, true);
  return passed.loopW;
}

/** Mean hollow from which on it is taken for one, as a fraction of a full bank. */
const LEAST_HOLLOW = 0.02;

/** Water between wall and ice of the containers in one layer, from the mean of all and the ice that they have left. */
function hollowAt(x: Float64Array, ice: number): number {
  const mean = Math.max(0, x[X.hollow]);
  const neverFrozen = Math.min(1, Math.max(0, 1 - Math.max(0, x[X.ice]) - mean));
  return Math.min(1, mean / LEAST_HOLLOW) * Math.max(0, 1 - neverFrozen - Math.max(0, ice));
}

/**
 * Bath to the front inside the containers, W/K for a whole bank of them: the wall's two sides in series. Outside, half
 * of the nameplate's resistance; inside, a cylinder that freezes or melts from its wall, ln(1/remaining) with half of
 * the nameplate's resistance at half inventory. Ice carries worse than stirred water: `thickening`.
 */
function containerWPerK(
  models: PlantModels,
  x: Float64Array,
  drive: Drive,
  ice: number,
  freezing: boolean,
): number {
  const { meltWPerK, freezeWPerK } = models.bank.config;
  const melt = 2 * meltWPerK * Math.exp(x[X.melt] + x[X.meltNow]);
  const still = 2 * freezeWPerK * Math.exp(x[X.freeze] + x[X.freezeNow]);
  const outside = 1 / (drive.flowing * melt + (1 - drive.flowing) * Math.min(still, melt));
  const hollow = hollowAt(x, ice);
  if (freezing) {
    const rim = Math.max(0, x[X.rim]);
    const thick = Math.min(0.985, Math.max(0, rim < hollow ? rim : ice));
    return 1 / (outside + (Math.exp(x[X.thickening]) * -Math.log1p(-thick)) / (Math.LN2 * melt));
  }
  const water = Math.min(0.985, ice > 0 ? throughRim(x, hollow) : 1);
  const shape =
    (x[X.meltExponent] - models.bank.guess.meltExponent) * Math.log(2 * Math.max(0.015, 1 - water));
  const inside = -Math.log1p(-water) / (Math.LN2 * melt);
  return Math.exp(shape + x[X.meltBend] * (1 - 2 * water)) / (outside + inside);
}

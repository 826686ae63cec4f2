/**
 * The ice bank as estimator and planner see it: a mass of water of which part is ice, conductances that depend on the
 * ice held, a leak. Deliberately lumped: layers, lopsided ice and the density maximum are left out, and what they do
 * is learned as drift of the conductances.
 */
import type { BankConfig, BankForm, SiteConfig } from '../config.ts';
import { FUSION_J_PER_KG, ICE_DENSITY, WATER_CP_J_PER_KG_K } from '../physics/water.ts';
import { deliveryModel } from './delivery.ts';

export { FUSION_J_PER_KG };
export const J_PER_KWH = 3.6e6;

/** Water at 0 °C, kg/m³: IAPWS-95, 999.843. */
const WATER_DENSITY = 999.843;

/**
 * Where the melt exponent and the ice's resistance start before they are learned.
 * `meltExponent` p: melt conductance goes as inventory^p. A least-squares line through the logarithms of the published
 * conductance polynomials of Henze & Krarti 2002 (DOE DE-FC-26-01NT41255) from 25 to 75 % inventory gives 0.5 for
 * external and 0.7 for internal melt. Loose pieces: 2/3 when a number of them shrinks, 1 when there are fewer of one
 * size (geometry); between for the tub. Containers: no source.
 * `freezeThickening` b: resistance of a full bank's ice over that of the bare coil; ice on a tube adds it as
 * ln(1 + c·inventory) (quasi-steady conduction through a cylinder). A tube of 8 mm radius grown to 45 mm has c = 30;
 * its b is 0.3 on the measured tank of design figures and near 2 for a sparse coil: 1, to be learned.
 * `restFactor`: melt conductance with the pump off against on (natural against forced convection; no source).
 */
interface FormGuess {
  readonly meltExponent: number;
  readonly freezeThickening: number;
  readonly restFactor: number;
  /** Ice held in place lifts the level; floating ice displaces what it weighs. */
  readonly iceHeld: boolean;
}

const FORM_GUESSES: Readonly<Record<BankForm, FormGuess>> = {
  'ice-on-coil-external': { meltExponent: 0.5, freezeThickening: 1, restFactor: 0.35, iceHeld: true },
  'ice-on-coil-internal': { meltExponent: 0.7, freezeThickening: 1, restFactor: 0.5, iceHeld: true },
  'sealed-containers': { meltExponent: 0.5, freezeThickening: 2, restFactor: 0.5, iceHeld: true },
  'open-tub': { meltExponent: 0.85, freezeThickening: 1, restFactor: 0.35, iceHeld: false },
};

/** Heat exchange of an open water surface with room air, convection and moisture together, W/(m² K); no source. */
const OPEN_SURFACE_W_PER_M2_K = 8;

/** Section of a full bank's ice over that of the bare tube. */
export const GROWTH = 30;

/** Below this inventory (fraction) the last ice is scattered: keeps the conductance finite in logarithms. */
const LEAST_FRACTION = 0.01;

export interface BankModel {
  readonly config: BankConfig;
  readonly guess: FormGuess;
  readonly waterKg: number;
  readonly mostIceKg: number;
  /** Heat capacity of all the water, J/K. */
  readonly heatCapacityJPerK: number;
  /** Leak with the open surface of a tub counted, W/K. */
  readonly leakWPerK: number;
}

export function bankModel(config: SiteConfig): BankModel {
  const { bank } = config;
  const surface = bank.form === 'open-tub' ? OPEN_SURFACE_W_PER_M2_K * bank.waterAreaM2 : 0;
  return {
    config: bank,
    guess: FORM_GUESSES[bank.form],
    waterKg: bank.waterL,
    mostIceKg: bank.mostIceKg,
    heatCapacityJPerK: bank.waterL * WATER_CP_J_PER_KG_K,
    leakWPerK: bank.heatLeakWPerK + surface,
  };
}

/**
 * Ice on hand, kWh: latent heat of the ice plus what all the water takes up to the useful leaving temperature.
 * `waterC` is the mean of the water that is not frozen.
 */
export function iceOnHandKwh(bank: BankModel, iceKg: number, waterC: number): number {
  const liquid = Math.max(0, 1 - iceKg / bank.waterKg);
  const sensibleJ = bank.heatCapacityJPerK * (bank.config.usefulLeavingC - liquid * waterC);
  return Math.max(0, (iceKg * FUSION_J_PER_KG + sensibleJ) / J_PER_KWH);
}

/** The split of ice on hand at rest: ice only below 0 °C, warm water only without ice. */
export function restingState(bank: BankModel, onHandKwh: number): { iceKg: number; waterC: number } {
  const atIcePointJ = onHandKwh * J_PER_KWH - bank.heatCapacityJPerK * bank.config.usefulLeavingC;
  if (atIcePointJ >= 0) return { iceKg: atIcePointJ / FUSION_J_PER_KG, waterC: 0 };
  return { iceKg: 0, waterC: -atIcePointJ / bank.heatCapacityJPerK };
}

/**
 * Melt conductance, W/K, pump on: nominal at half inventory, inventory^exponent. `logGain` and `bend` are what the
 * estimator learns: a factor, and a slope across the inventory beyond the power law.
 */
export function meltConductanceWPerK(
  bank: BankModel,
  inventory: number,
  exponent = bank.guess.meltExponent,
  logGain = 0,
  bend = 0,
): number {
  if (!(inventory > 0)) return 0;
  const relative = Math.log((inventory + LEAST_FRACTION) / (0.5 + LEAST_FRACTION));
  const thinning = inventory < LEAST_FRACTION ? inventory / LEAST_FRACTION : 1;
  return (
    bank.config.meltWPerK *
    thinning *
    Math.exp(logGain + exponent * relative + bend * (2 * Math.min(inventory, 1.2) - 1))
  );
}

/** Freezing conductance from coolant to the freezing front, W/K: the bare coil's, in series with the ice on it. */
export function freezeConductanceWPerK(
  bank: BankModel,
  inventory: number,
  thickening = bank.guess.freezeThickening,
  logGain = 0,
  growth = GROWTH,
): number {
  const grown = Math.log1p(growth * Math.max(0, inventory)) / Math.log1p(growth);
  return (bank.config.freezeWPerK * Math.exp(logGain)) / (1 + thickening * grown);
}

/**
 * Rise of the water level by ice held below the surface, mm: 90.7 mm per metre of water frozen (IAPWS densities,
 * 999.843/916.721). Floating ice displaces its own weight (Archimedes): no rise.
 */
export function levelRiseMm(bank: BankModel, iceKg: number): number {
  if (!bank.guess.iceHeld) return 0;
  const frozenM3 = iceKg / WATER_DENSITY;
  return (1000 * frozenM3 * (WATER_DENSITY / ICE_DENSITY - 1)) / bank.config.waterAreaM2;
}

export interface BankLimits {
  /** Ice on hand of a full bank. */
  readonly capacityKwh: number;
  iceOnHandKwh(iceKg: number, waterC: number): number;
  iceKg(iceOnHandKwh: number): number;
  waterC(iceOnHandKwh: number): number;
  /** 0 to 100 and above when overfilled. */
  inventoryPct(iceOnHandKwh: number): number;
  /** Heat that ice and coil together can take from a room, the lower limit ruling, pump on. */
  meltLimitW(iceOnHandKwh: number, roomC: number): number;
  /** Heat that leaks in. */
  leakW(iceOnHandKwh: number, surroundC: number): number;
}

/** What the planner needs to know of the bank, with nominal figures or with learned gains. */
export function bankLimits(
  config: SiteConfig,
  learned: { readonly meltGain?: number; readonly heatLeakWPerK?: number } = {},
): BankLimits {
  const bank = bankModel(config);
  const delivery = deliveryModel(config);
  const leakWPerK = learned.heatLeakWPerK ?? bank.leakWPerK;
  const logGain = Math.log(learned.meltGain ?? 1);
  const inventory = (kwh: number): number => restingState(bank, kwh).iceKg / bank.mostIceKg;
  return {
    capacityKwh: iceOnHandKwh(bank, bank.mostIceKg, 0),
    iceOnHandKwh: (iceKg, waterC) => iceOnHandKwh(bank, iceKg, waterC),
    iceKg: (kwh) => restingState(bank, kwh).iceKg,
    waterC: (kwh) => restingState(bank, kwh).waterC,
    inventoryPct: (kwh) => 100 * inventory(kwh),
    meltLimitW: (kwh, roomC) => {
      const ice = meltConductanceWPerK(bank, inventory(kwh), bank.guess.meltExponent, logGain);
      // Beside melting, the water itself may warm: over the coming hour it gives as much as this conductance.
      const water = bank.heatCapacityJPerK / 3600;
      return delivery.deliverableW(ice + water, restingState(bank, kwh).waterC, roomC);
    },
    leakW: (kwh, surroundC) => leakWPerK * (surroundC - restingState(bank, kwh).waterC),
  };
}

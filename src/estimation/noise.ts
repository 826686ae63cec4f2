/**
 * How far model and instruments are trusted. Readings a few seconds apart err alike, because layers and lags outlast
 * them: an error of `alike` kelvin that lasts `lastsS` counts once in that time, not once in every step.
 */
import { LAYERS, LIE, STATES, X } from './layout.ts';
import type { Belief } from './filter.ts';
import {
  fullJ,
  latentKwh,
  liquidJPerK,
  waterCOf,
  type Drive,
  type Flows,
  type PlantModels,
} from './models.ts';

export interface Alike {
  /** Standard deviation of what is new in every step. */
  readonly fresh: number;
  readonly alike: number;
  readonly lastsS: number;
}

export const NOISE = {
  waterFlowing: { fresh: 0.05, alike: 0.15, lastsS: 1500 },
  /** A probe at some height in moving water: where the front stands is known less well than what leaves. */
  heightFlowing: { fresh: 0.06, alike: 0.4, lastsS: 3600 },
  /** Coolant from an internal-melt coil, which has next to no mass of its own. */
  coilFlowing: { fresh: 0.05, alike: 0.12, lastsS: 400 },
  waterResting: { fresh: 0.05, alike: 0.25, lastsS: 3600 },
  /** Water without ice, above and below the density maximum, and a warm reading where ice is believed. */
  waterWarm: { fresh: 0.06, alike: 0.2, lastsS: 1800 },
  waterLayered: { fresh: 0.1, alike: 0.7, lastsS: 1800 },
  waterOdd: { fresh: 0.3, alike: 1.5, lastsS: 1800 },
  coolant: { fresh: 0.15, alike: 0.6, lastsS: 7200 },
  /** Where a coil also melts from within, water between tube and ice hides how thick the ice is. */
  coolantHidden: { fresh: 0.15, alike: 1.5, lastsS: 14_400 },
  /** Logarithm of power. */
  power: { fresh: 0.01, alike: 0.05, lastsS: 3600 },
  /** mm. */
  level: { fresh: 2, alike: 1, lastsS: 2400 },
} as const satisfies Record<string, Alike>;

/** What an anchor may be off by, inventory as a fraction; it speaks once for each passing. No source. */
export const ANCHOR_SD = 0.05;

export function varianceOf({ fresh, alike, lastsS }: Alike, dtS: number): number {
  return fresh ** 2 + alike ** 2 * Math.max(1, lastsS / dtS);
}

/**
 * Part of a heat flow that is uncertain beyond its learned gain, where power or entering water is measured and where
 * the model alone tells it; and how long such an error lasts. No source.
 */
const HEAT_PART = { measured: 0.05, modelled: 0.15 };
const HEAT_LASTS_S = 5400;
/** Wandering of the ice for reasons not modelled, part of a full bank in a square-root hour. */
const ICE_WANDER = 0.002;
/** The last ice goes unevenly: below this inventory, while it melts, it wanders this much instead. */
const LAST_ICE = { below: 0.08, wander: 0.04 };
/**
 * Wandering of the water, K in a square-root minute. At rest beside ice it stands some tenths above 0 °C by ways of its
 * own, which must not be taken for news of the leak.
 */
const WATER_WANDER_K = { flowing: 0.06, onIce: 0.05, resting: 0.006 };

/** Wandering of how ice lies in containers, part of a full bank in a square-root hour; no source. */
const LIE_WANDER = 0.02;

const partOf = (measured: number | null): number =>
  measured === null ? HEAT_PART.modelled : HEAT_PART.measured;

/** Fills the noise variances of a step. `unknown` is power that may or may not have been at work, W. */
export function processNoise(
  models: PlantModels,
  flows: Flows,
  drive: Pick<Drive, 'flowing' | 'chillerW' | 'enteringC' | 'dtS'>,
  ice: number,
  unknownW: number,
  into: Float64Array,
): void {
  const fullJ = latentKwh(models) * 3.6e6;
  const { dtS, flowing } = drive;
  const uncertainW =
    partOf(drive.chillerW) * Math.abs(flows.chargingW) +
    partOf(drive.enteringC) * Math.abs(flows.loopW) +
    0.5 * unknownW;
  const part = (uncertainW * dtS) / fullJ;
  const still = ice > 0.01 ? WATER_WANDER_K.onIce : WATER_WANDER_K.resting;
  const wander = flowing > 0 ? WATER_WANDER_K.flowing : still;
  into.fill(0, 0, STATES);
  const iceWander = flows.loopW > 0 && ice < LAST_ICE.below ? LAST_ICE.wander : ICE_WANDER;
  into[X.ice] = part * part * Math.max(1, HEAT_LASTS_S / dtS) + (iceWander ** 2 * dtS) / 3600;
  for (const layer of LAYERS) into[layer] = (wander ** 2 * dtS) / 60;
  if (models.sealed) for (const i of LIE) into[i] = (LIE_WANDER ** 2 * dtS) / 3600;
}

/** When readings keep contradicting the model, its ice and its melting are doubted; in a square-root minute. */
const DOUBT = { ice: 0.012, meltNow: 0.04 };

export function addDoubt(noise: Float64Array, dtS: number): void {
  noise[X.ice] += (DOUBT.ice ** 2 * dtS) / 60;
  noise[X.meltNow] += (DOUBT.meltNow ** 2 * dtS) / 60;
}

/** How far water and young ice share a charge otherwise than expected, K of the water in a square-root minute. */
const SHARE_K = 0.25;
const YOUNG = { iceBelow: 0.3, waterAboveC: 0.5 };

/**
 * A fresh charge freezes on the coil or cools the water first, whether crystals are left or not; nobody sees which.
 * Noise in which the one's gain is the other's loss, so that warm water is no news of the machine.
 */
export function addShare(models: PlantModels, belief: Belief, dtS: number): void {
  const { mean, cov } = belief;
  if (models.sealed || mean[X.ice] > YOUNG.iceBelow || waterCOf(models, mean) < YOUNG.waterAboveC) return;
  const icePerK = liquidJPerK(models, mean[X.ice]) / fullJ(models);
  const along: [number, number][] = (models.internal ? [X.top] : LAYERS).map((layer) => [layer, 1]);
  along.push([X.ice, icePerK]);
  const q = (SHARE_K ** 2 * dtS) / 60;
  for (const [i, u] of along) for (const [j, v] of along) cov[i * STATES + j] += q * u * v;
}

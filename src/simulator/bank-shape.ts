/**
 * The shape of a bank, worked out from what the site file says of it. The site file gives conductances, not pipes, so
 * lengths follow from these: coil area from the bare coil's conductance, film coefficients from the melt conductance.
 */
import type { BankForm, SiteConfig } from '../config.ts';
import { findRoot } from '../numerics/root.ts';
import { ICE_DENSITY } from '../physics/water.ts';
import type { WallGeometry } from './shells.ts';

export const LAYERS = 8;

/** Coolant to a bare coil's face, W/(m² K), and the radius of its tube: common practice, no source. */
const COIL_W_PER_M2_K = 250;
const TUBE_RADIUS_M = 0.008;
/** A 4 L container is taken as an upright cylinder of this radius. */
const CONTAINER_RADIUS_M = 0.075;
/** Floating pieces of about 0.05 m: melting face for each kg, m²/kg (a sphere's 6/(917 · 0.05)). */
export const FLOAT_M2_PER_KG = 0.13;
/** Natural convection at ice or tube in still water near 0 °C as a part of that under the pump; no source. */
const STILL_PART = 0.35;
const WATER_CONDUCTIVITY = 0.556;

export interface BankShape {
  readonly form: BankForm;
  readonly floats: boolean;
  readonly sealed: boolean;
  readonly throughTube: boolean;
  readonly areaM2: number;
  readonly heightM: number;
  /** Water free to move, and water shut in containers. */
  readonly freeKg: number;
  readonly shutKg: number;
  readonly wall: WallGeometry;
  /** Coolant to the coil's face (or to the brine round containers), of one layer. */
  readonly coilWPerK: number;
  /** Loop side of the wall under the pump and at rest: brine in the tube, or brine round containers, of one layer. */
  readonly loopWPerK: number;
  readonly stillLoopWPerK: number;
  /** Water to ice, W/(m² K), under the pump and at rest; tube forms. */
  readonly filmWPerM2K: number;
  readonly stillFilmWPerM2K: number;
  readonly bareAreaM2: number;
  /** Most ice in one layer as the owner allows it. */
  readonly mostIceKg: number;
}

export function bankShape(site: SiteConfig, meltFactor: number, freezeFactor: number): BankShape {
  const { form } = site.bank;
  const melt = (site.bank.meltWPerK * meltFactor) / LAYERS;
  const freeze = (site.bank.freezeWPerK * freezeFactor) / LAYERS;
  const common = {
    form,
    floats: form === 'open-tub',
    sealed: form === 'sealed-containers',
    throughTube: form === 'ice-on-coil-internal',
    areaM2: site.bank.waterAreaM2,
    heightM: site.bank.waterL / 1000 / site.bank.waterAreaM2,
    mostIceKg: site.bank.mostIceKg / LAYERS,
  };
  return common.sealed
    ? { ...common, ...containers(site, melt, freeze) }
    : { ...common, ...coil(site, melt, freeze) };
}

function coil(site: SiteConfig, melt: number, freeze: number) {
  const { form } = site.bank;
  const throughTube = form === 'ice-on-coil-internal';
  const halfKg = site.bank.mostIceKg / LAYERS / 2;
  const bareM = site.bank.freezeWPerK / LAYERS / COIL_W_PER_M2_K / (2 * Math.PI * TUBE_RADIUS_M);
  const lengthM = throughTube ? Math.max(bareM, leastLengthM(2 * melt, halfKg)) : bareM;
  const faceM2 =
    form === 'open-tub' ? FLOAT_M2_PER_KG * halfKg : 2 * Math.PI * halfRadiusM(halfKg, lengthM) * lengthM;
  const film = melt / faceM2;
  const annulusWPerK = shellWPerK(halfKg, lengthM);
  return {
    freeKg: site.bank.waterL,
    shutKg: 0,
    bareAreaM2: 2 * Math.PI * TUBE_RADIUS_M * lengthM,
    wall: {
      inward: false,
      wallRadiusM: TUBE_RADIUS_M,
      lengthM,
      waterGain: throughTube ? gain(melt, annulusWPerK) : 1,
    },
    coilWPerK: freeze,
    loopWPerK: Math.max(2 * melt, freeze),
    stillLoopWPerK: freeze,
    filmWPerM2K: throughTube ? STILL_PART * 300 : film,
    stillFilmWPerM2K: STILL_PART * (throughTube ? 300 : film),
  };
}

function containers(site: SiteConfig, melt: number, freeze: number) {
  const shutKg = Math.min(site.bank.mostIceKg * 1.02, site.bank.waterL * 0.93);
  const perLayerM3 = shutKg / LAYERS / ICE_DENSITY;
  const lengthM = perLayerM3 / (Math.PI * CONTAINER_RADIUS_M ** 2);
  const halfWPerK = (2 * Math.PI * WATER_CONDUCTIVITY * lengthM) / Math.log(Math.SQRT2);
  const loopWPerK = Math.max(2 * melt, 2 * freeze);
  return {
    freeKg: site.bank.waterL - shutKg,
    shutKg,
    bareAreaM2: 2 * Math.PI * CONTAINER_RADIUS_M * lengthM,
    wall: { inward: true, wallRadiusM: CONTAINER_RADIUS_M, lengthM, waterGain: gain(melt, halfWPerK) },
    coilWPerK: 2 * freeze,
    loopWPerK,
    stillLoopWPerK: 2 * freeze,
    filmWPerM2K: 0,
    stillFilmWPerM2K: 0,
  };
}

const halfRadiusM = (halfKg: number, lengthM: number): number =>
  Math.sqrt(TUBE_RADIUS_M ** 2 + halfKg / (ICE_DENSITY * Math.PI * lengthM));

/** Conduction through water from the tube to where the ice of half a bank would end, W/K. */
const shellWPerK = (halfKg: number, lengthM: number): number =>
  (2 * Math.PI * WATER_CONDUCTIVITY * lengthM) / Math.log(halfRadiusM(halfKg, lengthM) / TUBE_RADIUS_M);

/** Tube without which a water shell could not carry `wantedWPerK`, however well it convects. */
function leastLengthM(wantedWPerK: number, halfKg: number): number {
  const lacking = (lengthM: number): number => MOST_GAIN * shellWPerK(halfKg, lengthM) - wantedWPerK;
  return findRoot(lacking, 0.01, 1e4, { tolerance: 1e-4 }) ?? 0;
}

/** Far above what a narrow annulus reaches by convection; no source. */
const MOST_GAIN = 12;

/**
 * Convection gain of a water shell such that loop side (twice the melt conductance) and shell in series give the melt
 * conductance at half inventory. At least 1, bare conduction.
 */
function gain(melt: number, bareWPerK: number): number {
  return Math.max(1, Math.min(MOST_GAIN, (2 * melt) / bareWPerK));
}

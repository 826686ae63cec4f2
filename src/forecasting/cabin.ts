/**
 * The cabin as two heat stores, air (with what stands in it) and fabric, between outdoor air, sun, people and machines:
 *   C_a dT_a/dt = U_af (T_f − T_a) + U_ao (T_o − T_a) + A_a S + heat
 *   C_f dT_f/dt = U_af (T_a − T_f) + U_fo (T_o − T_f) + A_f S
 * Steps are implicit, so any step is stable; inputs are held over a step.
 */
import type { SiteConfig } from '../config.ts';

export interface CabinParameters {
  readonly airJPerK: number;
  readonly fabricJPerK: number;
  readonly airFabricWPerK: number;
  readonly airOutdoorWPerK: number;
  readonly fabricOutdoorWPerK: number;
  readonly airApertureM2: number;
  readonly fabricApertureM2: number;
  /** Sensible heat of people while they are home. */
  readonly homeW: number;
  /** Other heat inside by UTC hour of the day. */
  readonly gainsW: readonly number[];
}

export interface CabinState {
  readonly airC: number;
  readonly fabricC: number;
}

export interface CabinInput {
  readonly outdoorC: number;
  readonly sunWPerM2: number;
  /** All heat brought into the air, cooling counted negative. */
  readonly heatW: number;
}

/** Air and what stands in it take up some times the heat of the air alone (common practice, no source). */
const CONTENTS = 5;
const ROOM_HEIGHT_M = 2.5;
const AIR_J_PER_M3_K = 1.2 * 1006;
/** Between air and fabric: about 3 m² of surface for each m² of floor at 7 W/m²K (common practice, no source). */
const SURFACE_WPERK_PER_M2 = 21;
/** Sensible heat of a person at rest, W: ISO 7730 puts 58 W/m² at 1 met; two thirds of that by 1.8 m². */
const PERSON_W = 70;
/** Lamps and appliances, W/m² of floor (common practice, no source). */
const APPLIANCES_W_PER_M2 = 3;

/** The cabin as the site file describes it. */
export function cabinOfConfig(config: SiteConfig): CabinParameters {
  const { cabin } = config;
  const airFabricWPerK = SURFACE_WPERK_PER_M2 * cabin.floorM2;
  const halfLoss = cabin.heatLossWPerK / 2;
  return {
    airJPerK: cabin.floorM2 * ROOM_HEIGHT_M * AIR_J_PER_M3_K * CONTENTS,
    fabricJPerK: cabin.capacityKwhPerK * 3.6e6,
    airFabricWPerK,
    airOutdoorWPerK: halfLoss,
    fabricOutdoorWPerK: (halfLoss * airFabricWPerK) / Math.max(airFabricWPerK - halfLoss, halfLoss),
    airApertureM2: cabin.apertureM2 / 2,
    fabricApertureM2: cabin.apertureM2 / 2,
    homeW: PERSON_W * cabin.occupants,
    gainsW: Array.from({ length: 24 }, () => APPLIANCES_W_PER_M2 * cabin.floorM2),
  };
}

/** Heat lost to outdoors for each kelvin in the steady state, W/K. */
export function lossWPerK(p: CabinParameters): number {
  return (
    p.airOutdoorWPerK + (p.airFabricWPerK * p.fabricOutdoorWPerK) / (p.airFabricWPerK + p.fabricOutdoorWPerK)
  );
}

/** One step with the air free to move. */
export function stepFree(p: CabinParameters, from: CabinState, input: CabinInput, stepS: number): CabinState {
  const airRate = p.airJPerK / stepS;
  const fabricRate = p.fabricJPerK / stepS;
  const a = airRate + p.airFabricWPerK + p.airOutdoorWPerK;
  const d = fabricRate + p.airFabricWPerK + p.fabricOutdoorWPerK;
  const airIn =
    airRate * from.airC +
    p.airOutdoorWPerK * input.outdoorC +
    p.airApertureM2 * input.sunWPerM2 +
    input.heatW;
  const fabricIn =
    fabricRate * from.fabricC + p.fabricOutdoorWPerK * input.outdoorC + p.fabricApertureM2 * input.sunWPerM2;
  const determinant = a * d - p.airFabricWPerK * p.airFabricWPerK;
  return {
    airC: (d * airIn + p.airFabricWPerK * fabricIn) / determinant,
    fabricC: (a * fabricIn + p.airFabricWPerK * airIn) / determinant,
  };
}

/** The fabric after a step that ends with the air at a known temperature. */
export function stepFabric(
  p: CabinParameters,
  fabricC: number,
  airC: number,
  input: CabinInput,
  stepS: number,
): number {
  const fabricRate = p.fabricJPerK / stepS;
  const fabricIn =
    fabricRate * fabricC +
    p.fabricOutdoorWPerK * input.outdoorC +
    p.fabricApertureM2 * input.sunWPerM2 +
    p.airFabricWPerK * airC;
  return fabricIn / (fabricRate + p.airFabricWPerK + p.fabricOutdoorWPerK);
}

/** Heat that has to be taken out of the air, beside `input.heatW`, to end a step at `airC`. Negative: to be added. */
export function heatToHoldW(
  p: CabinParameters,
  from: CabinState,
  airC: number,
  input: CabinInput,
  stepS: number,
): { takeW: number; fabricC: number } {
  const fabricC = stepFabric(p, from.fabricC, airC, input, stepS);
  const inflowW =
    p.airFabricWPerK * (fabricC - airC) +
    p.airOutdoorWPerK * (input.outdoorC - airC) +
    p.airApertureM2 * input.sunWPerM2 +
    input.heatW;
  return { takeW: inflowW - (p.airJPerK / stepS) * (airC - from.airC), fabricC };
}

/** Fabric that is at rest with the air and outdoors as they are. */
export function restingFabricC(
  p: CabinParameters,
  airC: number,
  outdoorC: number,
  sunWPerM2: number,
): number {
  return (
    (p.airFabricWPerK * airC + p.fabricOutdoorWPerK * outdoorC + p.fabricApertureM2 * sunWPerM2) /
    (p.airFabricWPerK + p.fabricOutdoorWPerK)
  );
}

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

/** What acts on the fabric over a step. */
export interface CabinInput {
  readonly outdoorC: number;
  readonly sunWPerM2: number;
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

/** Runs a cabin on in steps of one length; the state is its own and moves with each step. */
export class CabinRun {
  airC: number;
  fabricC: number;
  private readonly p: CabinParameters;
  private readonly airRate: number;
  private readonly fabricRate: number;
  private readonly airSum: number;
  private readonly fabricSum: number;
  private readonly determinant: number;

  constructor(p: CabinParameters, airC: number, fabricC: number, stepS: number) {
    this.p = p;
    this.airC = airC;
    this.fabricC = fabricC;
    this.airRate = p.airJPerK / stepS;
    this.fabricRate = p.fabricJPerK / stepS;
    this.airSum = this.airRate + p.airFabricWPerK + p.airOutdoorWPerK;
    this.fabricSum = this.fabricRate + p.airFabricWPerK + p.fabricOutdoorWPerK;
    this.determinant = this.airSum * this.fabricSum - p.airFabricWPerK * p.airFabricWPerK;
  }

  /** Heat that would have to be taken out, beside `heatW`, to end a step at `airC`. Negative: to be added. */
  heatToEndAt(airC: number, outdoorC: number, sunWPerM2: number, heatW: number): number {
    const fabricIn = this.fabricIn(outdoorC, sunWPerM2);
    const through = this.p.airFabricWPerK * fabricIn - this.determinant * airC;
    return this.airIn(outdoorC, sunWPerM2) + heatW + through / this.fabricSum;
  }

  /** One step with `heatW` brought into the air. */
  step(outdoorC: number, sunWPerM2: number, heatW: number): void {
    const airIn = this.airIn(outdoorC, sunWPerM2) + heatW;
    const fabricIn = this.fabricIn(outdoorC, sunWPerM2);
    const between = this.p.airFabricWPerK;
    this.airC = (this.fabricSum * airIn + between * fabricIn) / this.determinant;
    this.fabricC = (this.airSum * fabricIn + between * airIn) / this.determinant;
  }

  private airIn(outdoorC: number, sunWPerM2: number): number {
    return this.airRate * this.airC + this.p.airOutdoorWPerK * outdoorC + this.p.airApertureM2 * sunWPerM2;
  }

  private fabricIn(outdoorC: number, sunWPerM2: number): number {
    return (
      this.fabricRate * this.fabricC +
      this.p.fabricOutdoorWPerK * outdoorC +
      this.p.fabricApertureM2 * sunWPerM2
    );
  }
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

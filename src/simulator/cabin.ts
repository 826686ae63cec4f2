/**
 * The true cabin: for each room air, fabric and interior mass, and the moisture of its air with what fabric and
 * furnishings buffer. Air is implicit in its own temperature and passes exactly that heat on, so nothing is lost.
 */
import type { SiteConfig } from '../config.ts';
import { VAPOUR_J_PER_KG } from './bank.ts';
import { AIR_CP } from './fan-coil.ts';
import type { SaturationTable } from './saturation.ts';

const CP = AIR_CP;
const VAPOUR_J = VAPOUR_J_PER_KG;
/** Height of a room; furnishings that follow the air, in multiples of the air; hygroscopic buffer likewise. No source. */
const ROOM_HEIGHT_M = 2.5;
const FURNISHINGS = 3;
const MOISTURE_BUFFER = 5;
const FABRIC_PART = 0.6;
/** Surfaces of walls and things inside, for each m² of floor: 2 m² at 3.5 W/(m² K). */
const INSIDE_W_PER_M2_K = 7;
/**
 * Sunshine on roof and walls raises the outdoor temperature that the fabric sees, K per W/m² of global radiation; upper
 * rooms have more of the roof. No source.
 */
const SOL_AIR_K_M2_PER_W = 0.01;
const UPPER_SOL_AIR_K_M2_PER_W = 0.024;
/** Air passing between neighbouring rooms, W/K for each m² of the smaller floor. */
const BETWEEN_W_PER_M2_K = 2.5;
const UPPER_ROOM_SHARE = 0.35;

export interface CabinAir {
  outdoorC: number;
  outdoorRatio: number;
  ghiWPerM2: number;
  /** Air changes an hour. */
  changesPerH: number;
}

export class Cabin {
  readonly rooms: number;
  readonly share: Float64Array;
  readonly airC: Float64Array;
  readonly ratio: Float64Array;
  readonly fabricC: Float64Array;
  readonly massC: Float64Array;
  /** Heat and moisture put into each room's air over the coming step, W and kg/s; cleared by the step. */
  readonly heatW: Float64Array;
  readonly moistureKgPerS: Float64Array;
  /** What crossed the envelope in the last step: sensible and latent, J, and water, kg. */
  envelopeJ = 0;
  envelopeKg = 0;
  /** Moisture that settled on cold surfaces in the last step, kg. */
  settledKg = 0;
  private readonly airJPerK: Float64Array;
  private readonly airKg: Float64Array;
  private readonly moistKg: Float64Array;
  private readonly fabricJPerK: Float64Array;
  private readonly massJPerK: Float64Array;
  private readonly fabricWPerK: Float64Array;
  private readonly massWPerK: Float64Array;
  private readonly betweenWPerK: number;
  private readonly saturation: SaturationTable;

  constructor(
    site: SiteConfig,
    upperRooms: number,
    factors: { heatLossFactor: number; heatCapacityFactor: number; infiltrationPerH: number },
    airDensity: number,
    saturation: SaturationTable,
    start: { roomC: number; ratio: number },
  ) {
    this.saturation = saturation;
    this.rooms = 1 + upperRooms;
    const upper = upperRooms > 0 ? UPPER_ROOM_SHARE / upperRooms : 0;
    this.share = Float64Array.from({ length: this.rooms }, (_, r) =>
      r === 0 ? 1 - upper * upperRooms : upper,
    );
    const { floorM2, heatLossWPerK, capacityKwhPerK } = site.cabin;
    const airKg = floorM2 * ROOM_HEIGHT_M * airDensity;
    const capacity = capacityKwhPerK * 3.6e6 * factors.heatCapacityFactor;
    const leakage = (airKg * factors.infiltrationPerH * CP) / 3600;
    const fabric = factors.heatLossFactor * Math.max(0.4 * heatLossWPerK, heatLossWPerK - leakage);
    this.airKg = this.share.map((s) => s * airKg);
    this.airJPerK = this.share.map((s) => s * airKg * CP * (1 + FURNISHINGS));
    this.moistKg = this.share.map((s) => s * airKg * MOISTURE_BUFFER);
    this.fabricJPerK = this.share.map((s) => s * capacity * FABRIC_PART);
    this.massJPerK = this.share.map((s) => s * capacity * (1 - FABRIC_PART));
    // Fabric node in mid-wall: half the resistance on either side.
    this.fabricWPerK = this.share.map((s) => s * 2 * fabric);
    this.massWPerK = this.share.map((s) => s * floorM2 * INSIDE_W_PER_M2_K);
    this.betweenWPerK = BETWEEN_W_PER_M2_K * floorM2 * upper;
    this.airC = new Float64Array(this.rooms).fill(start.roomC);
    this.fabricC = new Float64Array(this.rooms).fill(start.roomC);
    this.massC = new Float64Array(this.rooms).fill(start.roomC);
    this.ratio = new Float64Array(this.rooms).fill(start.ratio);
    this.heatW = new Float64Array(this.rooms);
    this.moistureKgPerS = new Float64Array(this.rooms);
  }

  step(dtS: number, air: CabinAir): void {
    this.envelopeJ = 0;
    this.envelopeKg = 0;
    this.settledKg = 0;
    for (let r = 1; r < this.rooms; r++) this.exchangeWithMain(r, dtS);
    for (let r = 0; r < this.rooms; r++) {
      this.stepHeat(r, dtS, air);
      this.stepMoisture(r, dtS, air);
      this.heatW[r] = 0;
      this.moistureKgPerS[r] = 0;
    }
  }

  private exchangeWithMain(r: number, dtS: number): void {
    // Warm air rises readily into an upper room and stays there when that room is the warmer one.
    const rising = this.airC[0] > this.airC[r] ? 2 : 0.5;
    const through = this.betweenWPerK * rising;
    const heatW = through * (this.airC[0] - this.airC[r]);
    this.heatW[0] -= heatW;
    this.heatW[r] += heatW;
    const movedKg = (through / CP) * (this.ratio[0] - this.ratio[r]) * dtS;
    this.ratio[0] -= movedKg / this.moistKg[0];
    this.ratio[r] += movedKg / this.moistKg[r];
  }

  private stepHeat(r: number, dtS: number, air: CabinAir): void {
    const leak = (this.airKg[r] * air.changesPerH * CP) / 3600;
    const fabric = this.fabricWPerK[r];
    const mass = this.massWPerK[r];
    const oldC = this.airC[r];
    const driven = this.heatW[r] + leak * air.outdoorC + fabric * this.fabricC[r] + mass * this.massC[r];
    const newC = (this.airJPerK[r] * oldC + dtS * driven) / (this.airJPerK[r] + dtS * (leak + fabric + mass));
    this.airC[r] = newC;
    const sunlit = r === 0 ? SOL_AIR_K_M2_PER_W : UPPER_SOL_AIR_K_M2_PER_W;
    const solAirC = air.outdoorC + sunlit * air.ghiWPerM2;
    const outsideJ = fabric * (solAirC - this.fabricC[r]) * dtS;
    this.fabricC[r] += (outsideJ + fabric * (newC - this.fabricC[r]) * dtS) / this.fabricJPerK[r];
    this.massC[r] += (mass * (newC - this.massC[r]) * dtS) / this.massJPerK[r];
    this.envelopeJ += outsideJ + leak * (air.outdoorC - newC) * dtS;
  }

  private stepMoisture(r: number, dtS: number, air: CabinAir): void {
    const changeKg = ((this.airKg[r] * air.changesPerH) / 3600) * (air.outdoorRatio - this.ratio[r]) * dtS;
    this.ratio[r] += (changeKg + this.moistureKgPerS[r] * dtS) / this.moistKg[r];
    this.envelopeKg += changeKg;
    this.envelopeJ += changeKg * VAPOUR_J;
    const most = this.saturation.ratio(this.airC[r]);
    if (this.ratio[r] <= most) return;
    const settledKg = (this.ratio[r] - most) * this.moistKg[r];
    this.ratio[r] = most;
    this.settledKg += settledKg;
    this.airC[r] += (settledKg * VAPOUR_J) / this.airJPerK[r];
  }

  /** Sensible and latent heat held above 0 °C and dry air, J. */
  enthalpyJ(): number {
    let sum = 0;
    for (let r = 0; r < this.rooms; r++) {
      sum += this.airJPerK[r] * this.airC[r] + this.fabricJPerK[r] * this.fabricC[r];
      sum += this.massJPerK[r] * this.massC[r] + this.moistKg[r] * this.ratio[r] * VAPOUR_J;
    }
    return sum;
  }

  moistureKg(): number {
    let sum = 0;
    for (let r = 0; r < this.rooms; r++) sum += this.moistKg[r] * this.ratio[r];
    return sum;
  }

  meanAirC(): number {
    let sum = 0;
    for (let r = 0; r < this.rooms; r++) sum += this.share[r] * this.airC[r];
    return sum;
  }
}

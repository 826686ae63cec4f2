/**
 * The true ice bank: layers of water, ice on a coil, in containers or afloat, and the heat that passes between them,
 * the coil, the load loop and the surround. Enthalpy is conserved by construction and audited from outside.
 */
import type { SiteConfig } from '../config.ts';
import { FUSION_J_PER_KG, ICE_DENSITY, WATER_CP_J_PER_KG_K } from '../physics/water.ts';
import { bankShape, FLOAT_M2_PER_KG, LAYERS, type BankShape } from './bank-shape.ts';
import { boundedWPerK, CoilIce } from './coil-ice.ts';
import { Layers } from './layers.ts';
import { Shells } from './shells.ts';

const CP = WATER_CP_J_PER_KG_K;
/** Number of layers. */
const N = LAYERS;
/** Heat of fusion, J/kg; a local name because the inner loop reads it most. */
const FUSION_J = FUSION_J_PER_KG;
/** Enthalpy that vapour carries off, reckoned from liquid at 0 °C, J/kg; the same figure in the room's balance. */
export const VAPOUR_J_PER_KG = 2.501e6;
/** Still air over the open water of a tub, W/(m² K), and Lewis' relation for the vapour: h/cp. Common practice. */
const SURFACE_W_PER_M2_K = 4;
const AIR_CP = 1006;
/** Part of a layer that floating pieces may fill. */
const FLOAT_PART = 0.6;
/** Ice on a resting coil lets go of it within this time constant, s. No source. */
const LETTING_GO_S = 2400;

export interface BankStep {
  coilOn: boolean;
  coolantC: number;
  /** Loop water (or brine) through the bank, kg/s; 0 with the pump off. */
  flowKgPerS: number;
  enteringC: number;
  surroundC: number;
  /** Humidity ratio of the air over an open tub, and of saturated air at its surface. */
  airRatio: number;
  surfaceRatio: number;
}

export class IceBank {
  readonly shape: BankShape;
  readonly layers: Layers;
  readonly shells: Shells;
  floatKg = 0;
  /** Conductance from coolant and temperature that it works against, by layer: what the ice machine has to meet. */
  readonly coilWPerK = new Float64Array(N);
  readonly coilFaceC = new Float64Array(N);
  // What the last step did.
  coilJ = 0;
  loopJ = 0;
  leakJ = 0;
  evaporatedKg = 0;
  leavingC: number;
  readonly leakWPerK: number;
  private readonly leakPart: Float64Array;
  private readonly solidKg = new Float64Array(N);
  private readonly floatingKg = new Float64Array(N);
  private readonly drawSupercoolingK: () => number;
  private supercoolingK: number;
  private restS = 0;
  /** Set from outside as the plant ages. */
  leakFactor = 1;
  freezeFactor = 1;
  readonly coil: CoilIce;

  constructor(site: SiteConfig, start: { iceKg: number; waterC: number }, drawSupercoolingK: () => number) {
    this.shape = bankShape(site, 1, 1);
    this.drawSupercoolingK = drawSupercoolingK;
    this.supercoolingK = drawSupercoolingK();
    this.leakWPerK = site.bank.heatLeakWPerK;
    this.leakPart = leakParts();
    this.shells = new Shells(N, this.shape.wall, drawSupercoolingK);
    this.layers = this.fill(start.iceKg, start.waterC);
    this.coil = new CoilIce(this.shape, this.layers, this.shells);
    this.leavingC = this.layers.temperatureC(N - 1);
    this.settle();
  }

  private fill(iceKg: number, waterC: number): Layers {
    const { shape } = this;
    const free =
      shape.sealed || shape.floats ? shape.freeKg - (shape.floats ? iceKg : 0) : shape.freeKg - iceKg;
    for (let i = 0; i < N; i++) {
      const ice = iceKg / N;
      if (shape.sealed) this.fillContainer(i, Math.min(ice, shape.shutKg / N), waterC);
      else if (!shape.floats && ice > 0) this.shells.growOuter(i, ice);
    }
    if (shape.floats) this.floatKg = iceKg;
    return new Layers(N, free, waterC, shape.areaM2, shape.heightM, shape.sealed);
  }

  /** Ice on the wall and water within; all molten, the water is at `waterC`. */
  private fillContainer(i: number, iceKg: number, waterC: number): void {
    const kg = this.shape.shutKg / N;
    if (iceKg > 1e-3) {
      this.shells.fill(i, kg - iceKg > 1e-3 ? [iceKg, kg - iceKg] : [kg], false);
    } else {
      this.shells.fill(i, [kg], true);
      this.shells.wallJ[i] = kg * CP * waterC;
    }
  }

  iceKg(): number {
    let sum = this.floatKg;
    for (let i = 0; i < N; i++) sum += this.shells.iceKg(i);
    return sum;
  }

  /** All water and ice, kg. */
  totalKg(): number {
    let sum = this.layers.totalKg() + this.floatKg;
    for (let i = 0; i < N; i++) sum += this.shells.totalKg(i);
    return sum;
  }

  /** Enthalpy of water and ice above liquid at 0 °C, J. */
  enthalpyJ(): number {
    let sum = this.layers.totalJ() - FUSION_J * this.iceKg();
    for (let i = 0; i < N; i++) sum += this.shells.wallJ[i];
    return sum;
  }

  /** Cooling still in the bank: latent, and sensible of all its water up to the useful leaving temperature; kWh. */
  iceOnHandKwh(usefulLeavingC: number): number {
    return Math.max(0, this.totalKg() * CP * usefulLeavingC - this.enthalpyJ()) / 3.6e6;
  }

  /** Flow left when ice bridges the passages: 1 up to the allowed ice, a tenth at a fifth above it. */
  openPart(): number {
    const over = this.iceKg() / (this.shape.mostIceKg * N) - 1;
    return over > 0 && !this.shape.sealed ? Math.max(0.1, 1 - 4.5 * over) : 1;
  }

  levelMm(): number {
    let litres = this.layers.totalKg() + this.floatKg;
    for (let i = 0; i < N; i++) {
      litres += this.shells.waterKg(i) + (this.shells.iceKg(i) * 1000) / ICE_DENSITY;
    }
    return litres / this.shape.areaM2;
  }

  /** Works out what a coolant meets in each layer; called before the machine finds its evaporating temperature. */
  faceCoil(dtS: number): void {
    for (let i = 0; i < N; i++) {
      const waterC = this.layers.temperatureC(i);
      if (this.shape.sealed) {
        this.coilWPerK[i] = boundedWPerK(this.layers.waterKg[i] * CP, this.coilInsideWPerK(), dtS);
        this.coilFaceC[i] = waterC;
      } else if (this.shells.count[i] === 0) {
        this.coilWPerK[i] = this.coil.bareWPerK(this.coilInsideWPerK(), false);
        this.coilFaceC[i] = waterC;
      } else {
        this.coilWPerK[i] = this.coil.icyWPerK(i, this.coilInsideWPerK());
        this.coilFaceC[i] = 0;
      }
    }
  }

  step(dtS: number, by: BankStep): void {
    this.coilJ = 0;
    this.loopJ = 0;
    this.leakJ = 0;
    this.evaporatedKg = 0;
    if (this.shape.floats) this.placeFloating();
    if (this.shape.sealed) this.stepContainers(dtS, by);
    else if (this.shape.throughTube && by.flowKgPerS > 0) this.stepThroughTube(dtS, by);
    else this.stepCoil(dtS, by);
    if (this.shape.floats) this.stepFloating(dtS, by);
    this.leak(dtS, by);
    this.layers.energyJ[0] += this.shells.releasedJ;
    this.shells.releasedJ = 0;
    if (!this.shape.sealed) this.crystallise();
    this.settle();
    this.layers.conduct(dtS);
    this.layers.overturn();
  }

  private pumpThrough(dtS: number, by: BankStep): void {
    this.leavingC = this.layers.temperatureC(N - 1);
    if (!(by.flowKgPerS > 0)) return;
    const kg = by.flowKgPerS * dtS;
    this.leavingC = this.layers.flow(kg, by.enteringC);
    this.loopJ = kg * CP * (by.enteringC - this.leavingC);
  }

  /** Melt water flows round the ice; a coil, if it is on, freezes outward. */
  private stepCoil(dtS: number, by: BankStep): void {
    this.pumpThrough(dtS, by);
    const inside = by.coilOn ? this.coilInsideWPerK() : 0;
    const seeded = this.iceKg() > 1e-4;
    for (let i = 0; i < N; i++) {
      this.coilJ -= this.coil.wall(i, by.coolantC, inside, dtS, by.flowKgPerS > 0, seeded);
    }
  }

  /** Brine of the load loop in the tube itself: what it meets is the inside of the shells. */
  private stepThroughTube(dtS: number, by: BankStep): void {
    const rate = by.flowKgPerS * CP;
    const seeded = this.iceKg() > 1e-4;
    let brineC = by.enteringC;
    if (by.coilOn) {
      // The machine chills the brine before the tank: an evaporator that wants heat from the brine at the machine's side.
      this.coilJ = Math.max(0, rate * (brineC - by.coolantC) * dtS * this.brineEffectiveness(rate));
      brineC -= this.coilJ / (rate * dtS);
    }
    for (let i = 0; i < N; i++) {
      const inside = rate * -Math.expm1(-this.shape.loopWPerK / rate);
      brineC -= this.coil.wall(i, brineC, inside, dtS, true, seeded) / (rate * dtS);
    }
    this.leavingC = brineC;
    this.loopJ = rate * dtS * (by.enteringC - brineC);
  }

  brineEffectiveness(rateWPerK: number): number {
    return -Math.expm1((-this.coilInsideWPerK() * N) / rateWPerK);
  }

  private coilInsideWPerK(): number {
    return this.shape.coilWPerK * this.freezeFactor;
  }

  /** Coolant cools the brine, brine freezes or melts the containers; the brine also carries the load loop. */
  private stepContainers(dtS: number, by: BankStep): void {
    this.pumpThrough(dtS, by);
    const side = by.flowKgPerS > 0 ? this.shape.loopWPerK * this.coil.meltFactor : this.shape.stillLoopWPerK;
    for (let i = 0; i < N; i++) {
      const capacity = this.layers.waterKg[i] * CP;
      if (by.coilOn) {
        const inside = boundedWPerK(capacity, this.coilInsideWPerK(), dtS);
        const outJ = inside * (this.layers.temperatureC(i) - by.coolantC) * dtS;
        this.layers.energyJ[i] -= outJ;
        this.coilJ += outJ;
      }
      const wall = boundedWPerK(capacity, side, dtS);
      this.layers.energyJ[i] -= this.shells.exchange(i, this.layers.temperatureC(i), wall, dtS);
    }
  }

  /** Loose ice lies under the surface, packed to a part of each layer, from the top down. */
  private placeFloating(): void {
    let left = this.floatKg;
    const most = (FLOAT_PART * this.totalKg()) / N;
    for (let i = 0; i < N; i++) {
      const room = Math.max(0, most - this.shells.totalKg(i));
      this.floatingKg[i] = i === N - 1 ? left : Math.min(left, room);
      left -= this.floatingKg[i];
    }
  }

  private stepFloating(dtS: number, by: BankStep): void {
    this.letGo(dtS, by.coilOn);
    const film = by.flowKgPerS > 0 ? this.shape.filmWPerM2K : this.shape.stillFilmWPerM2K;
    for (let i = 0; i < N; i++) {
      if (!(this.floatingKg[i] > 0)) continue;
      const face = film * this.coil.meltFactor * FLOAT_M2_PER_KG * this.floatingKg[i];
      const offeredJ =
        boundedWPerK(this.layers.waterKg[i] * CP, face, dtS) * this.layers.temperatureC(i) * dtS;
      const kg = Math.min(offeredJ / FUSION_J, this.floatingKg[i]);
      this.floatKg -= kg;
      this.layers.waterKg[i] += kg;
      this.layers.energyJ[i] -= kg * FUSION_J;
    }
    this.evaporate(dtS, by);
  }

  /** Ice on a resting coil works loose and floats up. */
  private letGo(dtS: number, coilOn: boolean): void {
    this.restS = coilOn ? 0 : this.restS + dtS;
    if (this.restS < LETTING_GO_S) return;
    for (let i = 0; i < N; i++) {
      if (this.shells.count[i] === 0) continue;
      const kg = this.shells.meltOuter(i, Math.max(1e-4, (this.shells.iceKg(i) * dtS) / LETTING_GO_S));
      this.floatKg += kg;
      this.layers.waterKg[i] += this.shells.freedKg;
      this.layers.energyJ[i] += this.shells.freedJ;
    }
  }

  private evaporate(dtS: number, by: BankStep): void {
    const surface = SURFACE_W_PER_M2_K * this.shape.areaM2;
    this.evaporatedKg = (surface / AIR_CP) * (by.surfaceRatio - by.airRatio) * dtS;
    this.layers.waterKg[0] -= this.evaporatedKg;
    this.layers.energyJ[0] -= this.evaporatedKg * VAPOUR_J_PER_KG;
    this.gain(0, surface * (by.surroundC - this.layers.temperatureC(0)) * dtS);
  }

  private gain(i: number, heatJ: number): void {
    this.layers.energyJ[i] += heatJ;
    this.leakJ += heatJ;
  }

  private leak(dtS: number, by: BankStep): void {
    const leak = this.leakWPerK * this.leakFactor * dtS;
    for (let i = 0; i < N; i++) {
      this.gain(i, leak * this.leakPart[i] * (by.surroundC - this.layers.temperatureC(i)));
    }
  }

  /** First ice of a fresh charge, and slush where supercooled water borders on a bank that already holds ice. */
  private crystallise(): void {
    let coldestC = 0;
    for (let i = 0; i < N; i++) coldestC = Math.min(coldestC, this.layers.temperatureC(i));
    if (coldestC === 0) return;
    const seeded = this.iceKg() > 1e-4;
    if (!seeded && coldestC > -this.supercoolingK) return;
    if (!seeded) this.supercoolingK = this.drawSupercoolingK();
    for (let i = 0; i < N; i++) {
      if (this.layers.energyJ[i] >= 0 || this.shells.count[i] > 0) continue;
      const kg = -this.layers.energyJ[i] / FUSION_J;
      this.shells.growOuter(i, kg);
      this.layers.waterKg[i] -= kg;
      this.layers.energyJ[i] = 0;
    }
  }

  private settle(): void {
    if (this.shape.sealed) return;
    for (let i = 0; i < N; i++) {
      this.solidKg[i] = this.shells.totalKg(i) + (this.shape.floats ? this.floatingKg[i] : 0);
    }
    this.layers.settle(this.solidKg);
  }
}

/** Share of the heat leak by layer: the lid and the bottom take more than a slice of the side. */
function leakParts(): Float64Array {
  const parts = new Float64Array(N).fill(1);
  parts[0] = parts[N - 1] = 2;
  return parts.map((part) => part / (N + 2));
}

/**
 * Ice and water in concentric shells on a cold or warm wall: the memory of partial cycles.
 *
 * Each element (one for each layer of the bank) is a stack of shells counted from the wall, ice and water in turn.
 * A cold wall freezes the water next to the first ice; a warm wall melts from the wall; so every partial cycle may
 * leave an annulus. Water shells that do not touch the wall are at 0 °C; the one at the wall keeps its own enthalpy.
 * Conduction is quasi-steady through each shell (Stefan number below 0.05 at 10 K: error below 2 %, compare
 * design figures for the freezing front). The sensible heat of the ice itself is neglected (3 % of its latent heat at
 * a mean of 5 K below zero), and so is the change of volume between ice and water within the stack.
 */
import { FUSION_J_PER_KG, ICE_CONDUCTIVITY, ICE_DENSITY, WATER_CP_J_PER_KG_K } from '../physics/water.ts';

/** Of water at 0 °C, W/(m K): IAPWS R15-11 gives 0.556. */
const WATER_CONDUCTIVITY = 0.556;
const MOST_SHELLS = 6;
/** A shell thinner than this is taken to be gone; a hundredth of a gram. */
const GONE_KG = 1e-5;
const CP = WATER_CP_J_PER_KG_K;
/** Heat of fusion, J/kg; a local name because the inner loop reads it most. */
const FUSION_J = FUSION_J_PER_KG;

export interface WallGeometry {
  /** Outward from a tube, or inward from a container's wall. */
  readonly inward: boolean;
  readonly wallRadiusM: number;
  /** Length of tube, or of containers, in one element. */
  readonly lengthM: number;
  /** How much better than conduction a water shell carries heat (natural convection in the annulus). */
  readonly waterGain: number;
}

export class Shells {
  readonly count: Int32Array;
  readonly waterFirst: Uint8Array;
  readonly massKg: Float64Array;
  /** Enthalpy above 0 °C of the water shell at the wall, J. */
  readonly wallJ: Float64Array;
  /** Supercooling at which a fully molten element freezes, K. */
  readonly supercoolingK: Float64Array;
  private readonly areaPerKgM2: number;
  private readonly wallSquareM2: number;
  private readonly perLogKPerW: number;
  private readonly geometry: WallGeometry;

  /** Latent heat set free when a remnant of water too thin to follow is counted as ice, J; the bank collects it. */
  releasedJ = 0;
  /** What the last change of the outermost ice gave back to the bank: water, and its enthalpy above 0 °C. */
  freedKg = 0;
  freedJ = 0;
  private readonly drawSupercoolingK: () => number;

  constructor(elements: number, geometry: WallGeometry, drawSupercoolingK: () => number) {
    this.geometry = geometry;
    this.drawSupercoolingK = drawSupercoolingK;
    this.count = new Int32Array(elements);
    this.waterFirst = new Uint8Array(elements);
    this.massKg = new Float64Array(elements * MOST_SHELLS);
    this.wallJ = new Float64Array(elements);
    this.supercoolingK = Float64Array.from({ length: elements }, drawSupercoolingK);
    this.wallSquareM2 = geometry.wallRadiusM ** 2;
    this.areaPerKgM2 = (geometry.inward ? -1 : 1) / (ICE_DENSITY * Math.PI * geometry.lengthM);
    // ln(r2/r1)/(2πkL) written with squared radii: ln(r2²/r1²)/(4πkL), k = 1 here.
    this.perLogKPerW = 1 / (4 * Math.PI * geometry.lengthM);
  }

  /** Squared radius at a mass counted from the wall; kept off the axis of a container. */
  private squareM2(fromWallKg: number): number {
    const square = this.wallSquareM2 + fromWallKg * this.areaPerKgM2;
    return square > 1e-3 * this.wallSquareM2 ? square : 1e-3 * this.wallSquareM2;
  }

  /** Resistance of a shell at the wall, K/W, of ice or water. */
  wallShellKPerW(kg: number, water: boolean): number {
    const logs = Math.abs(Math.log(this.squareM2(kg) / this.wallSquareM2));
    const conductivity = water ? WATER_CONDUCTIVITY * this.geometry.waterGain : ICE_CONDUCTIVITY;
    return (logs * this.perLogKPerW) / conductivity;
  }

  /** Area of the outermost face, m². */
  outerAreaM2(i: number): number {
    return 2 * Math.PI * Math.sqrt(this.squareM2(this.totalKg(i))) * this.geometry.lengthM;
  }

  totalKg(i: number): number {
    let sum = 0;
    for (let s = i * MOST_SHELLS, end = s + this.count[i]; s < end; s++) sum += this.massKg[s];
    return sum;
  }

  iceKg(i: number): number {
    let sum = 0;
    const start = i * MOST_SHELLS;
    for (let s = start + this.waterFirst[i], end = start + this.count[i]; s < end; s += 2) {
      sum += this.massKg[s];
    }
    return sum;
  }

  waterKg(i: number): number {
    return this.totalKg(i) - this.iceKg(i);
  }

  firstKg(i: number): number {
    return this.massKg[i * MOST_SHELLS];
  }

  /** True when the element is one shell of ice on the wall. */
  isPlainIce(i: number): boolean {
    return this.count[i] === 1 && this.waterFirst[i] === 0;
  }

  fill(i: number, shellsKg: readonly number[], waterFirst: boolean): void {
    this.count[i] = shellsKg.length;
    this.waterFirst[i] = waterFirst ? 1 : 0;
    this.massKg.set(shellsKg, i * MOST_SHELLS);
    this.wallJ[i] = 0;
  }

  /**
   * Heat from a source at `sourceC` through `conductanceWPerK` into the stack over `dtS`, J (negative when it freezes).
   * The outermost ice is not grown here: what lies beyond it is the bank's affair. With no conductance a warm shell at
   * the wall still gives its heat to the ice round it.
   */
  exchange(i: number, sourceC: number, conductanceWPerK: number, dtS: number): number {
    if (this.count[i] === 0) return 0;
    if (this.waterFirst[i] === 1) return this.throughWater(i, sourceC, conductanceWPerK, dtS);
    if (!(conductanceWPerK > 0)) return 0;
    return sourceC < 0
      ? this.growFirstIce(i, sourceC, conductanceWPerK, dtS)
      : this.meltAtWall(i, sourceC, conductanceWPerK, dtS);
  }

  private throughWater(i: number, sourceC: number, conductanceWPerK: number, dtS: number): number {
    const base = i * MOST_SHELLS;
    const molten = this.count[i] === 1;
    if (!molten && sourceC < 0 && this.wallJ[i] <= conductanceWPerK * -sourceC * dtS) {
      return this.freezeAtWall(i, sourceC, conductanceWPerK, dtS);
    }
    const kg = this.massKg[base];
    const halfKPerW = Math.max(0.5 * this.wallShellKPerW(kg, true), 1e-6);
    const fromSource = 1 / (1 / conductanceWPerK + halfKPerW);
    const toIce = molten ? 0 : 1 / halfKPerW;
    const capacity = kg * CP;
    // Implicit in the shell's temperature: a fresh annulus is far thinner than an explicit step would bear.
    const shellC = (this.wallJ[i] + dtS * fromSource * sourceC) / (capacity + dtS * (fromSource + toIce));
    const inJ = fromSource * (sourceC - shellC) * dtS;
    this.wallJ[i] += inJ;
    if (molten) this.freezeWhenSupercooled(i);
    else this.meltSecond(i, toIce * shellC * dtS);
    return inJ;
  }

  private meltSecond(i: number, offeredJ: number): void {
    if (!(offeredJ > 0)) return;
    const base = i * MOST_SHELLS;
    const kg = Math.min(offeredJ / FUSION_J, this.massKg[base + 1]);
    this.massKg[base] += kg;
    this.massKg[base + 1] -= kg;
    this.wallJ[i] -= kg * FUSION_J;
    if (this.massKg[base + 1] < GONE_KG) this.closeSecond(i);
  }

  /** A molten element below its supercooling limit jumps back to 0 °C; the ice appears at the wall. */
  private freezeWhenSupercooled(i: number): void {
    const base = i * MOST_SHELLS;
    const kg = this.massKg[base];
    if (this.wallJ[i] > -this.supercoolingK[i] * kg * CP) return;
    const iceKg = -this.wallJ[i] / FUSION_J;
    this.fill(i, [iceKg, kg - iceKg], false);
    this.supercoolingK[i] = this.drawSupercoolingK();
  }

  /** Ice sets on the wall inside a water shell that lies under older ice. */
  private freezeAtWall(i: number, sourceC: number, conductanceWPerK: number, dtS: number): number {
    const base = i * MOST_SHELLS;
    const outJ = conductanceWPerK * -sourceC * dtS;
    const iceKg = Math.min((outJ - this.wallJ[i]) / FUSION_J, this.massKg[base]);
    if (iceKg < GONE_KG) {
      this.wallJ[i] -= outJ;
      return -outJ;
    }
    const takenJ = this.wallJ[i] + iceKg * FUSION_J;
    this.wallJ[i] = 0;
    this.massKg[base] -= iceKg;
    this.insertFirst(i, iceKg);
    if (this.massKg[base + 1] < GONE_KG) this.closeSecond(i);
    return -takenJ;
  }

  private growFirstIce(i: number, sourceC: number, conductanceWPerK: number, dtS: number): number {
    if (this.count[i] < 2) return 0;
    const base = i * MOST_SHELLS;
    const resistance = 1 / conductanceWPerK + this.wallShellKPerW(this.massKg[base], false);
    const kg = Math.min((-sourceC / resistance) * (dtS / FUSION_J), this.massKg[base + 1]);
    this.massKg[base] += kg;
    this.massKg[base + 1] -= kg;
    if (this.massKg[base + 1] < GONE_KG) this.closeSecond(i);
    return -kg * FUSION_J;
  }

  private meltAtWall(i: number, sourceC: number, conductanceWPerK: number, dtS: number): number {
    const base = i * MOST_SHELLS;
    const kg = Math.min((conductanceWPerK * sourceC * dtS) / FUSION_J, this.massKg[base]);
    if (!(kg > 0)) return 0;
    this.massKg[base] -= kg;
    this.insertFirst(i, kg);
    if (this.massKg[base + 1] < GONE_KG) this.closeSecond(i);
    return kg * FUSION_J;
  }

  /** A new shell at the wall, of the other kind than the first. With no room left the two next to it coalesce. */
  private insertFirst(i: number, kg: number): void {
    const base = i * MOST_SHELLS;
    if (this.count[i] === MOST_SHELLS) this.coalesceOuter(i);
    for (let s = base + this.count[i]; s > base; s--) this.massKg[s] = this.massKg[s - 1];
    this.massKg[base] = kg;
    this.count[i] += 1;
    this.waterFirst[i] ^= 1;
  }

  /** Puts the fourth shell to the second and the fifth to the third: same kinds, same masses, two shells fewer. */
  private coalesceOuter(i: number): void {
    const base = i * MOST_SHELLS;
    this.massKg[base + 1] += this.massKg[base + 3];
    this.massKg[base + 2] += this.massKg[base + 4];
    this.massKg[base + 3] = this.massKg[base + 5];
    this.count[i] -= 2;
  }

  /** The second shell is gone: its remains and the third shell go to the first, and their latent heat is settled. */
  private closeSecond(i: number): void {
    const base = i * MOST_SHELLS;
    const remnantKg = this.massKg[base + 1];
    const gained = this.count[i] > 2 ? this.massKg[base + 2] : 0;
    this.massKg[base] += remnantKg + gained;
    if (this.waterFirst[i] === 1) this.wallJ[i] -= remnantKg * FUSION_J;
    else this.releasedJ += remnantKg * FUSION_J;
    const drop = this.count[i] > 2 ? 2 : 1;
    for (let s = base + 1; s + drop < base + this.count[i]; s++) this.massKg[s] = this.massKg[s + drop];
    this.count[i] -= drop;
  }

  /**
   * Removes ice from the outermost face by `kg` (all of it at most) and gives what was removed. When the ice is gone
   * the water shell under it opens to the bank: its mass is `freedKg`, its enthalpy `freedJ`.
   */
  meltOuter(i: number, kg: number): number {
    const last = i * MOST_SHELLS + this.count[i] - 1;
    const taken = Math.min(kg, this.massKg[last]);
    this.massKg[last] -= taken;
    this.freedKg = 0;
    this.freedJ = 0;
    if (this.massKg[last] < GONE_KG) this.dropOuter(i);
    return taken;
  }

  /** A stack on a tube whose last ice has gone is open water: gives it to the bank by `freedKg`, `freedJ`. */
  openMolten(i: number): boolean {
    if (this.count[i] !== 1 || this.waterFirst[i] !== 1) return false;
    this.freedKg = this.massKg[i * MOST_SHELLS];
    this.freedJ = this.wallJ[i];
    this.clear(i);
    return true;
  }

  private clear(i: number): void {
    this.count[i] = 0;
    this.waterFirst[i] = 0;
    this.wallJ[i] = 0;
  }

  private dropOuter(i: number): void {
    const base = i * MOST_SHELLS;
    const last = base + this.count[i] - 1;
    this.freedKg = this.massKg[last];
    this.freedJ = -this.massKg[last] * FUSION_J;
    this.count[i] -= 1;
    if (this.count[i] > 0) {
      this.freedKg += this.massKg[last - 1];
      this.count[i] -= 1;
      if (this.count[i] === 0) this.freedJ += this.wallJ[i];
    }
    if (this.count[i] === 0) this.clear(i);
  }

  /** Grows the outermost ice, starting it when the wall is bare. */
  growOuter(i: number, kg: number): void {
    const base = i * MOST_SHELLS;
    if (this.count[i] === 0) {
      this.clear(i);
      this.count[i] = 1;
      this.massKg[base] = 0;
    }
    this.massKg[base + this.count[i] - 1] += kg;
  }
}

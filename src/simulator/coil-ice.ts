/**
 * Ice on a coil in water: what a cold or warm tube does to the shells round it, and what the water outside does.
 * Tube forms of bank; containers are simpler and stand in `bank.ts`.
 */
import { FUSION_J_PER_KG, WATER_CP_J_PER_KG_K } from '../physics/water.ts';
import { LAYERS, type BankShape } from './bank-shape.ts';
import type { Layers } from './layers.ts';
import type { Shells } from './shells.ts';

const CP = WATER_CP_J_PER_KG_K;
const FUSION_J = FUSION_J_PER_KG;
/** Part of the allowed ice at which neighbouring cylinders begin to touch. No source. */
const TOUCHING = 0.7;

/** Natural convection at a bare tube far colder than the water, W/(m² K); common practice, no source. */
const BARE_FILM_W_PER_M2_K = 350;

/**
 * Conductance that cannot carry a capacity past its source within a step, W/K: C/dt (1 − e^(−x)), x = G dt/C. For a
 * small x its Padé form G/(1 + x/2) is within x²/12, here below 0.02 %, and spares the exponential in the inner loop.
 */
export function boundedWPerK(capacityJPerK: number, conductanceWPerK: number, dtS: number): number {
  const x = (conductanceWPerK * dtS) / capacityJPerK;
  return x < 0.05 ? conductanceWPerK / (1 + 0.5 * x) : (capacityJPerK / dtS) * -Math.expm1(-x);
}

export class CoilIce {
  /** Set from outside as the plant ages. */
  meltFactor = 1;
  private readonly shape: BankShape;
  private readonly layers: Layers;
  private readonly shells: Shells;

  constructor(shape: BankShape, layers: Layers, shells: Shells) {
    this.shape = shape;
    this.layers = layers;
    this.shells = shells;
  }

  bareWPerK(insideWPerK: number, flowing: boolean): number {
    const film = Math.max(BARE_FILM_W_PER_M2_K, this.filmWPerM2K(flowing));
    return 1 / (1 / insideWPerK + 1 / (film * this.shape.bareAreaM2));
  }

  icyWPerK(i: number, insideWPerK: number): number {
    if (this.shells.waterFirst[i] === 1) return insideWPerK;
    const first = this.shells.firstKg(i);
    return this.openFace(i) / (1 / insideWPerK + this.shells.wallShellKPerW(first, false));
  }

  /** Part of the ice face that still borders on water: it shrinks once neighbouring cylinders touch. */
  private openFace(i: number): number {
    const filled = this.shells.totalKg(i) / this.shape.mostIceKg;
    return filled <= TOUCHING ? 1 : Math.max(0.1, 1 - 1.2 * (filled - TOUCHING));
  }

  private filmWPerM2K(flowing: boolean): number {
    const { throughTube, filmWPerM2K, stillFilmWPerM2K } = this.shape;
    return (flowing && !throughTube ? filmWPerM2K : stillFilmWPerM2K) * this.meltFactor;
  }

  /** Heat from a source inside the tube into one layer, J; ice grows, melts and thins as it follows. */
  wall(
    i: number,
    sourceC: number,
    insideWPerK: number,
    dtS: number,
    flowing: boolean,
    seeded: boolean,
  ): number {
    if (this.shells.count[i] === 0) return this.bareWall(i, sourceC, insideWPerK, dtS, flowing, seeded);
    const freezes = insideWPerK > 0 && sourceC < 0 && this.shells.isPlainIce(i);
    let inJ = 0;
    let outwardW = 0;
    if (freezes) outwardW = -sourceC * this.icyWPerK(i, insideWPerK);
    else inJ = this.shells.exchange(i, sourceC, insideWPerK, dtS);
    if (this.shells.openMolten(i)) {
      this.takeFreed(i);
      return inJ;
    }
    return inJ - this.outerFace(i, outwardW, dtS, flowing);
  }

  private takeFreed(i: number): void {
    this.layers.waterKg[i] += this.shells.freedKg;
    this.layers.energyJ[i] += this.shells.freedJ;
  }

  /** Water outside against the heat drawn inward through the ice; gives the heat drawn, J. */
  private outerFace(i: number, outwardW: number, dtS: number, flowing: boolean): number {
    const face = this.filmWPerM2K(flowing) * this.shells.outerAreaM2(i) * this.openFace(i);
    const fromWaterJ =
      boundedWPerK(this.layers.waterKg[i] * CP, face, dtS) * this.layers.temperatureC(i) * dtS;
    const netKg = (outwardW * dtS - fromWaterJ) / FUSION_J;
    if (netKg > 0) {
      const grownKg = Math.min(netKg, Math.max(0, this.layers.waterKg[i] - this.leastWaterKg()));
      this.shells.growOuter(i, grownKg);
      this.layers.waterKg[i] -= grownKg;
      this.layers.energyJ[i] -= fromWaterJ;
      return fromWaterJ + grownKg * FUSION_J;
    }
    const meltedKg = this.shells.meltOuter(i, -netKg);
    this.layers.waterKg[i] += meltedKg + this.shells.freedKg;
    this.layers.energyJ[i] += this.shells.freedJ - outwardW * dtS - meltedKg * FUSION_J;
    return outwardW * dtS;
  }

  private leastWaterKg(): number {
    return (0.05 * this.shape.freeKg) / LAYERS;
  }

  private bareWall(
    i: number,
    sourceC: number,
    insideWPerK: number,
    dtS: number,
    flowing: boolean,
    seeded: boolean,
  ): number {
    if (!(insideWPerK > 0)) return 0;
    const waterC = this.layers.temperatureC(i);
    const bare = this.bareWPerK(insideWPerK, flowing);
    const faceC = sourceC + ((waterC - sourceC) * bare) / insideWPerK;
    if (seeded && faceC < 0) {
      this.shells.growOuter(i, 0);
      return -this.outerFace(i, -sourceC * insideWPerK, dtS, flowing);
    }
    const inJ = boundedWPerK(this.layers.waterKg[i] * CP, bare, dtS) * (sourceC - waterC) * dtS;
    this.layers.energyJ[i] += inJ;
    return inJ;
  }
}

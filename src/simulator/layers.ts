/**
 * The free water of a bank in horizontal layers, index 0 at the top: through-flow, conduction between layers, and
 * overturning by true density. Water is densest at 4 °C, so colder water may float and the bottom may rest near 4 °C
 * under ice. Enthalpy is kept, temperature follows: E = m cp T, zero at liquid 0 °C.
 */
import { waterDensityKgPerM3, WATER_CP_J_PER_KG_K } from '../physics/water.ts';

const CP = WATER_CP_J_PER_KG_K;
const WATER_CONDUCTIVITY = 0.56;
const LOWEST_C = -15;
const STEPS_PER_K = 10;
const DENSITY = Float64Array.from({ length: 95 * STEPS_PER_K + 2 }, (_, i) =>
  waterDensityKgPerM3(LOWEST_C + i / STEPS_PER_K),
);
/** Two layers overturn when the upper one is denser by more than this, kg/m³: 0.02 K at 5 °C. */
const OVERTURN = 3e-4;

/** Density of water, interpolated in a table of 0.1 K steps; error below 1e-5 kg/m³ of the formula's. */
function densityKgPerM3(waterC: number): number {
  const at = Math.max(0, Math.min(DENSITY.length - 1.001, (waterC - LOWEST_C) * STEPS_PER_K));
  const i = at | 0;
  return DENSITY[i] + (at - i) * (DENSITY[i + 1] - DENSITY[i]);
}

export class Layers {
  readonly waterKg: Float64Array;
  readonly energyJ: Float64Array;
  private readonly conductWPerK: number;
  /** Brine has no density maximum in the range of a bank: the warmer layer always floats. */
  private readonly brine: boolean;

  constructor(
    count: number,
    totalKg: number,
    waterC: number,
    areaM2: number,
    heightM: number,
    brine: boolean,
  ) {
    this.waterKg = new Float64Array(count).fill(totalKg / count);
    this.energyJ = new Float64Array(count).fill((totalKg / count) * CP * waterC);
    this.conductWPerK = (WATER_CONDUCTIVITY * areaM2 * count) / heightM;
    this.brine = brine;
  }

  temperatureC(i: number): number {
    return this.energyJ[i] / (this.waterKg[i] * CP);
  }

  totalKg(): number {
    let sum = 0;
    for (let i = 0; i < this.waterKg.length; i++) sum += this.waterKg[i];
    return sum;
  }

  totalJ(): number {
    let sum = 0;
    for (let i = 0; i < this.energyJ.length; i++) sum += this.energyJ[i];
    return sum;
  }

  meanC(): number {
    return this.totalJ() / (this.totalKg() * CP);
  }

  /** Water in at the top, out at the bottom, each layer well mixed; implicit, so any flow is stable. Gives °C leaving. */
  flow(kg: number, enteringC: number): number {
    let inC = enteringC;
    for (let i = 0; i < this.waterKg.length; i++) {
      const layerKg = this.waterKg[i];
      const outC = (this.energyJ[i] / CP + kg * inC) / (layerKg + kg);
      this.energyJ[i] = layerKg * CP * outC;
      inC = outC;
    }
    return inC;
  }

  conduct(dtS: number): void {
    for (let i = 0; i + 1 < this.waterKg.length; i++) {
      const heatJ = this.conductWPerK * (this.temperatureC(i + 1) - this.temperatureC(i)) * dtS;
      this.energyJ[i] += heatJ;
      this.energyJ[i + 1] -= heatJ;
    }
  }

  /** Mixes neighbours until none floats on a lighter one. */
  overturn(): void {
    const last = this.waterKg.length - 1;
    let budget = 4 * last;
    for (let i = 0; i < last && budget > 0; budget--) {
      if (this.isUnstable(i)) {
        this.mixPair(i);
        i = i > 0 ? i - 1 : 1;
      } else {
        i++;
      }
    }
  }

  private isUnstable(i: number): boolean {
    const upperC = this.temperatureC(i);
    const lowerC = this.temperatureC(i + 1);
    if (this.brine) return upperC < lowerC - 0.02;
    return densityKgPerM3(upperC) > densityKgPerM3(lowerC) + OVERTURN;
  }

  private mixPair(i: number): void {
    const share = this.waterKg[i] / (this.waterKg[i] + this.waterKg[i + 1]);
    const bothJ = this.energyJ[i] + this.energyJ[i + 1];
    this.energyJ[i] = bothJ * share;
    this.energyJ[i + 1] = bothJ - this.energyJ[i];
  }

  /** Moves water between neighbours until each layer again holds its share beside the solids in it. */
  settle(solidKg: Float64Array): void {
    const count = this.waterKg.length;
    let all = this.totalKg();
    for (let i = 0; i < count; i++) all += solidKg[i];
    for (let i = 0; i + 1 < count; i++) {
      const excess = this.waterKg[i] - Math.max(0.02 * (all / count), all / count - solidKg[i]);
      const from = excess > 0 ? i : i + 1;
      const moved = excess > 0 ? excess : Math.max(excess, -0.9 * this.waterKg[i + 1]);
      const movedJ = moved * CP * this.temperatureC(from);
      this.waterKg[i] -= moved;
      this.waterKg[i + 1] += moved;
      this.energyJ[i] -= movedJ;
      this.energyJ[i + 1] += movedJ;
    }
  }
}

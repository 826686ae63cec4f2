/**
 * The true ice machine: the published low-temperature R-22 compressor map, scaled to the nameplate, met with what the
 * coil sees. Above −17.8 °C of suction the map's cubic is extrapolated; over −30 … 0 °C and 20 … 60 °C capacity and
 * power keep the right slopes there (tested), which is all that a nameplate-scaled machine needs.
 */
import type { SiteConfig } from '../config.ts';
import { evaluateMap, LOW_TEMPERATURE_R22, type MapCoefficients } from '../physics/refrigeration.ts';

/** Condensing above the air that takes the heat, at rated heat; common practice, no source. */
const PINCH_K = 10;
/** Head-pressure control: condensing is not let below this; and the valve's highest evaporating temperature. */
const LEAST_CONDENSING_C = 20;
const MOST_EVAPORATING_C = 0;
/** Low-pressure cut-out. */
const LEAST_EVAPORATING_C = -35;
/** Capacity comes up with this time constant after a start, s. */
const START_S = 45;
const CUT_OUT_S = 300;
/** Superheat of the vapour leaving the coil, K. */
const SUPERHEAT_K = 5;

export class CondensingUnit {
  on = false;
  /** Running: switched on, and no cut-out open. */
  running = false;
  tripped = false;
  powerW = 0;
  evaporatingC = MOST_EVAPORATING_C;
  condensingC = LEAST_CONDENSING_C;
  /** Temperature at which the coil takes its heat. */
  coolantC = 0;
  copFactor = 1;
  capacityFactor = 1;
  readonly superheatK = SUPERHEAT_K;
  private readonly capacityScale: number;
  private readonly powerScale: number;
  private readonly ratedRejectedW: number;
  private readonly mostCondensingC: number;
  private readonly capacity = new Float64Array(4);
  private readonly power = new Float64Array(4);
  private runS = 0;
  private cutOutS = 0;
  private rejectedW = 0;

  constructor(chiller: SiteConfig['chiller'], mostCondensingC: number) {
    const rated = [chiller.ratedEvaporatingC, chiller.ratedOutdoorC + PINCH_K] as const;
    this.capacityScale = chiller.iceMakingW / evaluateMap(LOW_TEMPERATURE_R22.coolingW, ...rated);
    this.powerScale = chiller.powerW / evaluateMap(LOW_TEMPERATURE_R22.powerW, ...rated);
    this.ratedRejectedW = chiller.iceMakingW + chiller.powerW;
    this.mostCondensingC = mostCondensingC;
  }

  /** Seconds since it began to run. */
  runningS(): number {
    return this.running ? this.runS : 0;
  }

  /**
   * One step before the coil is solved: cut-outs, condensing temperature from the air that takes the heat.
   * A cut-out holds it off for five minutes; that of high pressure is told by `tripped`.
   */
  prepare(dtS: number, rejectAirC: number, powered: boolean): void {
    this.cutOutS = Math.max(0, this.cutOutS - dtS);
    if (this.cutOutS === 0) this.tripped = false;
    this.condensingC = Math.max(
      LEAST_CONDENSING_C,
      rejectAirC + PINCH_K * Math.max(0.3, this.rejectedW / this.ratedRejectedW),
    );
    if (this.on && this.condensingC > this.mostCondensingC) {
      this.tripped = true;
      this.cutOutS = CUT_OUT_S;
    }
    this.running = this.on && powered && this.cutOutS === 0;
    this.runS = this.running ? this.runS + dtS : 0;
    if (this.running) this.foldCondensing();
    else this.rest();
  }

  private rest(): void {
    this.powerW = 0;
    this.rejectedW = 0;
    this.evaporatingC = MOST_EVAPORATING_C;
  }

  /** Its start was not carried: the overload protector holds it off for five minutes. */
  stall(): void {
    this.cutOutS = CUT_OUT_S;
    this.running = false;
    this.runS = 0;
    this.rest();
  }

  /** The maps at this condensing temperature, as cubics of the evaporating temperature. */
  private foldCondensing(): void {
    fold(LOW_TEMPERATURE_R22.coolingW, this.condensingC, this.capacity);
    fold(LOW_TEMPERATURE_R22.powerW, this.condensingC, this.power);
  }

  /**
   * Evaporating temperature at which the machine's capacity is what the coil can give:
   * capacity(Te) = Σ G_i (T_i − Te). Newton from the last answer; the left side rises, the right side falls with Te.
   */
  solve(coilWPerK: ArrayLike<number>, faceC: ArrayLike<number>): void {
    let sum = 0;
    let weighted = 0;
    for (let i = 0; i < coilWPerK.length; i++) {
      sum += coilWPerK[i];
      weighted += coilWPerK[i] * faceC[i];
    }
    this.meet(sum, weighted);
  }

  /** The same for one stream: conductance and conductance times temperature. */
  meet(sumWPerK: number, weightedW: number): void {
    if (!this.running) return;
    const scale = this.capacityScale * this.capacityFactor * -Math.expm1(-this.runS / START_S);
    const c = this.capacity;
    let x = this.evaporatingC;
    for (let turn = 0; turn < 6; turn++) {
      const excess = scale * (c[0] + x * (c[1] + x * (c[2] + x * c[3]))) - (weightedW - sumWPerK * x);
      const step = excess / (scale * (c[1] + x * (2 * c[2] + x * 3 * c[3])) + sumWPerK);
      x = Math.max(-45, Math.min(30, x - step));
      if (Math.abs(step) < 1e-3) break;
    }
    this.evaporatingC = Math.min(MOST_EVAPORATING_C, x);
    this.settle(sumWPerK, weightedW, x, scale);
  }

  private settle(sumWPerK: number, weightedW: number, x: number, scale: number): void {
    if (x < LEAST_EVAPORATING_C) {
      this.cutOutS = CUT_OUT_S;
      this.running = false;
      this.rest();
      return;
    }
    const te = this.evaporatingC;
    const c = this.capacity;
    const capacityW = scale * (c[0] + te * (c[1] + te * (c[2] + te * c[3])));
    // Starved by its valve at high water temperatures, the coil on the whole is warmer than the evaporating part.
    this.coolantC = x > te ? (weightedW - capacityW) / sumWPerK : te;
    const p = this.power;
    const mapped = p[0] + te * (p[1] + te * (p[2] + te * p[3]));
    this.powerW = (this.powerScale * mapped) / this.copFactor;
  }

  /** Told what the coil really gave, W: next step's condensing temperature follows. */
  tookW(heatW: number): void {
    this.rejectedW = this.running ? heatW + this.powerW : 0;
  }

  rejectsW(): number {
    return this.rejectedW;
  }
}

/** A map with its discharge temperature put in: cubic in suction, constant term first. */
function fold(map: MapCoefficients, discharge: number, into: Float64Array): void {
  const [c1, c2, c3, c4, c5, c6, c7, c8, c9, c10] = map;
  const d = discharge;
  into[0] = c1 + d * (c3 + d * (c6 + d * c10));
  into[1] = c2 + d * (c5 + d * c9);
  into[2] = c4 + d * c8;
  into[3] = c7;
}

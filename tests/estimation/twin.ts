/**
 * A small plant for the estimator's tests: two well-mixed bodies of water round ice, written out by hand and stepped
 * every ten seconds. It shares no line with the estimator or the plant models.
 */
import type { PointId, Reading } from '../../src/points.ts';
import { createRandom } from '../../src/numerics/random.ts';

export interface TwinOptions {
  readonly iceKg: number;
  readonly seed?: number;
  readonly offsetK?: Readonly<Partial<Record<string, number>>>;
  readonly points?: readonly PointId[];
}

const CP = 4200;
const FUSION = 333_430;
const WATER_KG = 240;
const MOST_KG = 150;

export const T0 = Date.UTC(2026, 6, 1);

export class Twin {
  iceKg: number;
  waterC = 0.3;
  atMs = T0;
  pump = false;
  chiller = false;
  readonly roomC = 25;
  private readonly options: TwinOptions;
  private readonly random;

  constructor(options: TwinOptions) {
    this.options = options;
    this.iceKg = options.iceKg;
    this.random = createRandom(options.seed ?? 1);
  }

  onHandKwh(): number {
    const liquid = WATER_KG - this.iceKg;
    return Math.max(0, this.iceKg * FUSION + WATER_KG * CP * 10 - liquid * CP * this.waterC) / 3.6e6;
  }

  enteringC(): number {
    return this.pump ? this.waterC + (150 * (this.roomC - this.waterC)) / 840 : this.roomC;
  }

  /** Runs on and gives the readings of every half minute. */
  run(minutes: number): Reading[] {
    const readings: Reading[] = [];
    for (let step = 0; step < minutes * 6; step++) {
      this.step(10);
      this.atMs += 10_000;
      if (step % 3 === 2) readings.push(...this.read());
    }
    return readings;
  }

  private step(dtS: number): void {
    const liquidKg = WATER_KG - this.iceKg;
    const melts = 450 * Math.sqrt(Math.max(0, this.iceKg) / (MOST_KG / 2)) * (this.pump ? 1 : 0.35);
    const loopW = this.pump ? 840 * (this.enteringC() - this.waterC) : 0;
    const leakW = 2.2 * (22 - this.waterC);
    const toIceW = Math.min(melts * this.waterC, (this.iceKg * FUSION) / dtS);
    const freezeW = this.chiller ? 950 : 0;
    const bare = this.iceKg <= 0 && this.waterC > 0;
    const waterW = loopW + leakW - toIceW - (bare ? freezeW : 0);
    this.waterC += (waterW * dtS) / (liquidKg * CP);
    this.iceKg += (((bare ? 0 : freezeW) - toIceW) * dtS) / FUSION;
  }

  private read(): Reading[] {
    const shown: Partial<Record<PointId, number>> = {
      'leaving-water': this.waterC,
      'entering-water': this.enteringC(),
      'chiller-power': this.chiller ? 500 : 1.5,
      'pump-power': this.pump ? 45 : 0.5,
      'loop-flow': this.pump ? 12 : 0,
      'bank-surround': 22,
      'room-temperature': this.roomC,
      'outdoor-temperature': 25,
      'bank-middle': this.waterC,
      'bank-level': 750 + (1000 * this.iceKg * (1 / 916.72 - 1 / 999.84)) / 0.32,
    };
    const wanted = this.options.points ?? (Object.keys(shown) as PointId[]);
    return wanted.flatMap((point) => {
      const value = shown[point];
      if (value === undefined) return [];
      const thermometer = point.includes('water') || point.startsWith('bank-m');
      const noise = thermometer ? 0.03 * this.random.normal() : 0;
      return [{ point, atMs: this.atMs, value: value + noise + (this.options.offsetK?.[point] ?? 0) }];
    });
  }
}

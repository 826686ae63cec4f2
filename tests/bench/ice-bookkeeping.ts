/**
 * Energy bookkeeping alone, the published practice to beat: nameplate COP × chiller power, less flow × cp × rise (or
 * the nameplate's coil), less the nameplate's leak. It is even told the truth at the start, and kept within the bank.
 */
import { discharges, type Command } from '../../src/commands.ts';
import type { SiteConfig } from '../../src/config.ts';
import { bankLimits, type BankLimits } from '../../src/plant/bank.ts';
import { deliveryModel, type DeliveryModel } from '../../src/plant/delivery.ts';
import type { PointName, Reading } from '../../src/points.ts';

export class Bookkeeping {
  onHandKwh: number;
  private readonly site: SiteConfig;
  private readonly limits: BankLimits;
  private readonly delivery: DeliveryModel;
  private readonly last = new Map<string, number>();

  constructor(site: SiteConfig, startKwh: number) {
    this.site = site;
    this.limits = bankLimits(site);
    this.delivery = deliveryModel(site);
    this.onHandKwh = startKwh;
  }

  private heard(point: PointName): number | null {
    return this.last.get(point) ?? null;
  }

  advance(readings: readonly Reading[], spanMs: number, ordered: Command): void {
    for (const { point, value } of readings) {
      if (value !== 85 && value !== -127) this.last.set(point, value);
    }
    const hours = spanMs / 3.6e6;
    const leakW = this.limits.leakW(this.onHandKwh, this.heard('bank-surround') ?? 22);
    const changeKwh = ((this.chargedW(ordered) - this.meltedW(ordered) - leakW) * hours) / 1000;
    this.onHandKwh = Math.min(this.limits.capacityKwh, Math.max(0, this.onHandKwh + changeKwh));
  }

  private chargedW(ordered: Command): number {
    const { iceMakingW, powerW, runningAboveW } = this.site.chiller;
    const heardW = this.heard('chiller-power');
    if (heardW === null) return ordered.startsWith('charge') ? iceMakingW : 0;
    return heardW > runningAboveW ? (heardW * iceMakingW) / powerW : 0;
  }

  private meltedW(ordered: Command): number {
    const pumpW = this.heard('pump-power');
    const runs = pumpW === null ? discharges(ordered) : pumpW > this.site.delivery.runningAboveW;
    if (!runs) return 0;
    const flow = this.heard('loop-flow') ?? this.site.delivery.flowLPerMin;
    const loopWPerK = (flow / 60) * this.delivery.loopCpJPerKgK;
    const leavingC = this.heard('leaving-water') ?? this.heard('bank-bottom') ?? 4;
    const enteringC = this.heard('entering-water');
    if (enteringC !== null) return loopWPerK * (enteringC - leavingC);
    const roomC = this.heard('room-temperature') ?? 24;
    return this.delivery.coilWPerK(loopWPerK, 1) * (roomC - leavingC);
  }
}

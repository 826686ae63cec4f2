/**
 * One strategy on one truth plant for some weeks, through the daemon's own tick and interlocks. What differs is who
 * estimates, who foresees and who decides.
 */
import type { Strategy } from '../../src/commands.ts';
import { startState, stagesOf, tick } from '../../src/cycle.ts';
import type { CycleState, Moment, Planned, Stages } from '../../src/cycle-values.ts';
import { limitAt } from '../../src/comfort-hours.ts';
import type { IceEstimate, Estimator } from '../../src/estimation/types.ts';
import type { Forecaster } from '../../src/forecasting/forecaster.ts';
import type { SiteConfig } from '../../src/config.ts';
import { MACHINES } from '../../src/order.ts';
import type { LivePoint, PointId, Reading } from '../../src/points.ts';
import { createSimulator, type Simulator } from '../../src/simulator/simulator.ts';
import type { Truth } from '../../src/simulator/truth.ts';
import type { WeatherSource } from '../../src/simulator/weather.ts';
import { demandSoFar, type DemandState } from '../../src/tariff/demand.ts';
import type { EnergySlot } from '../../src/tariff/energy.ts';
import { priceParts } from '../../src/tariff/prices.ts';
import { DAY_MS, HOUR_MS, MINUTE_MS, toWall } from '../../src/time.ts';
import { TICK_MS, type PlanCase } from './plan-cases.ts';

const QUARTER_MS = 15 * MINUTE_MS;

/** What a strategy may look at when it decides. */
export interface Sight {
  readonly nowMs: number;
  readonly stages: Stages;
  readonly state: CycleState;
  readonly moment: Moment;
  readonly truth: Truth;
  readonly demand: DemandState | null;
  /** The house's mean power by quarter hour of the day, learned on the way; null before the first day is over. */
  readonly houseW: ((atMs: number) => number) | null;
}

export interface Decider {
  readonly strategy: Strategy;
  /** Null where the true ice is told, or nothing is learned of the weather; all else comes from the same faulty probes. */
  readonly estimator: Estimator | null;
  readonly forecaster: Forecaster | null;
  /** Asked at every quarter hour; null leaves the last decision in force. */
  decide(sight: Sight): Planned | null;
}

export interface Outcome {
  /** Electricity of the cooling plant, starts and demand charge; on an island what fuel and battery wear came to. */
  readonly money: number;
  readonly warmKh: number;
  readonly starts: number;
  readonly iceLeftKwh: number;
  readonly batteryLeftKwh: number;
  /** What really was, by quarter hour from the start of the run. */
  readonly quarters: readonly Quarter[];
}

export interface Quarter {
  readonly outdoorC: number;
  readonly deliveredW: number;
  readonly latentW: number;
  readonly roomC: number;
  readonly home: boolean;
}

export interface LoopOptions {
  readonly on: PlanCase;
  readonly seed: number;
  readonly weather: WeatherSource;
  readonly startMs: number;
  /** From then on money and warm hours count, and until when. */
  readonly countFromMs: number;
  readonly endMs: number;
  /** Lives on uncounted to here, so that what really was is known beyond the end. */
  readonly reachMs: number;
}

export function runLoop(options: LoopOptions, decider: Decider): Outcome {
  return new Loop(options, decider).run();
}

class Loop {
  private readonly o: LoopOptions;
  private readonly decider: Decider;
  private readonly config: SiteConfig;
  private readonly simulator: Simulator;
  private readonly stages: Stages;
  private readonly live: Partial<Record<PointId, LivePoint>> = {};
  private state: CycleState;
  private nowMs: number;
  private before: Truth;
  private counted = { money: 0, warmKh: 0, starts: 0 };
  private readonly quarters: Quarter[] = [];
  private quarterFrom: Truth;
  private energy: EnergySlot[] = [];
  private quarterWattMs = 0;

  constructor(o: LoopOptions, decider: Decider) {
    this.o = o;
    this.decider = decider;
    this.config = o.on.config;
    const { startMs, weather, seed } = o;
    this.simulator = createSimulator({ site: this.config, seed, startMs, weather });
    this.before = this.simulator.truth();
    this.quarterFrom = this.before;
    const { estimator, forecaster } = decider;
    this.stages = stagesOf(this.config, estimator ?? this.told(), forecaster ?? nobody);
    this.state = startState(startMs, null);
    this.nowMs = startMs;
  }

  run(): Outcome {
    const { countFromMs, endMs, reachMs } = this.o;
    while (this.nowMs < countFromMs) this.cycle();
    const first = this.before;
    while (this.nowMs < endMs) this.cycle();
    const last = this.before;
    while (this.nowMs < reachMs) this.cycle();
    return {
      ...this.counted,
      money: this.counted.money + this.demandMoney(),
      iceLeftKwh: last.iceOnHandKwh - first.iceOnHandKwh,
      batteryLeftKwh: this.batteryKwh(last) - this.batteryKwh(first),
      quarters: this.quarters,
    };
  }

  private cycle(): void {
    this.nowMs += TICK_MS;
    const readings = this.simulator.advance(this.nowMs).toSorted((a, b) => a.atMs - b.atMs);
    const truth = this.simulator.truth();
    this.hear(readings);
    const moment = this.moment();
    if (this.state.planned === null) this.stages.estimator.advance(this.nowMs, readings.splice(0), null);
    if (this.newQuarter() || this.state.planned === null) this.decide(moment, truth);
    const { strategy } = this.decider;
    const ticked = tick(this.stages, this.state, moment, { wish: null, strategy }, readings);
    this.state = ticked.state;
    for (const machine of MACHINES) this.simulator.switch(machine, ticked.order.switches[machine]);
    this.count(truth);
    this.before = truth;
  }

  /** Whether a quarter hour has begun since the tick before. */
  private newQuarter(): boolean {
    return Math.floor(this.nowMs / QUARTER_MS) !== Math.floor((this.nowMs - TICK_MS) / QUARTER_MS);
  }

  private decide(moment: Moment, truth: Truth): void {
    const { nowMs, stages, state } = this;
    const demand = this.config.power.tariff?.demand ? demandSoFar(this.config, this.energy, nowMs) : null;
    const planned = this.decider.decide({
      nowMs,
      stages,
      state,
      moment,
      truth,
      demand,
      houseW: this.houseProfile(),
    });
    if (planned) this.state = { ...state, planned };
  }

  private hear(readings: readonly Reading[]): void {
    for (const { point, atMs, value } of readings) this.live[point] = { value, atMs };
    for (const [point, spec] of Object.entries(this.config.points)) {
      const known = this.live[point as PointId];
      if (!known || known.value === null || this.nowMs - known.atMs <= spec.maxAgeMs) continue;
      this.live[point as PointId] = { value: null, reason: 'stale', last: null };
    }
  }

  private moment(): Moment {
    return {
      nowMs: this.nowMs,
      live: { ...this.live },
      clock: { state: 'set', why: '' },
      brokerConnected: true,
    };
  }

  private count(truth: Truth): void {
    const { before, o, config, nowMs } = this;
    const { totals } = truth;
    const plantKwh =
      totals.chillerKwh +
      totals.pumpKwh +
      totals.fanKwh -
      (before.totals.chillerKwh + before.totals.pumpKwh + before.totals.fanKwh);
    this.quarterWattMs += plantKwh * 3.6e9 + truth.houseW * TICK_MS;
    if (this.newQuarter()) this.closeQuarter(truth);
    if (nowMs <= o.countFromMs || nowMs > o.endMs) return;
    const started = truth.chillerW > 60 && before.chillerW <= 60;
    if (started) this.counted.starts += 1;
    this.counted.money += (started ? config.chiller.startCost : 0) + this.electricityMoney(truth, plantKwh);
    if (!truth.home) return;
    const limitC = limitAt(config.comfort, config.site.zone, nowMs);
    this.counted.warmKh += Math.max(0, mean(truth.roomsC) - limitC) * (TICK_MS / HOUR_MS);
  }

  private electricityMoney(truth: Truth, plantKwh: number): number {
    const { island } = this.config.power;
    if (!island) return plantKwh * this.buyNow();
    const given = Math.max(0, this.batteryKwh(this.before) - this.batteryKwh(truth));
    const made = (truth.generatorW * TICK_MS) / 3.6e9;
    return given * (island.battery?.wear ?? 0) + made * (island.generator?.price ?? 0);
  }

  private price: { untilMs: number; buy: number } = { untilMs: 0, buy: 0 };

  private buyNow(): number {
    const fromMs = this.nowMs - TICK_MS;
    if (fromMs >= this.price.untilMs) {
      const [part] = priceParts(this.config, fromMs, fromMs + HOUR_MS, this.o.on.dated(fromMs));
      this.price = { untilMs: Math.min(part.endMs, fromMs + QUARTER_MS), buy: part.buy };
    }
    return this.price.buy;
  }

  private readonly house = { kwh: new Float64Array(96), days: new Float64Array(96) };

  private houseProfile(): Sight['houseW'] {
    const { kwh, days } = this.house;
    if (days.some((count) => count === 0)) return null;
    const quarterOf = (atMs: number): number => Math.floor(atMs / QUARTER_MS) % 96;
    return (atMs) => (kwh[quarterOf(atMs)] / days[quarterOf(atMs)]) * 4000;
  }

  private batteryKwh(truth: Truth): number {
    return ((this.config.power.island?.battery?.capacityKwh ?? 0) * truth.batteryPct) / 100;
  }

  private closeQuarter(truth: Truth): void {
    const from = this.quarterFrom;
    const hours = (truth.atMs - from.atMs) / HOUR_MS;
    this.quarters.push({
      outdoorC: (truth.outdoorC + from.outdoorC) / 2,
      deliveredW: ((truth.totals.deliveredKwh - from.totals.deliveredKwh) / hours) * 1000,
      latentW: ((truth.totals.latentKwh - from.totals.latentKwh) / hours) * 1000,
      roomC: mean(truth.roomsC),
      home: truth.home,
    });
    const importKwh = this.quarterWattMs / 3.6e9;
    this.energy.push({ startMs: from.atMs, endMs: truth.atMs, importKwh, exportKwh: 0, heardMs: QUARTER_MS });
    const quarter = Math.floor(from.atMs / QUARTER_MS) % 96;
    this.house.kwh[quarter] += truth.totals.houseKwh - from.totals.houseKwh;
    this.house.days[quarter] += 1;
    this.quarterWattMs = 0;
    this.quarterFrom = truth;
  }

  /** The demand charge of every month on house and plant together, for the part of the month that counted. */
  private demandMoney(): number {
    const terms = this.config.power.tariff?.demand;
    if (!terms) return 0;
    const peaks = new Map<number, number>();
    const days = new Map<number, number>();
    for (const slot of this.energy) {
      if (slot.startMs < this.o.countFromMs || slot.startMs >= this.o.endMs) continue;
      const month = toWall(this.config.site.zone, slot.startMs).month;
      const kw = slot.importKwh / ((slot.endMs - slot.startMs) / HOUR_MS);
      peaks.set(month, Math.max(peaks.get(month) ?? 0, kw));
      days.set(month, (days.get(month) ?? 0) + (slot.endMs - slot.startMs) / DAY_MS);
    }
    return [...peaks].reduce(
      (sum, [month, kw]) => sum + (kw * terms.price * (days.get(month) ?? 0)) / 30.5,
      0,
    );
  }

  /** An estimator that is told the truth. */
  private told(): Estimator {
    return {
      advance: () => undefined,
      estimate: () => toldIce(this.before, this.config),
      memory: () => ({}),
      anchor: () => undefined,
    };
  }
}

const nobody: Forecaster = {
  observe: () => undefined,
  forecast: () => {
    throw new Error('nobody forecasts here');
  },
  memory: () => null,
};

export const mean = (values: readonly number[]): number =>
  values.reduce((sum, value) => sum + value, 0) / values.length;

export function toldIce(truth: Truth, config: SiteConfig): IceEstimate {
  return {
    atMs: truth.atMs,
    iceOnHandKwh: truth.iceOnHandKwh,
    lowKwh: truth.iceOnHandKwh,
    highKwh: truth.iceOnHandKwh,
    iceKg: truth.iceKg,
    inventoryPct: truth.inventoryPct,
    phase: truth.iceKg > 0 ? 'mixed' : 'all-water',
    waterC: truth.layersC.length > 0 ? mean(truth.layersC) : 0,
    heatLeakWPerK: config.bank.heatLeakWPerK,
    heatLeakSd: 0,
    chargingW: truth.iceMakingW,
    dischargingW: truth.loopW,
    leakW: truth.leakW,
    predictedLeavingC: null,
    learned: [],
    probes: [],
    helpsMost: null,
    innovation: {},
  };
}

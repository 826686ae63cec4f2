/**
 * A plant that does not exist, for demo, tests and benchmarks: a truth model of its own with probes that report it
 * imperfectly. It shares no model with the estimator and planner, so that a closed loop proves something.
 */
import type { SiteConfig } from '../config.ts';
import { createRandom } from '../numerics/random.ts';
import type { Machine } from '../order.ts';
import { isPointId, pointSpec, type PointId, type Reading } from '../points.ts';
import { MINUTE_MS } from '../time.ts';
import { VAPOUR_J_PER_KG } from './bank.ts';
import type { Balance } from './ledger.ts';
import type { TruthOverrides, TruthParameters } from './parameters.ts';
import { Plant, type PlantStart } from './plant.ts';
import { ordinaryProbe, type ProbeOverrides } from './probe-faults.ts';
import { Probe } from './probes.ts';
import { viewsOf, type View } from './sight.ts';
import { truthOf, type Truth } from './truth.ts';
import type { WeatherSource } from './weather.ts';

export const STEP_MS = 10_000;
const STEP_S = STEP_MS / 1000;
/** Weather, sun and people are looked at this often. */
const LOOK_MS = 2 * MINUTE_MS;

export interface SimulatorOptions {
  readonly site: SiteConfig;
  readonly seed: number;
  readonly startMs: number;
  readonly weather: WeatherSource;
  readonly truth?: TruthOverrides;
  readonly probes?: ProbeOverrides;
  readonly start?: PlantStart;
}

export interface Simulator {
  /** Takes effect with the next step, within ten seconds. */
  switch(machine: Machine, on: boolean): void;
  /** Runs on to an instant; gives the readings that arrive until then in order of arrival, faults and all. */
  advance(toMs: number): Reading[];
  truth(): Truth;
  balance(): Balance;
  nowMs(): number;
  /** What the seed and the caller made of the plant. */
  parameters(): TruthParameters;
  /** Overrides the household's habits; null gives them back. */
  setOccupied(occupied: boolean | null): void;
  openWindow(open: boolean): void;
  wetTray(wet: boolean): void;
  /** The pump draws air: it runs, takes little power and moves nothing. */
  dryPump(dry: boolean): void;
}

export function createSimulator(options: SimulatorOptions): Simulator {
  return new TruthSimulator(options);
}

interface Late {
  readonly reading: Reading;
  readonly arrivesMs: number;
}

class TruthSimulator implements Simulator {
  private readonly plant: Plant;
  private readonly probes: readonly Probe[];
  private readonly switched = new Set<PointId>();
  private steppedMs: number;
  private toMs: number;
  private out: Reading[] = [];
  private late: Late[] = [];

  constructor(o: SimulatorOptions) {
    this.plant = new Plant(o, STEP_S);
    this.steppedMs = o.startMs;
    this.toMs = o.startMs;
    this.probes = buildProbes(o, viewsOf(this.plant));
  }

  switch(machine: Machine, on: boolean): void {
    if (this.plant.on[machine] === on) return;
    this.plant.on[machine] = on;
    this.switched.add(`${machine}-power`);
  }

  advance(toMs: number): Reading[] {
    this.out = [];
    while (this.steppedMs + STEP_MS <= toMs) {
      const fromMs = this.steppedMs;
      if (fromMs % LOOK_MS < STEP_MS) this.plant.look(fromMs);
      this.plant.step(STEP_S);
      this.steppedMs += STEP_MS;
      this.lookAround();
    }
    this.toMs = Math.max(this.toMs, toMs);
    return this.collect(toMs);
  }

  private lookAround(): void {
    for (const probe of this.probes) {
      if (probe.nextMs <= this.steppedMs) probe.look(this.steppedMs, this.report);
      else if (this.switched.size > 0 && this.switched.has(probe.point)) {
        probe.look(this.steppedMs, this.report, true);
      }
    }
    if (this.switched.size > 0) this.switched.clear();
  }

  private readonly report = (reading: Reading, arrivesMs: number): void => {
    if (arrivesMs <= reading.atMs) this.out.push(reading);
    else this.late.push({ reading, arrivesMs });
  };

  /** Merges the readings that came late and are due by now into those that came at once. */
  private collect(toMs: number): Reading[] {
    const due = this.late.filter((one) => one.arrivesMs <= toMs);
    if (due.length === 0) return this.out;
    this.late = this.late.filter((one) => one.arrivesMs > toMs);
    const all = [...this.out.map((reading) => ({ reading, arrivesMs: reading.atMs })), ...due];
    return all.toSorted((a, b) => a.arrivesMs - b.arrivesMs).map((one) => one.reading);
  }

  truth(): Truth {
    return truthOf(this.plant, this.toMs, STEP_S);
  }

  balance(): Balance {
    return this.plant.ledger.balance(this.plant.bank, this.plant.cabin, VAPOUR_J_PER_KG);
  }

  nowMs(): number {
    return this.toMs;
  }

  parameters(): TruthParameters {
    return this.plant.parameters;
  }

  setOccupied(occupied: boolean | null): void {
    this.plant.occupied = occupied;
  }

  openWindow(open: boolean): void {
    this.plant.windowOpen = open;
  }

  wetTray(wet: boolean): void {
    this.plant.trayWet = wet;
  }

  dryPump(dry: boolean): void {
    this.plant.pumpDry = dry;
  }
}

/** One probe for each configured point that the plant can show, each with a stream of its own. */
function buildProbes(o: SimulatorOptions, views: ReadonlyMap<string, View>): Probe[] {
  const random = createRandom(o.seed).fork('probes');
  const surroundC = views.get('bank-surround') ?? ((): number => o.site.bank.surroundC);
  return Object.keys(o.site.points).flatMap((point) => {
    const spec = pointSpec(point);
    if (!spec || !isPointId(point)) return [];
    const stream = random.fork(point);
    const faults = { ...ordinaryProbe(point, spec, stream), ...o.probes?.[point] };
    const own = views.get(faults.swappedWith ?? point);
    return own ? [new Probe(point, { own, surroundC }, faults, stream.fork('run'), o.startMs)] : [];
  });
}

/**
 * Nights of a simulated Juniper as night sheets, for what drift has to live with: weather, people, probes with their errors. The machine is run
 * by a fixed hand, so that no plan stands between a figure and its cause; there is no estimator, because drift reads
 * nothing of it.
 */
import { readFileSync } from 'node:fs';
import type { Command, Mode } from '../../src/commands.ts';
import type { SiteConfig } from '../../src/config.ts';
import type { PointId, Reading } from '../../src/points.ts';
import type { CycleRecord } from '../../src/record.ts';
import { nightSheet, type NightSheet } from '../../src/reports/night.ts';
import { parseSiteFile } from '../../src/site-file.ts';
import type { FactorName } from '../../src/simulator/parameters.ts';
import type { ProbeOverrides } from '../../src/simulator/probe-faults.ts';
import { seededWeather } from '../../src/simulator/seeded-weather.ts';
import { createSimulator, type Simulator, type SimulatorOptions } from '../../src/simulator/simulator.ts';
import {
  DAY_MS,
  MINUTE_MS,
  localMinuteOfDay,
  nightAt,
  nightOf,
  localDate,
  type Night,
} from '../../src/time.ts';

const CYCLE_MS = MINUTE_MS;
/** A summer that the bank is big enough for on most nights: a night that runs out says nothing of the load. */
const HOT_DAY_C = 30;
const SET_POINT_C = 26;

/** A fault that sets in at noon of a night: factors on the true plant, or other probes. */
export interface Fault {
  readonly atNight: number;
  readonly factors: Readonly<Partial<Record<FactorName, number>>>;
  readonly probes?: ProbeOverrides;
  /** Local hours of the evening in which a window now stands open. */
  readonly openHours?: readonly [from: number, to: number];
}

export interface PlantRun {
  readonly seed: number;
  readonly nights: number;
  readonly fault?: Fault;
}

export function juniperSite(): SiteConfig {
  const file = parseSiteFile(readFileSync(new URL('../../config/juniper.yaml', import.meta.url), 'utf8'));
  if (!file.ok) throw new Error('config/juniper.yaml has faults');
  return file.config;
}

/** The points of an instrument set. */
export type Heard = ReadonlySet<PointId>;

export interface NightRecords {
  readonly night: Night;
  readonly records: readonly CycleRecord[];
}

/** One sheet a night, as a plant with these points would have written it; null for all that Juniper has. */
export function* sheetsThrough(nights: Iterable<NightRecords>, heard: Heard | null): Generator<NightSheet> {
  const site = withPoints(juniperSite(), heard);
  let before: readonly CycleRecord[] = [];
  for (const { night, records } of nights) {
    const seen = heard === null ? records : records.map((record) => asHeard(record, heard));
    yield nightSheet({
      site,
      night,
      records: [...before, ...seen],
      plans: [],
      revision: 1,
      issuedMs: night.endMs,
    });
    before = seen;
  }
}

function withPoints(site: SiteConfig, heard: Heard | null): SiteConfig {
  if (heard === null) return site;
  const points = Object.entries(site.points).filter(([point]) => heard.has(point.split('/')[0] as PointId));
  return { ...site, points: Object.fromEntries(points) };
}

function asHeard(record: CycleRecord, heard: Heard): CycleRecord {
  const silent = Object.entries(HEARD).filter(([point]) => !heard.has(point as PointId));
  return { ...record, ...Object.fromEntries(silent.map(([, field]) => [field, null])) };
}

/** The records of each night, from a plant that starts at noon of the first one. */
export function* simulatedRecords(run: PlantRun): Generator<NightRecords> {
  const site = juniperSite();
  const { zone, latitudeDeg, longitudeDeg, elevationM } = site.site;
  const first = nightAt(zone, Date.UTC(2026, 5, 10, 12) + (run.seed % 30) * DAY_MS);
  const options: SimulatorOptions = {
    site,
    seed: run.seed,
    startMs: first.startMs,
    weather: seededWeather({ seed: run.seed + 1, latitudeDeg, longitudeDeg, elevationM, hotDayC: HOT_DAY_C }),
    start: { iceKg: 80 },
  };
  const hand = new Hand(site, createSimulator(options));
  let night = first;
  for (let count = 0; count < run.nights; count++) {
    if (run.fault?.atNight === count) {
      hand.simulator = faulty(options, hand.simulator, run.fault);
      hand.openHours = run.fault.openHours ?? null;
    }
    const records: CycleRecord[] = [];
    for (let atMs = night.startMs + CYCLE_MS; atMs <= night.endMs; atMs += CYCLE_MS)
      records.push(hand.cycle(atMs));
    yield { night, records };
    night = nightOf(zone, localDate(zone, night.endMs));
  }
}

/** The same plant, weather and probes going on from where they are, with a fault. */
function faulty(options: SimulatorOptions, before: Simulator, fault: Fault): Simulator {
  const truth = before.truth();
  const healthy = before.parameters();
  const wanted = new Map<string, number>(Object.entries(fault.factors));
  const factors = Object.entries(healthy).flatMap(([name, value]) => {
    const factor = wanted.get(name);
    return factor === undefined || typeof value !== 'number' ? [] : [[name, value * factor] as const];
  });
  return createSimulator({
    ...options,
    startMs: before.nowMs(),
    truth: { ...healthy, ...Object.fromEntries(factors) },
    ...(fault.probes ? { probes: fault.probes } : {}),
    start: {
      iceKg: truth.iceKg,
      waterC: truth.layersC.reduce((sum, layer) => sum + layer, 0) / truth.layersC.length,
      roomC: truth.roomC,
    },
  });
}

const HEARD: Readonly<Partial<Record<PointId, keyof CycleRecord>>> = {
  'leaving-water': 'leavingWaterC',
  'entering-water': 'enteringWaterC',
  'bank-bottom': 'bankBottomC',
  'bank-surround': 'bankSurroundC',
  'coolant-supply': 'coolantSupplyC',
  'coolant-return': 'coolantReturnC',
  'chiller-power': 'chillerPowerW',
  'pump-power': 'pumpPowerW',
  'fan-power': 'fanPowerW',
  'outdoor-temperature': 'outdoorC',
  'room-temperature': 'roomC',
  'room-humidity': 'roomHumidityPct',
  'outdoor-humidity': 'outdoorHumidityPct',
};

/** Fills the bank in the small hours, cools by a thermostat in the evening. */
class Hand {
  private readonly site: SiteConfig;
  simulator: Simulator;
  openHours: readonly [from: number, to: number] | null = null;
  private readonly last = new Map<string, Reading>();
  private command: Command = 'hold';

  constructor(site: SiteConfig, simulator: Simulator) {
    this.site = site;
    this.simulator = simulator;
  }

  cycle(atMs: number): CycleRecord {
    const { simulator } = this;
    simulator.switch('chiller', this.command === 'charge-now');
    simulator.switch('pump', this.command === 'discharge');
    simulator.switch('fan', this.command === 'discharge');
    const hour = localMinuteOfDay(this.site.site.zone, atMs) / 60;
    simulator.openWindow(this.openHours !== null && hour >= this.openHours[0] && hour < this.openHours[1]);
    const readings = simulator.advance(atMs);
    for (const reading of readings) this.last.set(reading.point, reading);
    const record = this.record(atMs);
    this.command = this.decide(atMs);
    return record;
  }

  private decide(atMs: number): Command {
    const minute = localMinuteOfDay(this.site.site.zone, atMs);
    const { inventoryPct, roomC } = this.seen();
    if (minute >= 15 && minute < 480) {
      const full = this.command === 'charge-now' ? 88 : 60;
      return inventoryPct < full ? 'charge-now' : 'hold';
    }
    if (minute < 990) return 'hold';
    const above = this.command === 'discharge' ? -0.6 : 0;
    return roomC > SET_POINT_C + above ? 'discharge' : 'hold';
  }

  /** The hand looks at the plant itself, so that errors of the estimate do not shape what is estimated. */
  private seen(): { inventoryPct: number; roomC: number } {
    const truth = this.simulator.truth();
    return { inventoryPct: truth.inventoryPct, roomC: this.last.get('room-temperature')?.value ?? 25 };
  }

  private record(atMs: number): CycleRecord {
    const heard = Object.fromEntries(
      Object.entries(HEARD).map(([point, field]) => [field, this.last.get(point)?.value ?? null]),
    );
    return {
      ...EMPTY,
      ...heard,
      roomC: this.meanRoomC(),
      atMs,
      requested: this.command,
      command: this.command,
      mode: MODE_OF[this.command],
    };
  }

  private meanRoomC(): number | null {
    const rooms = [...this.last].flatMap(([point, { value }]) =>
      point.startsWith('room-temperature') ? [value] : [],
    );
    return rooms.length === 0 ? null : rooms.reduce((sum, room) => sum + room, 0) / rooms.length;
  }
}

const MODE_OF: Readonly<Record<Command, Mode>> = {
  hold: 'idle',
  'charge-now': 'charging',
  discharge: 'discharging',
  'charge-and-discharge': 'charging-while-discharging',
};

/** A record that knows nothing yet. */
const EMPTY: CycleRecord = {
  atMs: 0,
  spanMs: CYCLE_MS,
  clock: 'set',
  leavingWaterC: null,
  enteringWaterC: null,
  bankTopC: null,
  bankMiddleC: null,
  bankBottomC: null,
  bankLevelMm: null,
  bankSurroundC: null,
  coolantSupplyC: null,
  coolantReturnC: null,
  loopFlowLPerMin: null,
  chillerPowerW: null,
  pumpPowerW: null,
  fanPowerW: null,
  roomC: null,
  roomHumidityPct: null,
  outdoorC: null,
  outdoorHumidityPct: null,
  panelPowerW: null,
  batteryPct: null,
  generatorPowerW: null,
  housePowerW: null,
  gridPowerW: null,
  pointsStale: '',
  iceOnHandKwh: 0,
  iceOnHandLowKwh: 0,
  iceOnHandHighKwh: 0,
  iceKg: 0,
  inventoryPct: 0,
  phase: 'mixed',
  waterC: 0,
  heatLeakWPerK: 0,
  chargingW: 0,
  dischargingW: 0,
  leakW: 0,
  deliveredW: null,
  latentW: null,
  priceMoneyPerKwh: 0.1,
  pricePeriod: 'low',
  strategy: 'timetable',
  planMadeMs: null,
  planOutcome: 'timetable',
  eveningLoadKwh: null,
  eveningLoadHighKwh: null,
  worthOfIceMoneyPerKwh: null,
  waitCostMoney: null,
  nextChangeMs: null,
  lastsUntilMs: null,
  requested: 'hold',
  command: 'hold',
  reason: '',
  heldBackBy: '',
  wish: 'none',
  wishUntilMs: null,
  mode: 'idle',
  limitC: 26,
  home: true,
  warmKh: 0,
  feelsLikeC: null,
};

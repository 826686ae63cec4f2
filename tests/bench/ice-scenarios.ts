/**
 * Plants for the ice benchmark: every form of bank with every set of sensors, each off from its site file, run through
 * weeks of partial cycles by an operator who does not ask the estimator.
 */
import type { Command } from '../../src/commands.ts';
import { BANK_FORMS, type BankForm, type SiteConfig } from '../../src/config.ts';
import { createRandom, type Random } from '../../src/numerics/random.ts';
import type { PointId, PointName, Reading } from '../../src/points.ts';
import { parseSiteFile } from '../../src/site-file.ts';
import type { TruthOverrides } from '../../src/simulator/parameters.ts';
import type { ProbeOverrides } from '../../src/simulator/probe-faults.ts';
import { seededWeather } from '../../src/simulator/seeded-weather.ts';
import { createSimulator, type Simulator } from '../../src/simulator/simulator.ts';
import { DAY_MS, HOUR_MS, MINUTE_MS } from '../../src/time.ts';

export const SENSOR_SETS = ['a', 'b', 'c', 'd', 'e', 'f'] as const;
export type SensorSet = (typeof SENSOR_SETS)[number];

const AIR: readonly PointName[] = ['outdoor-temperature', 'room-temperature', 'bank-surround'];
const A: readonly PointName[] = [...AIR, 'leaving-water', 'chiller-power'];
const B: readonly PointName[] = [...A, 'entering-water', 'pump-power'];
const C: readonly PointName[] = [...B, 'loop-flow'];
const D: readonly PointName[] = [...C, 'coolant-supply', 'coolant-return'];
const E: readonly PointName[] = [...D, 'bank-level'];
export const HEARD: Readonly<Record<SensorSet, readonly PointName[]>> = {
  a: A,
  b: B,
  c: C,
  d: D,
  e: E,
  f: [...AIR, 'bank-top', 'bank-middle', 'bank-bottom'],
};

export type Pattern = 'partial' | 'deep' | 'mixed';
export type Trouble =
  | 'none'
  | 'wet-insulation'
  | 'tired-machine'
  | 'drifting-probe'
  | 'silences'
  | 'stuck-leaving'
  | 'swapped'
  | 'fallen-entering'
  | 'meter-resets';

export interface Scenario {
  readonly form: BankForm;
  readonly set: SensorSet;
  readonly pattern: Pattern;
  readonly trouble: Trouble;
  /** Whether the estimator is told what was ordered. */
  readonly ordered: boolean;
}

/** Troubles by form (row) and sensor set (column). */
const TROUBLES: Readonly<Record<BankForm, readonly Trouble[]>> = {
  'ice-on-coil-external': ['none', 'tired-machine', 'stuck-leaving', 'none', 'meter-resets', 'none'],
  'ice-on-coil-internal': ['wet-insulation', 'none', 'drifting-probe', 'swapped', 'none', 'silences'],
  'sealed-containers': ['none', 'fallen-entering', 'none', 'silences', 'tired-machine', 'none'],
  'open-tub': ['silences', 'swapped', 'none', 'wet-insulation', 'none', 'none'],
};
const PATTERNS: readonly Pattern[] = ['partial', 'mixed', 'partial', 'deep'];

export function scenarios(): Scenario[] {
  return BANK_FORMS.flatMap((form, row) =>
    SENSOR_SETS.map((set, column): Scenario => ({
      form,
      set,
      pattern: PATTERNS[(row + column) % PATTERNS.length],
      trouble: TROUBLES[form][column],
      // Rimehold knows what it ordered; only the sets without a pump plug lean on it.
      ordered: set === 'f' || set === 'a',
    })),
  );
}

const SITE = (form: BankForm): string => `
site: { id: bench, name: Bench, zone: Europe/Madrid, latitude: 38.4 deg, longitude: -2.9 deg, elevation: 1080 m }
points:
${[...new Set([...E, ...HEARD.f])].map((point) => `  ${point}: { topic: bench/${point}, max-age: PT15M }`).join('\n')}
bank:
  form: ${form}
  water: 240 L
  most-ice: 150 kg
  heat-leak: 2.2 W/K
  melt-conductance: 450 W/K
  freeze-conductance: 180 W/K
  water-area: 0.32 m2
  empty-level: 750 mm
chiller: { ice-making: 1.05 kW, power: 0.55 kW, minimum-on: PT20M }
delivery: { flow: 12 L/min }
cabin: { floor: 52 m2, heat-loss: 115 W/K, heat-capacity: 3 kWh/K, solar-aperture: 3 m2 }
power: { tariff: { default: 0.2 } }
`;

export function siteFor(form: BankForm): SiteConfig {
  const parsed = parseSiteFile(SITE(form));
  if (!parsed.ok)
    throw new Error(parsed.faults.map((fault) => `${fault.path}: ${fault.sentence}`).join('\n'));
  return parsed.config;
}

/** What the plant is off by: uniform within the limits that the estimate has to bear. */
function truthOf(random: Random, trouble: Trouble): TruthOverrides {
  const within = (part: number): number => 1 + part * (2 * random.next() - 1);
  const driftPerDay =
    trouble === 'wet-insulation'
      ? { leakFactor: 0.05 }
      : trouble === 'tired-machine'
        ? { copFactor: -0.01, capacityFactor: -0.01 }
        : {};
  return { copFactor: within(0.15), leakFactor: within(0.4), flowFactor: within(0.2), driftPerDay };
}

const WET: readonly PointId[] = [
  'leaving-water',
  'entering-water',
  'bank-top',
  'bank-middle',
  'bank-bottom',
  'coolant-supply',
  'coolant-return',
];

function probesOf(random: Random, trouble: Trouble, startMs: number): ProbeOverrides {
  const silent = trouble === 'silences' ? { dropoutPerDay: 4, dropoutS: 2400, glitchPerDay: 6 } : {};
  const probes: Partial<Record<PointId, object>> = {};
  for (const point of WET) probes[point] = { offsetK: random.next() - 0.5, ...silent };
  const add = (point: PointId, faults: object): void => {
    probes[point] = { ...probes[point], ...faults };
  };
  if (trouble === 'drifting-probe') add('leaving-water', { offsetDriftPerDay: 0.03 });
  if (trouble === 'stuck-leaving') add('leaving-water', { stuckFromMs: startMs + 8 * DAY_MS });
  if (trouble === 'fallen-entering') add('entering-water', { fallenOutAtMs: startMs + 5 * DAY_MS });
  if (trouble === 'swapped') {
    add('entering-water', { swappedWith: 'leaving-water' });
    add('leaving-water', { swappedWith: 'entering-water' });
  }
  return probes;
}

export interface Bench {
  readonly site: SiteConfig;
  readonly simulator: Simulator;
  readonly operator: Operator;
  readonly startMs: number;
  heard(readings: readonly Reading[]): Reading[];
}

const START_MS = Date.UTC(2026, 5, 20, 10);

export function build(scenario: Scenario, seed: number): Bench {
  const random = createRandom(seed).fork(`${scenario.form} ${scenario.set}`);
  const site = siteFor(scenario.form);
  const startMs = START_MS + Math.floor(20 * random.next()) * DAY_MS;
  const simulator = createSimulator({
    site,
    seed: Math.floor(1e9 * random.next()),
    startMs,
    weather: seededWeather({
      seed: Math.floor(1e9 * random.next()),
      latitudeDeg: 38.4,
      longitudeDeg: -2.9,
      elevationM: 1080,
    }),
    truth: truthOf(random.fork('truth'), scenario.trouble),
    probes: probesOf(random.fork('probes'), scenario.trouble, startMs),
    start: { iceKg: 150 * (0.1 + 0.6 * random.next()) },
  });
  const resets = scenario.trouble === 'meter-resets' ? random.fork('resets') : null;
  const names = new Set<string>(HEARD[scenario.set]);
  return {
    site,
    simulator,
    startMs,
    operator: new Operator(scenario.pattern, random.fork('operator')),
    heard: (readings) =>
      withResets(
        readings.filter(({ point }) => names.has(point)),
        resets,
      ),
  };
}

/** A plug that restarts now and then: nothing for a reading, then a spike. */
function withResets(readings: Reading[], random: Random | null): Reading[] {
  if (!random) return readings;
  return readings.map((reading) => {
    if (reading.point !== 'chiller-power' || random.next() > 0.01) return reading;
    return { ...reading, value: random.next() < 0.7 ? 0 : 15_000 };
  });
}

interface Day {
  readonly chargeFromH: number;
  readonly chargeTo: number;
  readonly meltFromH: number;
  readonly meltTo: number;
  readonly topUpFromH: number | null;
  readonly topUpH: number;
  readonly noonMelt: boolean;
}

/** Decides by the truth, so that the estimate's errors do not shape the test. Inventories are parts of a full bank. */
export class Operator {
  private readonly pattern: Pattern;
  private readonly random: Random;
  private day: Day | null = null;
  private dayNumber = -1;
  private charged = false;
  private melted = false;

  constructor(pattern: Pattern, random: Random) {
    this.pattern = pattern;
    this.random = random;
  }

  /** `hour` is local solar time of the day, `dayNumber` counts noon to noon. */
  command(hour: number, dayNumber: number, inventory: number, onHandPart: number): Command {
    if (dayNumber !== this.dayNumber) {
      this.dayNumber = dayNumber;
      this.day = this.draw();
      this.charged = false;
      this.melted = false;
    }
    const day = this.day as Day;
    const charging = this.charges(day, hour, inventory);
    const melting = this.melts(day, hour, inventory, onHandPart);
    if (charging) return melting ? 'charge-and-discharge' : 'charge-now';
    return melting ? 'discharge' : 'hold';
  }

  private charges(day: Day, hour: number, inventory: number): boolean {
    if (inventory >= day.chargeTo) this.charged = true;
    const night = (hour - day.chargeFromH + 24) % 24 < 9 && !this.charged;
    const top = day.topUpFromH !== null && (hour - day.topUpFromH + 24) % 24 < day.topUpH && inventory < 0.95;
    return night || top;
  }

  private melts(day: Day, hour: number, inventory: number, onHandPart: number): boolean {
    const left = day.meltTo > 0 ? inventory - day.meltTo : onHandPart - 0.04;
    if (left <= 0) this.melted = true;
    const evening = hour >= day.meltFromH && hour < 23.5 && !this.melted;
    return evening || (day.noonMelt && hour >= 13 && hour < 14.2 && inventory > 0.2);
  }

  private draw(): Day {
    const r = this.random;
    const deep = this.pattern === 'deep' || (this.pattern === 'mixed' && r.next() < 0.3);
    return {
      chargeFromH: 23.6 + 2.4 * r.next(),
      chargeTo: deep ? 0.85 + 0.13 * r.next() : 0.55 + 0.3 * r.next(),
      meltFromH: 16.5 + 2.5 * r.next(),
      meltTo: deep ? 0 : 0.12 + 0.28 * r.next(),
      topUpFromH: r.next() < 0.3 ? 11 + 6 * r.next() : null,
      topUpH: 1 + 2 * r.next(),
      noonMelt: r.next() < 0.25,
    };
  }
}

/** Local solar hour and noon-to-noon day of the bench's site. */
export function solarTime(atMs: number): { hour: number; day: number } {
  const localMs = atMs - 0.19 * HOUR_MS;
  return { hour: (localMs % DAY_MS) / HOUR_MS, day: Math.floor((localMs - 12 * HOUR_MS) / DAY_MS) };
}

export const CYCLE_MS = MINUTE_MS;

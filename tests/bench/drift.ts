/**
 * `bench drift`: how soon a change in the plant is told from the night sheets, and how often one is told that is not there.
 *
 * Simulated Junipers: weeks of health, then a fault in the true plant, then ten nights; the sheets are read by the same code that
 * reads real ones. Each plant is looked at through three sets of instruments, since a fault that a set cannot show must be
 * said to be out of sight and not be guessed. Healthy plants of 214 nights each give the false alarms; a plant that is only set
 * up again in the same state, as the simulator has to be for a fault, is the control.
 */
import type { PointId } from '../../src/points.ts';
import { driftOf, type DriftFinding, type Signature } from '../../src/reports/drift.ts';
import type { NightSheet } from '../../src/reports/night.ts';
import { watchOf } from '../../src/reports/watch.ts';
import type { BenchOptions, BenchResult } from './bench.ts';
import { sheetsThrough, simulatedRecords, type Fault, type Heard, type NightRecords } from './drift-plant.ts';

const TO_TELL_NIGHTS = 10;
const FAULT_AT = 32;
const HEALTHY_NIGHTS = 214;

interface PlantCase {
  /** Null for the control. */
  readonly signature: Signature | null;
  readonly what: string;
  readonly fault: Omit<Fault, 'atNight'>;
  /** Counts in `detected`. */
  readonly asked: boolean;
}

/** Faults of the true plant. A soaked insulation doubles the leak; a drawn probe is within 0.5 K, this one leaves that. */
const CASES: readonly PlantCase[] = [
  { signature: 'fouled-coil', what: 'coil -15 %', fault: { factors: { coilFactor: 0.85 } }, asked: true },
  { signature: 'tired-pump', what: 'flow -15 %', fault: { factors: { flowFactor: 0.85 } }, asked: true },
  { signature: 'dirty-condenser', what: 'power +18 %', fault: { factors: { copFactor: 0.85 } }, asked: true },
  {
    signature: 'low-refrigerant',
    what: 'capacity -15 %',
    fault: { factors: { capacityFactor: 0.85 } },
    asked: true,
  },
  { signature: 'wet-insulation', what: 'leak doubled', fault: { factors: { leakFactor: 2 } }, asked: true },
  {
    signature: 'open-door-habit',
    what: 'window open 19 to 22 h',
    fault: { factors: {}, openHours: [19, 22] },
    asked: true,
  },
  {
    signature: 'lying-probe',
    what: 'bank-bottom reads 0.8 K high',
    fault: { factors: {}, probes: { 'bank-bottom': { offsetK: 0.8 } } },
    asked: true,
  },
  { signature: 'wet-insulation', what: 'leak +15 %', fault: { factors: { leakFactor: 1.15 } }, asked: false },
  { signature: null, what: 'nothing, set up again', fault: { factors: {} }, asked: false },
];

const NO_COOLANT: readonly PointId[] = [
  'leaving-water',
  'entering-water',
  'bank-bottom',
  'bank-surround',
  'chiller-power',
  'pump-power',
  'fan-power',
  'room-temperature',
  'room-humidity',
  'outdoor-temperature',
  'outdoor-humidity',
];
const LEAST: readonly PointId[] = [
  'leaving-water',
  'chiller-power',
  'room-temperature',
  'outdoor-temperature',
];

interface InstrumentSet {
  readonly name: string;
  readonly heard: Heard | null;
}

const SETS: readonly InstrumentSet[] = [
  { name: 'juniper', heard: null },
  { name: 'no coolant', heard: new Set(NO_COOLANT) },
  { name: 'required', heard: new Set(LEAST) },
];

export async function run(options: BenchOptions): Promise<BenchResult> {
  const { seed, quick } = options;
  const scores: Score[] = [];
  for (const one of CASES) scores.push(...(await playCase(one, seed, quick ? 2 : 8)));
  const alarms = await playHealthy(seed, quick ? 2 : 12);
  const asked = scores.filter((score) => score.set === SETS[0].name && score.asked);
  const mean = (pick: (score: Score) => number): number =>
    rounded(asked.reduce((sum, score) => sum + pick(score), 0) / asked.length);
  return {
    title: 'Drift over nights: from figures of the sheets to a named trouble',
    budget: `every trouble that the instruments can show told within ${TO_TELL_NIGHTS} nights; at most 1 false alarm in 200 nights`,
    columns: [
      'instruments',
      'trouble',
      'change',
      'told %',
      'named first %',
      'median nights',
      'out of sight because',
    ],
    rows: [
      ...scores.map(rowOf),
      ...alarms.map(({ set, per200 }) => [
        set,
        'none',
        `healthy: ${rounded(per200)} false alarms in 200 nights`,
        '',
        '',
        '',
        '',
      ]),
    ],
    figures: {
      detected: mean((score) => score.told),
      namedFirst: mean((score) => score.named),
      falseAlarmsPer200: rounded(alarms[0].per200),
      falseAlarmsWorstSetPer200: rounded(Math.max(...alarms.map((one) => one.per200))),
      medianDelayNights: medianOf(asked.flatMap((score) => score.delays)),
      outOfSight: scores.filter((score) => score.outOfSight !== null && score.signature !== null).length,
      toldThoughOutOfSight: scores.filter((score) => score.outOfSight !== null && score.told > 0).length,
      healthyNights: alarms[0].nights,
    },
  };
}

interface Score {
  readonly set: string;
  readonly signature: Signature | null;
  readonly what: string;
  readonly asked: boolean;
  readonly told: number;
  readonly named: number;
  readonly delays: readonly number[];
  readonly outOfSight: string | null;
}

async function playCase(one: PlantCase, seed: number, seeds: number): Promise<Score[]> {
  const tallies = SETS.map((): { delays: number[]; named: number; outOfSight: string | null } => ({
    delays: [],
    named: 0,
    outOfSight: null,
  }));
  for (let i = 0; i < seeds; i++) {
    const nights = FAULT_AT + TO_TELL_NIGHTS;
    const fault = { ...one.fault, atNight: FAULT_AT };
    const records = [...simulatedRecords({ seed: seed * 100 + 50 + i, nights, fault })];
    for (const [s, set] of SETS.entries()) tally(tallies[s], one, sheetsOf(records, set));
    await Promise.resolve();
  }
  return tallies.map(({ delays, named, outOfSight }, s) => ({
    ...one,
    set: SETS[s].name,
    told: delays.length / seeds,
    named: named / seeds,
    delays,
    outOfSight,
  }));
}

function tally(
  into: { delays: number[]; named: number; outOfSight: string | null },
  { signature }: PlantCase,
  sheets: readonly NightSheet[],
): void {
  const findings = troubles(driftOf(sheets));
  const right = firstTold(sheets, findings, (found) => signature === null || found.signature === signature);
  const any = firstTold(sheets, findings, () => true);
  if (right !== null) {
    into.delays.push(right);
    if (any !== null && right <= any) into.named++;
  }
  const watch = watchOf(sheets).find((one) => one.signature === signature);
  if (watch !== undefined && watch.sight !== 'watched') into.outOfSight ??= watch.because;
}

function sheetsOf(records: readonly NightRecords[], { heard }: InstrumentSet): NightSheet[] {
  return [...sheetsThrough(records, heard)];
}

/** How many nights it took to tell, the fault's own night counted; null when it was not told. */
function firstTold(
  sheets: readonly NightSheet[],
  findings: readonly DriftFinding[],
  counts: (found: DriftFinding) => boolean,
): number | null {
  const start = sheets[FAULT_AT].night.date;
  const told = findings
    .filter((found) => found.toldOn >= start && counts(found))
    .map((found) => found.toldOn);
  if (told.length === 0) return null;
  const first = told.reduce((a, b) => (b < a ? b : a));
  return sheets.findIndex((sheet) => sheet.night.date === first) - FAULT_AT + 1;
}

async function playHealthy(
  seed: number,
  plants: number,
): Promise<{ set: string; per200: number; nights: number }[]> {
  const alarms = SETS.map(() => 0);
  for (let plant = 0; plant < plants; plant++) {
    const records = [...simulatedRecords({ seed: seed * 100 + plant, nights: HEALTHY_NIGHTS })];
    for (const [s, set] of SETS.entries()) alarms[s] += troubles(driftOf(sheetsOf(records, set))).length;
    await Promise.resolve();
  }
  const nights = plants * HEALTHY_NIGHTS;
  return SETS.map(({ name }, s) => ({ set: name, nights, per200: (alarms[s] / nights) * 200 }));
}

function troubles(found: readonly DriftFinding[]): DriftFinding[] {
  return found.filter((finding) => finding.signature !== null);
}

function rowOf({ set, signature, what, told, named, delays, outOfSight }: Score): (string | number)[] {
  return [
    set,
    signature ?? 'control',
    what,
    told * 100,
    signature === null ? '' : named * 100,
    medianOf(delays),
    outOfSight ?? '',
  ];
}

function medianOf(values: readonly number[]): number | string {
  const sorted = values.toSorted((a, b) => a - b);
  return sorted.length === 0 ? '-' : sorted[sorted.length >> 1];
}

function rounded(value: number): number {
  return Math.round(value * 1000) / 1000;
}

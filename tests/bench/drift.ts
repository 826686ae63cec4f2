/**
 * `bench drift`: how soon a change in the plant is told from the night sheets, and how often one is told that is not there.
 *
 * Simulated Junipers come first: weeks of health, then a fault in the true plant, then ten nights; the sheets are read by the same code that
 * reads real ones. Their healthy nights also give the noise of each figure, and many seeded histories with that noise, with and
 * without a change of 15 %, say how often chance alone raises an alarm and how sure 15 % is.
 */
import { driftOf, type DriftFinding, type Signature } from '../../src/reports/drift.ts';
import type { SeriesName } from '../../src/reports/drift-series.ts';
import type { NightSheet } from '../../src/reports/night.ts';
import { driftingSheets, type Noises } from '../reports/drift-story.ts';
import type { BenchOptions, BenchResult } from './bench.ts';
import { LEARNING_NIGHTS, noiseOf } from './drift-noise.ts';
import { simulatedNights, type Fault } from './drift-plant.ts';

const TO_TELL_NIGHTS = 10;
const FAULT_AT = 32;
const [UP, DOWN] = [Math.log(1.15), Math.log(0.85)];

interface PlantCase {
  readonly signature: Signature;
  readonly what: string;
  readonly fault: Omit<Fault, 'atNight'>;
}

/** Faults of the true plant. A soaked insulation doubles the leak; a drawn probe is within 0.5 K, this one leaves that. */
const PLANT_CASES: readonly PlantCase[] = [
  { signature: 'fouled-coil', what: 'coil -15 %', fault: { factors: { coilFactor: 0.85 } } },
  { signature: 'tired-pump', what: 'flow -15 %', fault: { factors: { flowFactor: 0.85 } } },
  { signature: 'dirty-condenser', what: 'power +18 %', fault: { factors: { copFactor: 0.85 } } },
  { signature: 'low-refrigerant', what: 'capacity -15 %', fault: { factors: { capacityFactor: 0.85 } } },
  { signature: 'wet-insulation', what: 'leak doubled', fault: { factors: { leakFactor: 2 } } },
  {
    signature: 'open-door-habit',
    what: 'window open 19 to 22 h',
    fault: { factors: {}, openHours: [19, 22] },
  },
  {
    signature: 'lying-probe',
    what: 'bank-bottom reads 0.8 K high',
    fault: { factors: {}, probes: { 'bank-bottom': { offsetK: 0.8 } } },
  },
];

type By = Readonly<Partial<Record<SeriesName, number>>>;

interface FigureCase {
  readonly signature: Signature;
  readonly what: string;
  readonly by: By;
}

const FIGURE_CASES: readonly FigureCase[] = [
  { signature: 'fouled-coil', what: 'coil -15 %', by: { coil: DOWN } },
  { signature: 'tired-pump', what: 'flow -15 %', by: { flow: DOWN, coil: -DOWN } },
  {
    signature: 'dirty-condenser',
    what: 'power +15 %, ice per kWh -15 %',
    by: { 'machine-power': UP, cop: DOWN },
  },
  { signature: 'low-refrigerant', what: 'coolant and ice per kWh -15 %', by: { coolant: DOWN, cop: DOWN } },
  { signature: 'wet-insulation', what: 'leak +15 %', by: { leak: UP } },
  { signature: 'open-door-habit', what: 'load +15 %', by: { load: UP } },
];

export async function run(options: BenchOptions): Promise<BenchResult> {
  const { seed, quick } = options;
  const healthy = await nightsOf(seed, quick ? 1 : 3, quick ? 44 : 84);
  const plantScores = await playPlants(seed, quick ? 1 : 2);
  const noise = noiseOf(healthy);
  const figureScores = FIGURE_CASES.map((one) => playFigure(one, noise, seed, quick ? 20 : 60));
  const healthyNights = healthy.reduce((sum, sheets) => sum + sheets.length - LEARNING_NIGHTS, 0);
  const healthyAlarms = healthy.reduce((sum, sheets) => sum + troubles(driftOf(sheets)).length, 0);
  const share = (scores: readonly Score[], pick: (score: Score) => number): number =>
    rounded(scores.reduce((sum, score) => sum + pick(score), 0) / scores.length);
  return {
    title: 'Drift over nights: from figures of the sheets to a named trouble',
    budget: `told within ${TO_TELL_NIGHTS} nights; at most 1 false alarm in 200 nights`,
    columns: ['', 'trouble', 'change', 'sd', 'likeness', 'told %', 'named first %', 'median nights'],
    rows: [
      ...plantScores.map((score) => ['plants', ...rowOf(score, null)]),
      ...figureScores.map((score) => ['figures', ...rowOf(score, noise)]),
    ],
    figures: {
      detected: share(plantScores, (score) => score.told),
      namedFirst: share(plantScores, (score) => score.named),
      falseAlarmsPer200: rounded(quietAlarms(noise, seed, quick ? 10 : 40)),
      falseAlarmsPer200Simulated: rounded((healthyAlarms / healthyNights) * 200),
      medianDelayNights: medianOf(plantScores.flatMap((score) => score.delays)),
      figuresDetected15Pct: share(figureScores, (score) => score.told),
      healthyNights,
    },
  };
}

async function nightsOf(seed: number, plants: number, nights: number): Promise<NightSheet[][]> {
  const out: NightSheet[][] = [];
  for (let plant = 0; plant < plants; plant++) {
    out.push([...simulatedNights({ seed: seed * 100 + plant, nights })]);
    await Promise.resolve();
  }
  return out;
}

interface Score {
  readonly signature: Signature;
  readonly what: string;
  readonly figure: SeriesName | null;
  readonly told: number;
  readonly named: number;
  readonly delays: readonly number[];
}

async function playPlants(seed: number, seeds: number): Promise<Score[]> {
  const scores: Score[] = [];
  for (const { signature, what, fault } of PLANT_CASES) {
    const delays: number[] = [];
    let named = 0;
    for (let i = 0; i < seeds; i++) {
      const plant = {
        seed: seed * 100 + 50 + i,
        nights: FAULT_AT + TO_TELL_NIGHTS,
        fault: { ...fault, atNight: FAULT_AT },
      };
      const sheets = [...simulatedNights(plant)];
      const right = firstTold(sheets, FAULT_AT, (found) => found.signature === signature);
      const other = firstTold(sheets, FAULT_AT, (found) => found.signature !== null);
      if (right !== null) {
        delays.push(right.nights);
        if (other === null || right.nights <= other.nights) named++;
      }
      await Promise.resolve();
    }
    scores.push({ signature, what, figure: null, told: delays.length / seeds, named: named / seeds, delays });
  }
  return scores;
}

function playFigure(one: FigureCase, noise: Noises, seed: number, runs: number): Score {
  const delays: number[] = [];
  let named = 0;
  for (let i = 0; i < runs; i++) {
    const atNight = 50 + ((i * 7) % 40);
    const change = { atNight, by: one.by };
    const sheets = driftingSheets({
      nights: atNight + TO_TELL_NIGHTS,
      seed: seed * 10_000 + i,
      noise,
      change,
    });
    const told = firstTold(sheets, atNight, (found) => found.figure in one.by);
    if (told === null) continue;
    delays.push(told.nights);
    if (told.findings.some((found) => found.signature === one.signature)) named++;
  }
  // oxlint-disable-next-line typescript/no-unsafe-type-assertion -- keys of By
  const figure = Object.keys(one.by)[0] as SeriesName;
  return { ...one, figure, told: delays.length / runs, named: named / runs, delays };
}

/** What is told from the night of the fault on, and how many nights it took; the fault's own night counts as one. */
function firstTold(
  sheets: readonly NightSheet[],
  atNight: number,
  counts: (found: DriftFinding) => boolean,
): { nights: number; findings: DriftFinding[] } | null {
  const start = sheets[atNight].night.date;
  const findings = driftOf(sheets).filter((found) => found.toldOn >= start && counts(found));
  if (findings.length === 0) return null;
  const first = findings.reduce((a, b) => (b.toldOn < a.toldOn ? b : a)).toldOn;
  return { nights: sheets.findIndex((sheet) => sheet.night.date === first) - atNight + 1, findings };
}

function quietAlarms(noise: Noises, seed: number, runs: number): number {
  let alarms = 0;
  for (let i = 0; i < runs; i++) {
    const sheets = driftingSheets({ nights: 200 + LEARNING_NIGHTS, seed: seed * 20_000 + i, noise });
    alarms += troubles(driftOf(sheets)).length;
  }
  return alarms / runs;
}

function troubles(found: readonly DriftFinding[]): DriftFinding[] {
  return found.filter((finding) => finding.signature !== null);
}

function rowOf(
  { signature, what, figure, told, named, delays }: Score,
  noise: Noises | null,
): (string | number)[] {
  const known = figure === null ? undefined : noise?.[figure];
  const sd = known === undefined ? '' : `${(100 * known.sd).toFixed(1)} %`;
  return [signature, what, sd, known?.rho.toFixed(2) ?? '', told * 100, named * 100, medianOf(delays)];
}

function medianOf(values: readonly number[]): number | string {
  const sorted = values.toSorted((a, b) => a - b);
  return sorted.length === 0 ? 'none' : sorted[sorted.length >> 1];
}

function rounded(value: number): number {
  return Math.round(value * 1000) / 1000;
}

/**
 * What drifts over weeks: each kind of trouble is a named signature on the figures of the nights. The figures are watched
 * night by night, as they came; a change is told once, with the night it set in, and the level after it becomes the new
 * normal. The sheet says what to look at, and leaves the judgement to whoever looks.
 */
import { firstChange, type Change } from './change-point.ts';
import { displayFor, type Display } from './display.ts';
import type { NightSheet } from './night-schema.ts';
import { rounded } from './spans.ts';
import { seriesOf, type Series, type SeriesName, type SeriesUnit } from './drift-series.ts';

export const SIGNATURES = [
  'fouled-coil',
  'dirty-condenser',
  'low-refrigerant',
  'wet-insulation',
  'tired-pump',
  'lying-probe',
  'open-door-habit',
] as const;
export type Signature = (typeof SIGNATURES)[number];

export interface DriftFinding {
  /** Null for a change that is no trouble, such as after a repair. */
  readonly signature: Signature | null;
  readonly figure: SeriesName;
  /** Night in which it set in, and the nights between which that lies with 90 %. */
  readonly since: string;
  readonly sinceEarliest: string;
  readonly sinceLatest: string;
  /** Night whose sheet could first tell it. */
  readonly toldOn: string;
  /** Change of the figure, in `unit` whatever the site shows. */
  readonly change: number;
  readonly unit: SeriesUnit;
  /** Probability that the figure changed at all, 0 to 1. */
  readonly confidence: number;
  /** For the margin of a ledger: "leak up 34 %". */
  readonly note: string;
  readonly sentence: string;
  /** What to look at. */
  readonly look: string;
}

/** Each part of a plant gives trouble about once a year, no more (common practice, no source). */
const HAZARD_PER_NIGHT = 1 / 365;
/** In its first nights a plant is still being set up. */
const SETTING_UP_NIGHTS = 3;
/** Two changes within this many nights of each other belong together. */
const TOGETHER_NIGHTS = 10;

/** All changes in the nights of one plant that are trouble, or the end of one, in order of the night they set in. */
export function driftOf(sheets: readonly NightSheet[]): DriftFinding[] {
  if (sheets.length === 0) return [];
  const show = displayFor(sheets[sheets.length - 1].site);
  const dates = sheets.map((sheet) => sheet.night.date);
  const changes = seriesOf(sheets.slice(SETTING_UP_NIGHTS)).flatMap(changesOf);
  const named = changes
    .filter((one) => !explainedAway(one, changes, dates))
    .map((one) => ({ ...one, signature: signatureOf(one) }));
  return firstOfEach(named, dates)
    .filter((one) => one.signature !== null || named.some((before) => ends(one, before)))
    .map((one) => findingOf(one, show))
    .toSorted((a, b) => (a.since < b.since ? -1 : 1));
}

interface Told {
  readonly series: Series;
  readonly change: Change;
  readonly since: string;
  readonly earliest: string;
  readonly latest: string;
  readonly toldOn: string;
}

interface Named extends Told {
  readonly signature: Signature | null;
}

/** Every change of a series, one after the other, each from the level that the one before it left. */
export function changesOf(series: Series): Told[] {
  const out: Told[] = [];
  let start = 0;
  for (;;) {
    const nights = series.nights.slice(start);
    const found = firstChange(nights, { ...series, hazardPerNight: HAZARD_PER_NIGHT });
    if (found === null) return out;
    const { change, toldAt } = found;
    out.push({
      series,
      change,
      since: nights[change.at].date,
      earliest: nights[change.earliest].date,
      latest: nights[change.latest].date,
      toldOn: nights[toldAt].date,
    });
    start += change.at;
  }
}

function near(a: Told, b: Told, dates: readonly string[]): boolean {
  return Math.abs(dates.indexOf(a.since) - dates.indexOf(b.since)) <= TOGETHER_NIGHTS;
}

function alongside(one: Told, name: SeriesName, all: readonly Told[], dates: readonly string[]): number {
  return all.find((other) => other.series.name === name && near(one, other, dates))?.change.step ?? 0;
}

/**
 * A change that another one brings about is not told beside it: less flow warms the water more in the coil and is less work for the
 * pump; a coolant thermometer that lies shows in every figure that is made of it; a machine that makes less than its catalogue looks
 * like a bank that leaks more; a bank that leaks more warms the water by its walls.
 */
const BROUGHT_ABOUT_BY: Readonly<Partial<Record<SeriesName, readonly SeriesName[]>>> = {
  coil: ['pump-power'],
  'pump-power': ['flow'],
  coolant: ['probe coolant-supply'],
  'machine-power': ['probe coolant-supply'],
  leak: ['coolant', 'probe coolant-supply', 'flow'],
};

/** By at most this much a leak warms the water by the walls while ice is made. */
const WARMED_BY_LEAK_K = 0.6;

function explainedAway(one: Told, all: readonly Told[], dates: readonly string[]): boolean {
  if (one.series.name.startsWith('probe bank-')) {
    const { step } = one.change;
    return step > 0 && step < WARMED_BY_LEAK_K && alongside(one, 'leak', all, dates) > 0;
  }
  const causes = BROUGHT_ABOUT_BY[one.series.name] ?? [];
  return causes.some((name) => alongside(one, name, all, dates) !== 0);
}

/** Two figures may tell the same trouble; the one that told it first stands for both. */
function firstOfEach(named: readonly Named[], dates: readonly string[]): Named[] {
  return named.filter(
    (one) =>
      one.signature === null ||
      !named.some(
        (other) =>
          other !== one &&
          other.signature === one.signature &&
          near(one, other, dates) &&
          (other.toldOn < one.toldOn || (other.toldOn === one.toldOn && other.series.name < one.series.name)),
      ),
  );
}

/** Whether a change the other way ends a trouble that the same figure told before. */
function ends(one: Named, before: Named): boolean {
  return before.signature !== null && before.series.name === one.series.name && before.since < one.since;
}

function signatureOf(one: Told): Signature | null {
  const { step } = one.change;
  if (one.series.name.startsWith('probe ')) return 'lying-probe';
  switch (one.series.name) {
    case 'leak':
      return step > 0 ? 'wet-insulation' : null;
    case 'machine-power':
      return step > 0 ? 'dirty-condenser' : 'low-refrigerant';
    case 'coolant':
      return step < 0 ? 'low-refrigerant' : null;
    case 'coil':
      // Water that comes back warmer than it did has passed the coil more slowly.
      return step < 0 ? 'fouled-coil' : 'tired-pump';
    case 'flow':
    case 'pump-power':
      return step < 0 ? 'tired-pump' : null;
    case 'airing':
      return step > 0 ? 'open-door-habit' : null;
    default:
      return null;
  }
}

const FIGURE_WORDS: Readonly<Record<string, string>> = {
  leak: 'heat leak',
  'machine-power': 'machine power at its rating',
  coolant: 'depth of the coolant below freezing',
  coil: 'transfer units of the coil',
  flow: 'melt-water flow',
  'pump-power': 'pump power',
  airing: 'airing of the rooms in the evening',
};

const LOOK: Readonly<Record<Signature, string>> = {
  'fouled-coil': 'Look at the filter and fins of the fan coil, and at the pair of water thermometers.',
  'dirty-condenser': 'Look at the condenser: dust, leaves, a fan that stands, or air that comes round again.',
  'low-refrigerant':
    'Have a certified person look at the refrigerant charge and at oil traces on the joints.',
  'wet-insulation': 'Look at lid, seals and insulation of the bank for water and gaps.',
  'tired-pump': 'Look at strainer, air in the loop, water level and the pump.',
  'lying-probe': 'Look at the probe in an ice bath, and whether it sits where it should.',
  'open-door-habit': 'Look at doors, windows and vents in the evening, and whether more people are home.',
};

function probeWords(name: SeriesName): string {
  const point = name.replace('probe ', '');
  return `${point} ${point.startsWith('coolant') ? 'at rest' : 'beside ice'}`;
}

/** A step in the unit of its series; per cent of a logarithm, of a part, or as it is. */
function amountOf({ unit, relative }: Series, step: number): number {
  if (unit !== '%') return rounded(step, 2);
  return rounded((relative ? Math.exp(step) - 1 : step) * 100, 1);
}

function sizeOf(amount: number, unit: SeriesUnit, show: Display): string {
  const size = Math.abs(amount);
  if (unit === '%') return `${size.toFixed(0)} %`;
  return unit === 'K' ? `${show.difference(size)} ${show.differenceUnit}` : `${size.toFixed(2)} ${unit}`;
}

function findingOf(one: Named, show: Display): DriftFinding {
  const { series, change, signature } = one;
  const { unit } = series;
  const amount = amountOf(series, change.step);
  const words = FIGURE_WORDS[series.name] ?? probeWords(series.name);
  const size = sizeOf(amount, unit, show);
  const note = `${words} ${change.step > 0 ? 'up' : 'down'} ${size}`;
  const when =
    one.earliest === one.latest
      ? `since ${one.since}`
      : `since ${one.since} (${one.earliest} to ${one.latest})`;
  const name = signature === null ? 'back towards normal, or repaired' : signature.replaceAll('-', ' ');
  return {
    signature,
    figure: series.name,
    since: one.since,
    sinceEarliest: one.earliest,
    sinceLatest: one.latest,
    toldOn: one.toldOn,
    change: amount,
    unit,
    confidence: rounded(change.confidence, 4),
    note,
    sentence: `${note.charAt(0).toUpperCase()}${note.slice(1)} ${when}, ${Math.floor(change.confidence * 1000) / 10} % sure: ${name}.`,
    look: signature === null ? '' : LOOK[signature],
  };
}

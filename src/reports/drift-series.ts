/** The figures of many nights as series that a change can be told from. */
import { quantile } from '../numerics/quantile.ts';
import { HOUR_MS, parseInstant } from '../time.ts';
import type { NightValue } from './change-point.ts';
import { closuresOf, type Closure } from './leak-closure.ts';
import type { FigureName, NightSheet } from './night-schema.ts';

export const SERIES = ['leak', 'machine-power', 'coolant', 'coil', 'flow', 'pump-power', 'airing'] as const;
export type SeriesName = (typeof SERIES)[number] | `probe ${string}`;

/** How a change is told: in per cent of the figure, in kelvin, or as share of a difference an hour. */
export type SeriesUnit = '%' | 'K' | 'per h';

export interface Series {
  readonly name: SeriesName;
  readonly unit: SeriesUnit;
  /** Values are natural logarithms of the figure. */
  readonly relative: boolean;
  readonly leastNoise: number;
  readonly leastStep: number;
  readonly nights: readonly (NightValue & { readonly date: string })[];
}

/** A sheet that saw less of its night than this says nothing about the plant. */
const ENOUGH_PCT = 90;
/** Steps of less than this are not worth a visit: half of the 15 % that must be found. */
const LEAST_RELATIVE_STEP = 0.075;
/** Near a one-wire thermometer's own tolerance of ±0.5 K (common practice, no source); less may be water beside a wall. */
const LEAST_PROBE_STEP_K = 0.4;
const PROBE_NOISE_K = 0.03;
/** A shut cabin follows the outdoor air by some hundredths of the difference an hour; an open door by tenths. */
const [LEAST_AIRING_STEP, AIRING_NOISE] = [0.1, 0.02];
/** The leak is told in parts of what the first closures say, as many as these: a bank's own, not the site file's. */
const USUAL_CLOSURES = 20;
const LEAST_LEAK_WPERK = 0.2;
const LEAST_LEAK_STEP = 0.15;
const LEAK_NOISE = 0.05;

/** Below this, head-pressure control, where there is one, keeps the condenser warmer than the air asks for (common practice). */
const COLD_BELOW_C = 10;
/** Leaving water that is warmer by this than on the colder nights has not met ice everywhere. */
const BARE_ABOVE_K = 1.5;

interface Spec {
  readonly figure: FigureName;
  /** What the figure goes with; null where it is not known or the night does not count. */
  readonly weather: (sheet: NightSheet, usualLeavingC: number) => readonly (number | null)[];
  readonly leastNoise: number;
}

const SPECS: Readonly<Record<'machine-power' | 'coolant' | 'coil' | 'flow' | 'pump-power', Spec>> = {
  // Warmer air makes the machine work harder; so does colder coolant, where it is heard. In cold air it does what its maker thought best.
  'machine-power': {
    figure: 'machinePowerAtRatingW',
    weather: ({ conditions, refill }) => {
      const mild = conditions.chargeOutdoorC !== null && conditions.chargeOutdoorC > COLD_BELOW_C;
      const outdoorC = mild ? conditions.chargeOutdoorC : null;
      return (refill ?? null) === null ? [outdoorC] : [outdoorC, conditions.chargeCoolantC];
    },
    leastNoise: 0.01,
  },
  // What drives the heat out of the bank: a machine that takes less leaves its coolant warmer. So does a coil that has melted
  // bare in places, and one that stands in warm water tells nothing.
  coolant: {
    figure: 'coolantBelowZeroK',
    weather: ({ conditions, refill }, usualLeavingC) => [
      conditions.chargeOutdoorC,
      (conditions.dischargeLeavingC ?? 0) > usualLeavingC + BARE_ABOVE_K
        ? null
        : (refill?.until.meltedKwh ?? 0),
    ],
    leastNoise: 0.015,
  },
  coil: {
    figure: 'coilNtu',
    weather: ({ conditions }) => [conditions.dischargeCoilDryK ?? 0],
    leastNoise: 0.015,
  },
  flow: { figure: 'flowLPerMin', weather: () => [], leastNoise: 0.02 },
  'pump-power': { figure: 'pumpPowerW', weather: () => [], leastNoise: 0.01 },
};

/** Sheets in order of their nights, those of one plant. */
export function seriesOf(sheets: readonly NightSheet[]): Series[] {
  const usable = sheets.filter((sheet) => sheet.coveredPct >= ENOUGH_PCT && sheet.clockDoubtfulMinutes < 60);
  const figures = Object.entries(SPECS).map(([name, spec]) =>
    // oxlint-disable-next-line typescript/no-unsafe-type-assertion -- keys of SPECS
    figureSeries(name as keyof typeof SPECS, spec, usable),
  );
  return [leakSeries(usable), ...figures, airingSeries(usable), ...probeSeries(usable)];
}

function figureSeries(
  name: keyof typeof SPECS,
  { figure, weather, leastNoise }: Spec,
  sheets: readonly NightSheet[],
): Series {
  const leaving = sheets.flatMap((sheet) => sheet.conditions.dischargeLeavingC ?? []);
  const usualLeavingC = leaving.length === 0 ? 0 : quantile(leaving, 0.25);
  const nights = sheets.flatMap((sheet) => {
    const value = sheet.figures[figure];
    const error = sheet.figureErrors?.[figure] ?? 0;
    const all = weather(sheet, usualLeavingC);
    const known = all.filter((one) => one !== null);
    if (value === null || !(value > 0) || known.length < all.length) return [];
    // a night that cannot tell the smallest step of interest tells nothing
    if (!(error / value < LEAST_RELATIVE_STEP)) return [];
    return [{ date: sheet.night.date, value: Math.log(value), weather: known }];
  });
  return { name, unit: '%', relative: true, leastNoise, leastStep: LEAST_RELATIVE_STEP, nights };
}

/** One value for each closure, with the night of its later charge; in parts of the median leak. */
function leakSeries(sheets: readonly NightSheet[]): Series {
  const closures = closuresOf(sheets, follows);
  const usual = usualLeak(closures.slice(0, USUAL_CLOSURES));
  return {
    name: 'leak',
    unit: '%',
    relative: false,
    leastNoise: LEAK_NOISE,
    leastStep: LEAST_LEAK_STEP,
    nights: closures.map((one) => ({
      date: one.date,
      value: one.leakWPerK / usual,
      weather: [one.meltedWPerK],
    })),
  };
}

/** The leak without what an error of the flow adds to it: the slope by Theil and Sen (Sen 1968, J. Am. Stat. Assoc. 63(324)). */
function usualLeak(closures: readonly Closure[]): number {
  if (closures.length === 0) return LEAST_LEAK_WPERK;
  const slopes = closures.flatMap((a, i) =>
    closures
      .slice(i + 1)
      .filter((b) => Math.abs(b.meltedWPerK - a.meltedWPerK) > 1)
      .map((b) => (b.leakWPerK - a.leakWPerK) / (b.meltedWPerK - a.meltedWPerK)),
  );
  const slope = slopes.length === 0 ? 0 : quantile(slopes, 0.5);
  const leaks = closures.map((one) => one.leakWPerK - slope * one.meltedWPerK);
  return Math.max(LEAST_LEAK_WPERK, quantile(leaks, 0.5));
}

function follows(before: NightSheet, after: NightSheet): boolean {
  const end = parseInstant(before.night.end) ?? Number.NaN;
  const start = parseInstant(after.night.start) ?? Number.NaN;
  return Math.abs(start - end) < HOUR_MS;
}

function airingSeries(sheets: readonly NightSheet[]): Series {
  const nights = sheets.flatMap((sheet) => {
    const value = sheet.figures.roomFollowsPerH ?? null;
    return value === null ? [] : [{ date: sheet.night.date, value, weather: [] }];
  });
  return {
    name: 'airing',
    unit: 'per h',
    relative: false,
    leastNoise: AIRING_NOISE,
    leastStep: LEAST_AIRING_STEP,
    nights,
  };
}

function probeSeries(sheets: readonly NightSheet[]): Series[] {
  const checks = sheets.flatMap((sheet) =>
    (sheet.probeChecks ?? []).map((check) => ({ date: sheet.night.date, ...check })),
  );
  return [...new Set(checks.map((check) => check.point))].map((point) => {
    const own = checks.filter((check) => check.point === point);
    return {
      name: `probe ${point}` as const,
      unit: 'K' as const,
      relative: false,
      leastNoise: PROBE_NOISE_K,
      leastStep: LEAST_PROBE_STEP_K,
      nights: own.map(({ date, readC }) => ({ date, value: readC, weather: [] })),
    };
  });
}

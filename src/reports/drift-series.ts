/** The figures of many nights as series that a change can be told from. */
import type { NightValue } from './change-point.ts';
import type { FigureName, NightSheet } from './night-schema.ts';

export const SERIES = [
  'leak',
  'cop',
  'machine-power',
  'coolant',
  'coil',
  'flow',
  'pump-power',
  'load',
] as const;
export type SeriesName = (typeof SERIES)[number] | `probe ${string}`;

export interface Series {
  readonly name: SeriesName;
  /** Natural logarithm of the figure, or kelvin for a probe's error. */
  readonly relative: boolean;
  readonly leastNoise: number;
  readonly leastStep: number;
  readonly nights: readonly (NightValue & { readonly date: string })[];
}

interface Spec {
  /** `anchored` says whether what the learner holds has been tried on the plant of late. */
  readonly of: (sheet: NightSheet, anchored: boolean) => number | null;
  readonly weather: (sheet: NightSheet) => readonly (number | null)[];
  readonly leastNoise: number;
  readonly leastStep?: number;
}

/** A sheet that saw less of its night than this says nothing about the plant. */
const ENOUGH_PCT = 90;
/** Steps of less than this are not worth a visit: half of the 15 % that must be found. */
const LEAST_RELATIVE_STEP = 0.075;
/** Half of a one-wire thermometer's own tolerance of ±0.5 K (common practice, no source). */
const LEAST_PROBE_STEP_K = 0.25;
const PROBE_NOISE_K = 0.15;

const figure = (name: FigureName) => (sheet: NightSheet) => sheet.figures[name];
const learned = (sheet: NightSheet, name: string): number | null =>
  sheet.learned.find((one) => one.name === name)?.value ?? null;

/** A bank that ran out tells the learner what it had wrong, all at once: until then its figures are beliefs. */
const RAN_OUT_KWH = 0.3;
/** Nights after that for which they are taken for the plant's own. */
const ANCHORED_NIGHTS = 7;

/** For each sheet, whether the bank ran out on one of the last nights, this one left out: its correction is under way. */
function anchoredNights(sheets: readonly NightSheet[]): boolean[] {
  return sheets.map((_, i) =>
    sheets.slice(Math.max(0, i - ANCHORED_NIGHTS), i).some((sheet) => sheet.ice.lowestKwh < RAN_OUT_KWH),
  );
}

const outdoor = (sheet: NightSheet): readonly (number | null)[] => [sheet.weather.outdoorMeanC];
/** Thicker ice and warmer air both make the machine work harder: where the charge began, how far it went, and the air meanwhile. */
const charge = (sheet: NightSheet): readonly (number | null)[] => [
  sheet.conditions.chargeOutdoorC,
  sheet.conditions.chargeInventoryPct,
  sheet.ice.lowestKwh,
];

/**
 * Where each figure comes from, the surer source first, and the noise that is always allowed for. A learned figure is
 * preferred where one night alone says little; a figure of the night where the learner is slow.
 */
const SPECS: Readonly<Record<(typeof SERIES)[number], Spec>> = {
  leak: {
    of: (sheet, anchored) => (anchored ? (learned(sheet, 'heat-leak') ?? sheet.figures.heatLeakWPerK) : null),
    weather: outdoor,
    leastNoise: 0.03,
    // Among the learned figures the one that wanders most; what soaks an insulation moves it far more.
    leastStep: Math.log(1.3),
  },
  cop: {
    of: (sheet, anchored) =>
      anchored ? (learned(sheet, 'charging-factor') ?? sheet.figures.copAtRating) : null,
    weather: (sheet) => [sheet.weather.outdoorMeanC, sheet.conditions.chargeInventoryPct],
    leastNoise: 0.015,
  },
  'machine-power': { of: figure('machinePowerAtRatingW'), weather: charge, leastNoise: 0.015 },
  coolant: {
    of: figure('coolantBelowZeroK'),
    weather: (sheet) => [sheet.conditions.chargeOutdoorC, sheet.conditions.chargeInventoryPct],
    leastNoise: 0.02,
  },
  // Below the dew point the coil takes moisture too, and more heat with it: colder water, damper air.
  coil: {
    of: figure('coilNtu'),
    weather: (sheet) => [sheet.conditions.dischargeLeavingC, sheet.conditions.dischargeHumidityPct ?? 0],
    leastNoise: 0.02,
  },
  flow: {
    of: (sheet, anchored) => sheet.figures.flowLPerMin ?? (anchored ? learned(sheet, 'pump-flow') : null),
    weather: outdoor,
    leastNoise: 0.02,
  },
  'pump-power': { of: figure('pumpPowerW'), weather: () => [], leastNoise: 0.01 },
  load: {
    of: figure('loadPerDegree'),
    weather: (sheet) => [sheet.weather.outdoorMeanC, rangeOf(sheet)],
    leastNoise: 0.06,
  },
};

function rangeOf(sheet: NightSheet): number | null {
  const { outdoorMaxC, outdoorMinC } = sheet.weather;
  return outdoorMaxC === null || outdoorMinC === null ? null : outdoorMaxC - outdoorMinC;
}

/** Sheets in order of their nights, those of one plant. */
export function seriesOf(sheets: readonly NightSheet[]): Series[] {
  const usable = sheets.filter((sheet) => sheet.coveredPct >= ENOUGH_PCT && sheet.clockDoubtfulMinutes < 60);
  const anchored = anchoredNights(usable);
  const plant = SERIES.map((name): Series => {
    const { of, weather, leastNoise, leastStep = LEAST_RELATIVE_STEP } = SPECS[name];
    return {
      name,
      relative: true,
      leastNoise,
      leastStep,
      nights: usable.flatMap((sheet, i) => {
        const value = of(sheet, anchored[i]);
        const known = weather(sheet).filter((one) => one !== null);
        if (value === null || !(value > 0) || known.length < weather(sheet).length) return [];
        return [{ date: sheet.night.date, value: Math.log(value), weather: known }];
      }),
    };
  });
  return [...plant, ...probeSeries(usable)];
}

function probeSeries(sheets: readonly NightSheet[]): Series[] {
  const points = new Set(sheets.flatMap((sheet) => sheet.probes.map((probe) => probe.point)));
  return [...points].map((point) => ({
    name: `probe ${point}` as const,
    relative: false,
    leastNoise: PROBE_NOISE_K,
    leastStep: LEAST_PROBE_STEP_K,
    nights: sheets.flatMap((sheet) => {
      const error = sheet.probes.find((probe) => probe.point === point)?.errorAtIcePointK ?? null;
      return error === null ? [] : [{ date: sheet.night.date, value: error, weather: [] }];
    }),
  }));
}

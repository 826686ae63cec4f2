/**
 * Sheets of many nights whose drift figures are told by a seed: level, weather, noise that follows itself from night to
 * night, now and then a wild value, and, from one night on, a change.
 */
import { createRandom, type Random } from '../../src/numerics/random.ts';
import type { NightSheet } from '../../src/reports/night.ts';
import type { SeriesName } from '../../src/reports/drift-series.ts';
import { DAY_MS, HOUR_MS } from '../../src/time.ts';
import { toldSheet } from './juniper.ts';

export interface FigureNoise {
  /** Standard deviation of the logarithm from night to night (as it is for probes and airing), and correlation with the night before. */
  readonly sd: number;
  readonly rho: number;
}

export type Noises = Readonly<Partial<Record<SeriesName, FigureNoise>>>;

export interface DriftStory {
  readonly nights: number;
  readonly seed: number;
  readonly noise: Noises;
  /** Change of the logarithm of a figure (as it is for probes and airing) from a night on. */
  readonly change?: { readonly atNight: number; readonly by: Readonly<Partial<Record<SeriesName, number>>> };
  readonly wildPart?: number;
}

const START_MS = Date.UTC(2026, 4, 20);
/** How much of the weather the nights' own normalisation leaves in a figure, per kelvin; sign and size invented. */
const WEATHER_LEFT = 0.004;

let template: NightSheet | null = null;

export function driftingSheets(story: DriftStory): NightSheet[] {
  template ??= toldSheet({ stepMs: 900_000 });
  const base = template;
  const random = createRandom(story.seed);
  const outdoor = outdoorSeries(random.fork('outdoor'), story.nights);
  const figures = Object.entries(story.noise).flatMap(([name, noise]) =>
    noise === undefined
      ? []
      : [
          {
            // oxlint-disable-next-line typescript/no-unsafe-type-assertion -- keys of Noises
            name: name as SeriesName,
            values: noiseSeries(random.fork(name), story.nights, noise, story.wildPart ?? 0.02),
          },
        ],
  );
  return Array.from({ length: story.nights }, (_, night) => {
    const weatherK = outdoor[night] - 24;
    const of = (name: SeriesName): number | null => {
      const figure = figures.find((one) => one.name === name);
      if (!figure) return null;
      const step = story.change && night >= story.change.atNight ? (story.change.by[name] ?? 0) : 0;
      return figure.values[night] + step + (plain(name) ? 0 : WEATHER_LEFT * weatherK);
    };
    return sheetOf(base, night, outdoor[night], of);
  });
}

/** Figures that are no ratios and have no weather in them. */
const plain = (name: SeriesName): boolean => name.startsWith('probe ') || WEATHERLESS.includes(name);
const WEATHERLESS: readonly SeriesName[] = ['airing', 'coil', 'flow', 'pump-power', 'leak'];

function sheetOf(
  base: NightSheet,
  night: number,
  outdoorC: number,
  of: (name: SeriesName) => number | null,
): NightSheet {
  const scaled = (name: SeriesName, level: number): number | null => {
    const log = of(name);
    return log === null ? null : level * Math.exp(log);
  };
  return {
    ...base,
    night: {
      ...base.night,
      date: new Date(START_MS + night * DAY_MS).toISOString().slice(0, 10),
      start: new Date(START_MS + night * DAY_MS).toISOString(),
      end: new Date(START_MS + (night + 1) * DAY_MS).toISOString(),
    },
    weather: { outdoorMeanC: outdoorC, outdoorMaxC: outdoorC + 8, outdoorMinC: outdoorC - 7 },
    conditions: {
      ...base.conditions,
      chargeOutdoorC: outdoorC - 5,
      chargeCoolantC: -10 + 0.4 * Math.sin(night),
      dischargeLeavingC: 4 + Math.sin(0.7 * night),
      dischargeHumidityPct: 48 + 4 * Math.sin(1.3 * night),
      dischargeCoilDryK: 0,
    },
    figures: {
      ...base.figures,
      machinePowerAtRatingW: scaled('machine-power', 600),
      coilNtu: scaled('coil', 0.22),
      flowLPerMin: scaled('flow', 12),
      pumpPowerW: scaled('pump-power', 45),
      coolantBelowZeroK: scaled('coolant', 8),
      roomFollowsPerH: of('airing') === null ? null : 0.05 + (of('airing') ?? 0),
    },
    refill: refillOf(scaled('leak', 2), night),
    probeChecks: PROBES.flatMap((point) => {
      const error = of(`probe ${point}`);
      return error === null ? [] : [{ point, where: 'beside-ice' as const, readC: error, errorK: 0 }];
    }),
  };
}

const PROBES = ['bank-bottom', 'coolant-supply'] as const;
const SURROUND_KH = 24 * 24;

/** A charge that ends where the last one did has made good what was melted and leaked since. */
function refillOf(leakWPerK: number | null, night: number): NightSheet['refill'] {
  if (leakWPerK === null) return null;
  const meltedKwh = 6 + 2 * Math.sin(0.9 * night);
  return {
    chargeEnd: new Date(START_MS + night * DAY_MS + 20 * HOUR_MS).toISOString(),
    until: {
      madeKwh: meltedKwh + (leakWPerK * SURROUND_KH) / 1000,
      meltedKwh,
      surroundKh: SURROUND_KH,
      unheardHours: 0,
    },
    after: { madeKwh: 0, meltedKwh: 0, surroundKh: 0, unheardHours: 0 },
    curve: [14, 13, 12.5].map((belowZeroK, i) => ({ madeKwh: 0.4 * (i + 0.5), belowZeroK, outdoorC: 18 })),
  };
}

function outdoorSeries(random: Random, nights: number): number[] {
  let spell = 0;
  return Array.from({ length: nights }, (_, night) => {
    spell = 0.7 * spell + 2 * random.normal();
    return 24 + 4 * Math.sin(((night - 20) / 365) * 2 * Math.PI) + spell;
  });
}

function noiseSeries(random: Random, nights: number, { sd, rho }: FigureNoise, wildPart: number): number[] {
  let value = random.normal();
  return Array.from({ length: nights }, () => {
    value = rho * value + Math.sqrt(1 - rho * rho) * random.normal();
    const wild = random.next() < wildPart ? 4 * random.normal() : 0;
    return sd * (value + wild);
  });
}

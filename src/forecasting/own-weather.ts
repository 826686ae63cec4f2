/** Weather from the site's own history: outdoor temperature, dew point and clearness for the hours ahead. */
import type { SiteConfig } from '../config.ts';
import { fitAnomaly, predictAnomaly, type AnomalyModel } from './anomaly.ts';
import { BIN_DAYS, type HourSeries } from './bins.ts';
import { designBinsC, seasonK, USUAL_CLEARNESS } from './design-weather.ts';
import type { HourBook } from './hours.ts';
import { MOST_CLEARNESS, clearnessOf } from './sky.ts';

/** One value for each hour of lead, from 1: the hour after the last whole one. */
export interface HoursAhead {
  readonly outdoorC: Float64Array;
  readonly dewC: Float64Array;
  readonly clearness: Float64Array;
}

export interface OwnWeather {
  /** For leads 1 … `leads` after `lastHour`, the last whole hour. */
  predict(book: HourBook, lastHour: number, leads: number): HoursAhead;
}

/** Hours between two trainings; the offset itself is always today's. */
const TRAIN_EVERY_HOURS = 12;

interface Trained {
  readonly atHour: number;
  readonly leads: number;
  readonly outdoor: AnomalyModel;
  readonly dew: AnomalyModel;
  readonly clearness: AnomalyModel;
}

export interface WeatherSeries {
  readonly outdoorC: HourSeries;
  readonly dewC: HourSeries;
  readonly clearness: HourSeries;
}

/** The last weeks of the book as hourly series. The first hour's gaps are null. */
export function weatherSeries(config: SiteConfig, book: HourBook, toHour: number): WeatherSeries {
  const firstHour = Math.max(book.all[0]?.hour ?? toHour, toHour - BIN_DAYS * 24 + 1);
  const of = (values: (number | null)[]): HourSeries => ({ firstHour, values });
  const outdoorC = book.series(firstHour, toHour, (line) => line.outdoorC);
  return {
    outdoorC: of(outdoorC),
    dewC: of(
      dewSeries(
        book.series(firstHour, toHour, (line) => line.dewC),
        outdoorC,
      ),
    ),
    clearness: of(clearnessSeries(config, book, firstHour, toHour)),
  };
}

/** Without a hygrometer the dew point stands at the day's lowest temperature (Allen et al. 1998, FAO-56, eq. 48). */
function dewSeries(measured: (number | null)[], outdoorC: readonly (number | null)[]): (number | null)[] {
  if (measured.filter((value) => value !== null).length >= Math.min(24, measured.length / 2)) return measured;
  return outdoorC.map((_, i) => {
    const day = outdoorC.slice(Math.max(0, i - 23), i + 1).filter((value) => value !== null);
    return day.length > 0 ? Math.min(...day) : null;
  });
}

function clearnessSeries(config: SiteConfig, book: HourBook, from: number, to: number): (number | null)[] {
  const values = clearnessOf(config, book.all);
  const byHour = new Map(book.all.map((line, i) => [line.hour, values[i]]));
  return Array.from({ length: to - from + 1 }, (_, i) => byHour.get(from + i) ?? null);
}

export function createOwnWeather(config: SiteConfig): OwnWeather {
  let trained: Trained | null = null;
  return {
    predict(book, lastHour, leads) {
      const atHour = Math.floor(lastHour / TRAIN_EVERY_HOURS) * TRAIN_EVERY_HOURS;
      if (!trained || trained.atHour !== atHour || trained.leads < leads) {
        trained = train(config, book, atHour, leads);
      }
      return predictFrom(config, trained, weatherSeries(config, book, lastHour), lastHour);
    },
  };
}

const flat = (value: number): number[] => Array.from({ length: 24 }, () => value);

function train(config: SiteConfig, book: HourBook, atHour: number, leads: number): Trained {
  const { outdoorC, dewC, clearness } = seasonless(config, weatherSeries(config, book, atHour));
  const prior = designBinsC(config);
  return {
    atHour,
    leads,
    outdoor: fitAnomaly(outdoorC, prior, dewC, leads),
    dew: fitAnomaly(dewC, flat(Math.min(...prior)), null, leads),
    clearness: fitAnomaly(clearness, flat(USUAL_CLEARNESS), null, leads),
  };
}

function predictFrom(
  config: SiteConfig,
  trained: Trained,
  measured: WeatherSeries,
  lastHour: number,
): HoursAhead {
  const series = seasonless(config, measured);
  const seasonal = (values: Float64Array): Float64Array =>
    values.map((value, i) => value + seasonK(config, lastHour + i + 1));
  const clearness = predictAnomaly(trained.clearness, series.clearness, null);
  return {
    outdoorC: seasonal(predictAnomaly(trained.outdoor, series.outdoorC, series.dewC)),
    dewC: seasonal(predictAnomaly(trained.dew, series.dewC, null)),
    clearness: clearness.map((value) => Math.min(MOST_CLEARNESS, Math.max(0, value))),
  };
}

/** Temperatures with the usual course of the year taken out, so that bins of the last weeks do not lag behind it. */
function seasonless(config: SiteConfig, series: WeatherSeries): WeatherSeries {
  const without = ({ firstHour, values }: HourSeries): HourSeries => ({
    firstHour,
    values: values.map((value, i) => (value === null ? null : value - seasonK(config, firstHour + i))),
  });
  return { ...series, outdoorC: without(series.outdoorC), dewC: without(series.dewC) };
}

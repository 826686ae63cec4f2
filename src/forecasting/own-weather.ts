/** Weather from the site's own history: outdoor temperature, dew point and clearness for the hours ahead. */
import type { SiteConfig } from '../config.ts';
import { fitAnomaly, predictAnomaly, type AnomalyModel } from './anomaly.ts';
import type { HourSeries } from './bins.ts';
import type { Book, WeatherSeries } from './book.ts';
import { designBinsC, seasonK } from './design-weather.ts';
import { scored, skyScores, type SkyScores } from './sky-score.ts';

/** One value for each hour of lead, from 1: the hour after the last whole one. */
export interface HoursAhead {
  readonly outdoorC: Float64Array;
  readonly dewC: Float64Array;
  readonly skyScore: Float64Array;
  /** What the scores mean. */
  readonly sky: SkyScores;
}

export interface OwnWeather {
  /** For leads 1 … `leads` after `lastHour`, the last whole hour. */
  predict(book: Book, lastHour: number, leads: number): HoursAhead;
}

/** Hours between two trainings; the offset itself is always today's. */
const TRAIN_EVERY_HOURS = 12;

/** A mass of air stays for days, clouds for hours (from experience, no source; learned from there). */
const AIR_FADING = { quick: 0.85, slowHours: 60, share: 1, rows: 16 } as const;
/** Of a day of clouds less is to be learned than of a day of air: half of its hours are dark. */
const CLOUD_FADING = { quick: 0.75, slowHours: 24, share: 0.5, rows: 64 } as const;

interface Trained {
  readonly atHour: number;
  readonly leads: number;
  readonly outdoor: AnomalyModel;
  readonly dew: AnomalyModel;
  readonly skyScore: AnomalyModel;
  readonly sky: SkyScores;
}

export function createOwnWeather(config: SiteConfig): OwnWeather {
  let trained: Trained | null = null;
  return {
    predict(book, lastHour, leads) {
      const atHour = Math.floor(lastHour / TRAIN_EVERY_HOURS) * TRAIN_EVERY_HOURS;
      if (!trained || trained.atHour !== atHour || trained.leads < leads) {
        trained = train(config, book, atHour, leads);
      }
      return predictFrom(config, trained, book.weatherTo(lastHour), lastHour);
    },
  };
}

const flat = (value: number): number[] => Array.from({ length: 24 }, () => value);

function train(config: SiteConfig, book: Book, atHour: number, leads: number): Trained {
  const { outdoorC, dewC, clearness } = seasonless(config, book.weatherTo(atHour));
  const prior = designBinsC(config);
  const sky = skyScores(clearness);
  return {
    atHour,
    leads,
    outdoor: fitAnomaly(outdoorC, prior, dewC, AIR_FADING, leads),
    dew: fitAnomaly(dewC, flat(Math.min(...prior)), null, AIR_FADING, leads),
    skyScore: fitAnomaly(scored(clearness, sky), flat(0), null, CLOUD_FADING, leads),
    sky,
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
  return {
    outdoorC: seasonal(predictAnomaly(trained.outdoor, series.outdoorC, series.dewC)),
    dewC: seasonal(predictAnomaly(trained.dew, series.dewC, null)),
    skyScore: predictAnomaly(trained.skyScore, scored(series.clearness, trained.sky), null),
    sky: trained.sky,
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

/**
 * Weather from a seed: warm and cool spells, clear and cloudy days, each day on the published daily profile. Any instant
 * can be asked for in any order: each day's figures come from its number and the seed alone.
 */
import type { SiteConfig } from '../config.ts';
import { createRandom, type Random } from '../numerics/random.ts';
import { relativeHumidityPct, saturationHumidityRatio, standardPressurePa } from '../physics/moist-air.ts';
import { clearSkyGhiWPerM2, designProfileC } from '../physics/sun.ts';
import { DAY_MS, HOUR_MS, MINUTE_MS } from '../time.ts';
import type { WeatherSample, WeatherSource } from './weather.ts';

export interface SeededWeatherOptions {
  readonly seed: number;
  readonly latitudeDeg: number;
  readonly longitudeDeg: number;
  readonly elevationM?: number;
  /** Hottest afternoon of an ordinary summer and the daily range of a clear day. */
  readonly hotDayC?: number;
  readonly rangeK?: number;
  /** Dew point of the season and how far spells move it. */
  readonly dewPointC?: number;
  /** How far below the hottest day the season's mean afternoon lies, and the standard deviation of spells about it. */
  readonly belowHotK?: number;
  readonly spellK?: number;
  /** Share of the days that are mostly cloudy. */
  readonly cloudyPart?: number;
  /** Fall of the mean afternoon from midsummer to midwinter. */
  readonly winterFallK?: number;
}

/** Persistence of spells from day to day, and how many past days still count: 0.7^16 is below 0.4 %. */
const PERSISTENCE = 0.7;
const MEMORY_DAYS = 16;

interface Day {
  readonly maximumC: number;
  readonly rangeK: number;
  readonly clearness: number;
  readonly dewPointC: number;
  readonly windMPerS: number;
  readonly clouds: Float64Array;
}

export function seededWeather(options: SeededWeatherOptions): WeatherSource {
  return new SeededWeather(options);
}

/** Summers of a site by its own design day, where the site file has one. */
export function weatherForSite(site: SiteConfig, seed: number): WeatherSource {
  const { latitudeDeg, longitudeDeg, elevationM } = site.site;
  const { designDayC, designRangeK } = site.cabin;
  return seededWeather({
    seed,
    latitudeDeg,
    longitudeDeg,
    elevationM,
    rangeK: designRangeK,
    ...(designDayC === null ? {} : { hotDayC: designDayC }),
  });
}

class SeededWeather implements WeatherSource {
  private readonly o: Required<SeededWeatherOptions>;
  private readonly random: Random;
  private readonly pressurePa: number;
  private readonly days = new Map<number, Day>();

  constructor(options: SeededWeatherOptions) {
    this.o = {
      elevationM: 0,
      hotDayC: 35,
      rangeK: 14,
      dewPointC: 12,
      belowHotK: 4,
      spellK: 2.8,
      cloudyPart: 0.25,
      winterFallK: 20,
      ...options,
    };
    this.random = createRandom(options.seed).fork('weather');
    this.pressurePa = standardPressurePa(this.o.elevationM);
  }

  at(atMs: number): WeatherSample {
    // Local mean time by longitude: weather follows the sun, not the clock on the wall.
    const localMs = atMs + (this.o.longitudeDeg / 15) * HOUR_MS;
    const day = Math.floor(localMs / DAY_MS);
    const hour = (localMs - day * DAY_MS) / HOUR_MS;
    const today = this.day(day);
    const outdoorC = this.temperatureC(day, hour);
    const ratio = saturationHumidityRatio(this.dewPointC(day, hour), this.pressurePa);
    const windMPerS = today.windMPerS * (0.5 + Math.max(0, Math.sin(((hour - 8) / 14) * Math.PI)));
    return {
      outdoorC,
      outdoorRhPct: Math.min(100, relativeHumidityPct(outdoorC, ratio, this.pressurePa)),
      ghiWPerM2: this.sunWPerM2(atMs, today, hour),
      windMPerS,
    };
  }

  /** The day's profile; between 22:00 and 06:00 it passes over into the next day's. */
  private temperatureC(day: number, hour: number): number {
    const evening = hour >= 22 ? day : day - 1;
    const passed = hour >= 22 ? (hour - 22) / 8 : Math.min(1, (hour + 2) / 8);
    const before = this.day(evening);
    const after = this.day(evening + 1);
    const beforeC = designProfileC(hour, before.maximumC, before.rangeK);
    const afterC = designProfileC(hour, after.maximumC, after.rangeK);
    return beforeC + passed * (afterC - beforeC);
  }

  private dewPointC(day: number, hour: number): number {
    const share = hour / 24;
    const between = (1 - share) * this.day(day).dewPointC + share * this.day(day + 1).dewPointC;
    return Math.min(between, this.temperatureC(day, hour) - 0.2);
  }

  private sunWPerM2(atMs: number, today: Day, hour: number): number {
    const minuteMs = Math.floor(atMs / MINUTE_MS) * MINUTE_MS;
    const clear = clearSkyGhiWPerM2(minuteMs, this.o.latitudeDeg, this.o.longitudeDeg, this.o.elevationM);
    if (clear <= 0) return 0;
    const at = Math.min(today.clouds.length - 1.001, hour * 4);
    const i = at | 0;
    const cloud = today.clouds[i] + (at - i) * (today.clouds[i + 1] - today.clouds[i]);
    return clear * Math.max(0.08, Math.min(1.05, today.clearness + cloud));
  }

  private day(number: number): Day {
    const known = this.days.get(number);
    if (known) return known;
    const made = this.makeDay(number);
    this.days.set(number, made);
    return made;
  }

  private makeDay(number: number): Day {
    const draw = this.random.fork(`day ${number}`);
    const spell = this.spell('heat', number);
    const damp = 0.6 * this.spell('damp', number) - 0.2 * spell;
    const cloudy = draw.next() < this.o.cloudyPart;
    const clearness = cloudy ? 0.25 + 0.35 * draw.next() : 0.82 + 0.16 * draw.next();
    const season = (1 - Math.cos((2 * Math.PI * (this.dayOfYear(number) - 200)) / 365)) / 2;
    const rangeK = this.o.rangeK * (0.45 + 0.58 * clearness);
    return {
      maximumC:
        this.o.hotDayC -
        this.o.belowHotK -
        this.o.winterFallK * season +
        this.o.spellK * spell -
        (cloudy ? 2.5 : 0),
      rangeK,
      clearness,
      dewPointC: this.o.dewPointC - 0.5 * this.o.winterFallK * season + 2.5 * damp + (cloudy ? 1.5 : 0),
      windMPerS: Math.max(0.3, 2.5 + 1.2 * draw.normal()),
      clouds: clouds(draw, cloudy ? 0.18 : 0.05),
    };
  }

  /** Days since midwinter or midsummer by hemisphere, so that 200 is midsummer at either. */
  private dayOfYear(number: number): number {
    const atMs = number * DAY_MS;
    const start = Date.UTC(new Date(atMs).getUTCFullYear(), 0, 1);
    return (atMs - start) / DAY_MS + (this.o.latitudeDeg < 0 ? 182 : 0);
  }

  /** First-order autoregression as a sum over past days, of unit variance. */
  private spell(name: string, number: number): number {
    let sum = 0;
    for (let back = 0; back < MEMORY_DAYS; back++) {
      sum += PERSISTENCE ** back * this.random.fork(`${name} ${number - back}`).normal();
    }
    return sum * Math.sqrt(1 - PERSISTENCE ** 2);
  }
}

/** Passing clouds: quarter-hour departures from the day's clearness. */
function clouds(draw: Random, deviation: number): Float64Array {
  const series = new Float64Array(98);
  for (let i = 1; i < series.length; i++) series[i] = 0.8 * series[i - 1] + 0.6 * deviation * draw.normal();
  return series;
}

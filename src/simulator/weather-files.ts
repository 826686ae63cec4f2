/**
 * Weather from the open hourly files: measured Newark 2013 (no sun in it) and the typical year of Greensboro. Parsers
 * take text and touch no file system. Short gaps are interpolated; long ones are interpolated too, and named.
 */
import { RimeholdError } from '../errors.ts';
import { relativeHumidityPct, saturationHumidityRatio, standardPressurePa } from '../physics/moist-air.ts';
import { clearSkyGhiWPerM2 } from '../physics/sun.ts';
import { DAY_MS, formatInstant, HOUR_MS, MINUTE_MS, parseInstant } from '../time.ts';
import type { WeatherSample, WeatherSource } from './weather.ts';

/** Hours without a line up to which weather is taken to have changed evenly. */
const SHORT_GAP_MS = 3 * HOUR_MS;

export interface Gap {
  readonly fromMs: number;
  readonly toMs: number;
}

export interface WeatherFile extends WeatherSource {
  readonly startMs: number;
  readonly endMs: number;
  readonly hours: number;
  /** Missing hours in gaps of at most three hours, filled in between. */
  readonly interpolatedHours: number;
  /** Longer gaps: bridged by straight lines, and not to be trusted. */
  readonly longGaps: readonly Gap[];
}

type Row = readonly string[];

/** The lines below a header that must be exactly the expected one. Throws `file-unreadable`. */
function rowsOf(csv: string, header: string, file: string): Row[] {
  const [first, ...lines] = csv.trim().split(/\r?\n/);
  if (first !== header) {
    throw new RimeholdError(
      'file-unreadable',
      `Expected the ${file} file to begin with "${header}", found "${(first ?? '').slice(0, 80)}".`,
    );
  }
  return lines.map((line) => line.split(','));
}

function numberIn(row: Row, column: number, line: number): number {
  const text = row[column] ?? '';
  const value = text.trim() === '' ? Number.NaN : Number(text);
  if (!Number.isFinite(value)) {
    throw new RimeholdError(
      'file-unreadable',
      `Expected a number in column ${column + 1} of line ${line + 2} of the weather file, found "${text}".`,
    );
  }
  return value;
}

/** Columns of hourly values at increasing instants. */
interface Series {
  readonly atMs: Float64Array;
  readonly outdoorC: Float64Array;
  readonly dewPointC: Float64Array;
  readonly windMPerS: Float64Array;
}

function gapsOf(atMs: Float64Array): { interpolatedHours: number; longGaps: Gap[] } {
  let interpolatedHours = 0;
  const longGaps: Gap[] = [];
  for (let i = 1; i < atMs.length; i++) {
    const spanMs = atMs[i] - atMs[i - 1];
    if (spanMs - HOUR_MS > SHORT_GAP_MS) longGaps.push({ fromMs: atMs[i - 1], toMs: atMs[i] });
    else interpolatedHours += Math.round(spanMs / HOUR_MS) - 1;
  }
  return { interpolatedHours, longGaps };
}

/** Index of the last instant not after `atMs`. */
function before(atMs: Float64Array, wanted: number): number {
  let low = 0;
  let high = atMs.length - 1;
  while (high - low > 1) {
    const middle = (low + high) >> 1;
    if (atMs[middle] <= wanted) low = middle;
    else high = middle;
  }
  return low;
}

const between = (column: Float64Array, i: number, share: number): number =>
  column[i] + share * (column[i + 1] - column[i]);

function humidityPct(outdoorC: number, dewPointC: number, pressurePa: number): number {
  const ratio = saturationHumidityRatio(Math.min(dewPointC, outdoorC), pressurePa);
  return Math.min(100, relativeHumidityPct(outdoorC, ratio, pressurePa));
}

const NEWARK = { latitudeDeg: 40.69, longitudeDeg: -74.17, elevationM: 5 } as const;
const NEWARK_HEADER = 'time,dry_bulb_c,dew_point_c,rh_pct,wind_ms,pressure_hpa,precip_mm';

/**
 * Measured hours of Newark NJ, 2013, at their own UTC instants. The file has no sun: it is *guessed* as clear sky dimmed
 * by humidity and rain, which gives plausible days and no measured ones.
 */
export function weatherFromNewark(csvText: string): WeatherFile {
  // A line without a temperature or dew point is an hour that is missing.
  const rows = rowsOf(csvText, NEWARK_HEADER, 'Newark').filter((row) => row[1] !== '' && row[2] !== '');
  const series: Series = {
    atMs: Float64Array.from(rows, (row, line) => instantIn(row, line)),
    outdoorC: Float64Array.from(rows, (row, line) => numberIn(row, 1, line)),
    dewPointC: Float64Array.from(rows, (row, line) => numberIn(row, 2, line)),
    windMPerS: Float64Array.from(rows, (row, line) => (row[4] === '' ? 0 : numberIn(row, 4, line))),
  };
  const rainMm = Float64Array.from(rows, (row) => Number(row[6]) || 0);
  const pressurePa = standardPressurePa(NEWARK.elevationM);
  const startMs = series.atMs[0];
  const endMs = series.atMs[series.atMs.length - 1];
  return {
    startMs,
    endMs,
    hours: rows.length,
    ...gapsOf(series.atMs),
    at: (atMs) => {
      if (!(atMs >= startMs && atMs <= endMs)) throw outside('Newark', atMs, startMs, endMs);
      const i = before(series.atMs, atMs);
      const share = (atMs - series.atMs[i]) / (series.atMs[i + 1] - series.atMs[i]);
      const outdoorC = between(series.outdoorC, i, share);
      const outdoorRhPct = humidityPct(outdoorC, between(series.dewPointC, i, share), pressurePa);
      const clear = clearSkyGhiWPerM2(
        Math.floor(atMs / MINUTE_MS) * MINUTE_MS,
        NEWARK.latitudeDeg,
        NEWARK.longitudeDeg,
        NEWARK.elevationM,
      );
      return {
        outdoorC,
        outdoorRhPct,
        ghiWPerM2: clear * guessedClearness(outdoorRhPct, between(rainMm, i, share)),
        windMPerS: between(series.windMPerS, i, share),
      };
    },
  };
}

function instantIn(row: Row, line: number): number {
  const atMs = parseInstant(row[0] ?? '');
  if (atMs === null) {
    throw new RimeholdError(
      'file-unreadable',
      `Expected an RFC 3339 time in line ${line + 2} of the weather file, found "${row[0] ?? ''}".`,
    );
  }
  return atMs;
}

/** Humid daytime air goes with cloud; rain with thick cloud. A guess, no source. */
function guessedClearness(rhPct: number, rainMm: number): number {
  const humid = Math.max(0, (rhPct - 45) / 55);
  return Math.max(0.15, (1 - 0.6 * humid) * (rainMm > 0.2 ? 0.4 : 1));
}

function outside(file: string, atMs: number, startMs: number, endMs: number): RimeholdError {
  return new RimeholdError(
    'usage',
    `The ${file} weather runs from ${formatInstant(startMs)} to ${formatInstant(endMs)}; ${formatInstant(atMs)} lies outside it.`,
  );
}

const GREENSBORO_ELEVATION_M = 273;
const GREENSBORO_UTC_OFFSET_MS = -5 * HOUR_MS;
const GREENSBORO_HEADER =
  'month_day,hour_ending_lst,ghi_wm2,dni_wm2,dhi_wm2,dry_bulb_c,dew_point_c,rh_pct,pressure_hpa,wind_ms';
const YEAR_HOURS = 8760;

/**
 * Typical year of Greensboro NC: any year is the typical year (29 February repeats the 28th). Hours end at the time that
 * they carry, in local standard time; sunshine is the mean of that hour, temperatures stand at its end.
 */
export function weatherFromGreensboro(csvText: string): WeatherFile {
  const rows = rowsOf(csvText, GREENSBORO_HEADER, 'Greensboro');
  if (rows.length !== YEAR_HOURS) {
    throw new RimeholdError(
      'file-unreadable',
      `Expected ${YEAR_HOURS} hours in the Greensboro file, found ${rows.length}.`,
    );
  }
  const column = (index: number): Float64Array =>
    Float64Array.from(rows, (row, line) => numberIn(row, index, line));
  const [sun, outdoor, dewPoint, wind] = [2, 5, 6, 9].map(column);
  const pressurePa = standardPressurePa(GREENSBORO_ELEVATION_M);
  return {
    startMs: Number.NEGATIVE_INFINITY,
    endMs: Number.POSITIVE_INFINITY,
    hours: rows.length,
    interpolatedHours: 0,
    longGaps: [],
    at: (atMs) => {
      const hour = hourOfYear(atMs + GREENSBORO_UTC_OFFSET_MS);
      const outdoorC = ending(outdoor, hour);
      return {
        outdoorC,
        outdoorRhPct: humidityPct(outdoorC, ending(dewPoint, hour), pressurePa),
        // The mean of an hour belongs to its middle.
        ghiWPerM2: ending(sun, hour + 0.5),
        windMPerS: ending(wind, hour),
      } satisfies WeatherSample;
    },
  };
}

/** Hours since New Year on a calendar without 29 February. */
function hourOfYear(localMs: number): number {
  const date = new Date(localMs);
  const year = date.getUTCFullYear();
  const leap = new Date(Date.UTC(year, 1, 29)).getUTCMonth() === 1;
  const days = Math.floor((localMs - Date.UTC(year, 0, 1)) / DAY_MS);
  const skipped = leap && days >= 59 ? 1 : 0;
  const hourOfDay = (localMs - Date.UTC(year, 0, 1)) / HOUR_MS - 24 * days;
  return 24 * (days - skipped) + hourOfDay;
}

/** Value at an hour of the year from a column whose first entry ends hour 1; the year wraps. */
function ending(column: Float64Array, hour: number): number {
  const at = hour - 1 + column.length;
  const i = Math.floor(at);
  const from = column[i % column.length];
  return from + (at - i) * (column[(i + 1) % column.length] - from);
}

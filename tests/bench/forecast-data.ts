/** The open weather and solar files as the benchmark takes them. Absent files give null. */
import { existsSync, readFileSync } from 'node:fs';
import {
  clearSkyGhiWPerM2,
  extraterrestrialWPerM2,
  splitGlobal,
  sunPosition,
  type Irradiance,
} from '../../src/physics/sun.ts';
import { HOUR_MS } from '../../src/time.ts';
import type { TruthWeather } from './forecast-truth.ts';

const DATA = new URL('../../../shared/data/', import.meta.url);

export interface Place {
  readonly zone: string;
  readonly latitudeDeg: number;
  readonly longitudeDeg: number;
  readonly elevationM: number;
}

export interface WeatherFile {
  readonly name: string;
  readonly place: Place;
  /** Whether sunshine was measured; else it is inferred from humidity. */
  readonly sunMeasured: boolean;
  readonly year: number;
  /** Weather at an instant, linear between the lines of the file. */
  at(atMs: number): TruthWeather;
  /** Whether the file has lines round an instant: a gap is a gap for the forecaster too. */
  known(atMs: number): boolean;
}

interface Line {
  readonly atMs: number;
  readonly outdoorC: number;
  readonly dewC: number;
  readonly rhPct: number;
  readonly windMPerS: number;
  readonly ghi: number | null;
}

function rowsOf(name: string): string[][] | null {
  const url = new URL(name, DATA);
  if (!existsSync(url)) {
    console.warn(
      `The open data file ${name} is not beside the project (../shared/data): its part is left out.`,
    );
    return null;
  }
  return readFileSync(url, 'utf8')
    .trim()
    .split('\n')
    .slice(1)
    .map((line) => line.split(','));
}

export function newark(): WeatherFile | null {
  const rows = rowsOf('weather/newark-2013-hourly.csv');
  if (!rows) return null;
  const lines = rows
    .filter((row) => row[1] !== '' && row[2] !== '')
    .map((row) => ({
      atMs: Date.parse(row[0]),
      outdoorC: Number(row[1]),
      dewC: Number(row[2]),
      rhPct: Number(row[3]),
      windMPerS: Number(row[4]),
      ghi: null,
    }));
  const place = { zone: 'America/New_York', latitudeDeg: 40.69, longitudeDeg: -74.17, elevationM: 5 };
  return fileOf('Newark 2013', place, lines, 2013);
}

/** A typical year has no year; it is laid into 2014. Lines are means of the hour that ends at their time, UTC−5. */
export function greensboro(): WeatherFile | null {
  const rows = rowsOf('weather/greensboro-tmy3-hourly.csv');
  if (!rows) return null;
  const lines = rows.map((row) => ({
    atMs: Date.parse(`2014-${row[0]}T00:00:00Z`) + (Number(row[1].slice(0, 2)) + 4.5) * HOUR_MS,
    outdoorC: Number(row[5]),
    dewC: Number(row[6]),
    rhPct: Number(row[7]),
    windMPerS: Number(row[9]),
    ghi: Number(row[2]),
  }));
  const place = { zone: 'America/New_York', latitudeDeg: 36.1, longitudeDeg: -79.95, elevationM: 273 };
  return fileOf('Greensboro TMY3', place, lines, 2014);
}

function fileOf(name: string, place: Place, lines: readonly Line[], year: number): WeatherFile {
  const sorted = lines.toSorted((a, b) => a.atMs - b.atMs);
  const times = sorted.map((line) => line.atMs);
  const around = (atMs: number): readonly [Line, Line, number] => {
    let low = 0;
    let high = times.length - 1;
    while (high - low > 1) {
      const middle = (low + high) >> 1;
      if (times[middle] <= atMs) low = middle;
      else high = middle;
    }
    const share = Math.min(1, Math.max(0, (atMs - times[low]) / (times[high] - times[low])));
    return [sorted[low], sorted[high], share];
  };
  return {
    name,
    place,
    sunMeasured: sorted[0].ghi !== null,
    year,
    at(atMs) {
      const [a, b, share] = around(atMs);
      const mix = (pick: (line: Line) => number): number => pick(a) * (1 - share) + pick(b) * share;
      const outdoorC = mix((line) => line.outdoorC);
      const ghi = a.ghi === null ? null : mix((line) => line.ghi ?? 0);
      const sky =
        ghi === null
          ? inferredSky(
              place,
              atMs,
              mix((line) => line.rhPct),
            )
          : skyOf(place, atMs, ghi);
      return { outdoorC, dewC: mix((line) => line.dewC), windMPerS: mix((line) => line.windMPerS), sky };
    },
    known(atMs) {
      const [a, b] = around(atMs);
      return b.atMs - a.atMs < 1.6 * HOUR_MS;
    },
  };
}

function skyOf(place: Place, atMs: number, ghi: number): Irradiance {
  const { elevationDeg } = sunPosition(atMs, place.latitudeDeg, place.longitudeDeg);
  return splitGlobal(Math.max(0, ghi), elevationDeg, extraterrestrialWPerM2(atMs));
}

/**
 * Where no sunshine was measured: cloud cover from relative humidity (Sundqvist, Berge & Kristjánsson 1989, form, with a
 * critical humidity of 45 %), sunshine from cloud cover (Kasten & Czeplak 1980: 1 − 0.75 n^3.4). An inference, not a
 * measurement; its point is only that the truth has clouds that the forecaster must guess.
 */
function inferredSky(place: Place, atMs: number, rhPct: number): Irradiance {
  const clear = clearSkyGhiWPerM2(atMs, place.latitudeDeg, place.longitudeDeg, place.elevationM);
  const cover = 1 - Math.sqrt(Math.min(1, Math.max(0, (100 - rhPct) / 55)));
  return skyOf(place, atMs, clear * (1 - 0.75 * cover ** 3.4));
}

export interface SolarLine {
  readonly atMs: number;
  readonly powerW: number;
  readonly outdoorC: number | null;
}

/** Measured power of a small array; lines of 15 min. */
export function golden(): { place: Place; lines: SolarLine[] } | null {
  const rows = rowsOf('solar/golden-2016-15min.csv');
  if (!rows) return null;
  const lines = rows
    .filter((row) => row[1] !== '')
    .map((row) => ({
      atMs: Date.parse(row[0].replace(' ', 'T')),
      powerW: Math.max(0, Number(row[1])),
      outdoorC: row[4] === '' ? null : Number(row[4]),
    }));
  return {
    place: { zone: 'America/Denver', latitudeDeg: 39.74, longitudeDeg: -105.17, elevationM: 1829 },
    lines,
  };
}

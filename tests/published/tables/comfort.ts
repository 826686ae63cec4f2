import { heatIndexC, pmvPpd, type ComfortState } from '../../../src/physics/comfort.ts';
import { fromSource, type Row } from '../published-value.ts';

/**
 * ISO 7730:2005 table D.1: air °C, radiant °C, air speed m/s, humidity %, met, clo, PMV, PPD %.
 * Its row 7 (23.5, 23.5, 0.10, 40, 1.2, 1.0 → 0.50, 10) is left out: it stands in the print, but two independent
 * implementations of the standard's own program cannot reproduce it either (they and this one give 0.36).
 */
const TABLE_D1: readonly (readonly [number, number, number, number, number, number, number, number])[] = [
  [22, 22, 0.1, 60, 1.2, 0.5, -0.75, 17],
  [27, 27, 0.1, 60, 1.2, 0.5, 0.77, 17],
  [27, 27, 0.3, 60, 1.2, 0.5, 0.44, 9],
  [23.5, 25.5, 0.1, 60, 1.2, 0.5, -0.01, 5],
  [23.5, 25.5, 0.3, 60, 1.2, 0.5, -0.55, 11],
  [19, 19, 0.1, 40, 1.2, 1, -0.6, 13],
  [23.5, 23.5, 0.3, 40, 1.2, 1, 0.12, 5],
  [23, 21, 0.1, 40, 1.2, 1, 0.05, 5],
  [23, 21, 0.3, 40, 1.2, 1, -0.16, 6],
  [22, 22, 0.1, 60, 1.6, 0.5, 0.05, 5],
  [27, 27, 0.1, 60, 1.6, 0.5, 1.17, 34],
  [27, 27, 0.3, 60, 1.6, 0.5, 0.95, 24],
];

const stateOf = (row: (typeof TABLE_D1)[number]): ComfortState => ({
  airC: row[0],
  radiantC: row[1],
  airSpeedMPerS: row[2],
  relativeHumidityPct: row[3],
  activityMet: row[4],
  clothingClo: row[5],
});

const HEAT_INDEX_F: readonly (readonly [number, number, number])[] = [
  [90, 70, 105.92],
  [100, 50, 118.32],
  [86, 90, 105.39],
  [95, 10, 89.45],
  [82, 40, 81.45],
  [78, 60, 78.16],
];
const heatIndexF = (f: number, humidity: number): number | null => {
  const index = heatIndexC((f - 32) / 1.8, humidity);
  return index === null ? null : index * 1.8 + 32;
};

// The (25 °C, 50 %) → 25.9 °C of pythermalcomfort is left out: it runs the regression below 80 °F, where the Weather
// Service's own procedure keeps its simple form (24.9 °C).

/** Wall chart of the National Weather Service, °F from 80 upwards in steps of 2, as remembered. */
const WALL_CHART: Readonly<Record<number, readonly number[]>> = {
  40: [80, 81, 83, 85, 88, 91, 94, 97, 101, 105, 109, 114, 119, 124, 130, 136],
  60: [82, 84, 88, 91, 95, 100, 105, 110, 116, 123, 129, 137],
  80: [84, 89, 94, 100, 106, 113, 121, 129],
};
const chartRows = Object.entries(WALL_CHART).flatMap(([humidity, cells]) =>
  cells.map((cell, i): Row => {
    const f = 80 + 2 * i;
    return [`heat index at ${f} °F and ${humidity} %, chart`, () => heatIndexF(f, Number(humidity)), cell];
  }),
);

export const comfort = [
  ...fromSource(
    {
      source: 'ISO 7730:2005 table D.1, PMV',
      standing: 'READ',
      why: 'the standard prints two digits and stops its iteration at 0.015 K of clothing temperature',
      tolerance: 0.01,
    },
    TABLE_D1.map((row): Row => [
      `PMV of ${row.slice(0, 6).join(' ')}`,
      () => pmvPpd(stateOf(row))?.pmv ?? null,
      row[6],
    ]),
  ),
  ...fromSource(
    {
      source: 'ISO 7730:2005 table D.1, PPD',
      standing: 'READ',
      why: 'printed in whole per cent, from a PMV of two digits',
      tolerance: 0.6,
    },
    TABLE_D1.map((row): Row => [
      `PPD of ${row.slice(0, 6).join(' ')}`,
      () => pmvPpd(stateOf(row))?.ppdPct ?? null,
      row[7],
    ]),
  ),
  ...fromSource(
    {
      source: 'US National Weather Service, "The Heat Index Equation" (Rothfusz 1990), evaluated',
      standing: 'COMPUTED',
      why: 'half a unit of the last digit',
      tolerance: 6e-3,
    },
    HEAT_INDEX_F.map(([f, humidity, index]): Row => [
      `heat index at ${f} °F and ${humidity} %`,
      () => heatIndexF(f, humidity),
      index,
    ]),
  ),
  ...fromSource(
    {
      source: 'heat index in °C by pythermalcomfort',
      standing: 'READ',
      why: 'printed to 0.1 °C',
      tolerance: 0.05,
    },
    [
      ['heat index at 30 °C and 80 %', () => heatIndexC(30, 80), 37.7],
      ['heat index at 29 °C and 50 %', () => heatIndexC(29, 50), 29.7],
    ],
  ),
  ...fromSource(
    {
      source: 'US National Weather Service wall chart',
      standing: 'from memory',
      why: 'the chart rounds to 1 °F',
      tolerance: 0.6,
    },
    chartRows,
  ),
];

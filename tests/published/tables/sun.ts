import {
  clearSkyFromElevation,
  designProfileC,
  extraterrestrialWPerM2,
  incidenceCosine,
  splitGlobal,
  sunPosition,
} from '../../../src/physics/sun.ts';
import { fromSource, type Row } from '../published-value.ts';

const SPA_MS = Date.UTC(2003, 9, 17, 19, 30, 30);
const LATITUDE = 39.742476;
const LONGITUDE = -105.1786;
const spaNextDay = (): ReturnType<typeof sunPosition> =>
  sunPosition(SPA_MS + 86_400_000, LATITUDE, LONGITUDE);
const spa = (): ReturnType<typeof sunPosition> => sunPosition(SPA_MS, LATITUDE, LONGITUDE);

type Place = readonly [latitudeDeg: number, longitudeDeg: number];
type Moment = readonly [name: string, atMs: number, place: Place];
const GOLDEN: Place = [LATITUDE, LONGITUDE];
const SOUTH: Place = [-35, 0];
const MST_MS = 7 * 3_600_000;

/** SPA counts by UTC days: a sunset after 17:00 at Golden (0:00 UTC) is that of the local evening before. */
const HORIZON: readonly Moment[] = [
  ['sunrise of 2003-10-17, Golden', Date.UTC(2003, 9, 17, 6, 12, 43) + MST_MS, GOLDEN],
  ['sunset of 2003-10-16, Golden', Date.UTC(2003, 9, 16, 17, 20, 19) + MST_MS, GOLDEN],
  ['sunrise of 2015-01-02, Golden', Date.UTC(2015, 0, 2, 7, 21, 55) + MST_MS, GOLDEN],
  ['sunset of 2015-01-02, Golden', Date.UTC(2015, 0, 2, 16, 47, 43) + MST_MS, GOLDEN],
  ['sunrise of 2015-08-02, Golden', Date.UTC(2015, 7, 2, 5, 0, 27) + MST_MS, GOLDEN],
  ['sunset of 2015-08-01, Golden', Date.UTC(2015, 7, 1, 19, 13, 58) + MST_MS, GOLDEN],
  ['sunrise of 1996-07-05, 35° S', Date.UTC(1996, 6, 5, 7, 8, 15), SOUTH],
  ['sunset of 1996-07-05, 35° S', Date.UTC(1996, 6, 5, 17, 1, 4), SOUTH],
  ['sunrise of 2004-12-04, 35° S', Date.UTC(2004, 11, 4, 4, 38, 57), SOUTH],
  ['sunset of 2004-12-04, 35° S', Date.UTC(2004, 11, 4, 19, 2, 3), SOUTH],
];
const TRANSIT: readonly Moment[] = [
  ['transit of 2015-01-02, Golden', Date.UTC(2015, 0, 2, 12, 4, 45) + MST_MS, GOLDEN],
  ['transit of 2015-08-02, Golden', Date.UTC(2015, 7, 2, 12, 6, 58) + MST_MS, GOLDEN],
  ['transit of 1996-07-05, 35° S', Date.UTC(1996, 6, 5, 12, 4, 36), SOUTH],
  ['transit of 2004-12-04, 35° S', Date.UTC(2004, 11, 4, 11, 50, 22), SOUTH],
];

/** Arc between the sun and the meridian. */
function offMeridianDeg(atMs: number, place: Place): number {
  const { azimuthDeg, elevationDeg } = sunPosition(atMs, ...place);
  const radians = Math.PI / 180;
  return Math.asin(Math.sin(azimuthDeg * radians) * Math.cos(elevationDeg * radians)) / radians;
}

// Zenith angle, global W/m², day of the year, beam on the horizontal W/m².
const ERBS: readonly (readonly [number, number, number, number])[] = [
  [30, 800, 172, 603.520225],
  [45, 500, 100, 191.234892],
  [60, 200, 15, 8.17784],
  [80, 150, 300, 91.995499],
  [20, 950, 200, 786.03826],
  [85, 60, 60, 19.772949],
  [78, 45, 120, 0.651409],
];
const erbsBeam = (zenithDeg: number, globalWPerM2: number, day: number): number => {
  const outside = extraterrestrialWPerM2(Date.UTC(2023, 0, day, 12));
  return globalWPerM2 - splitGlobal(globalWPerM2, 90 - zenithDeg, outside).diffuseHorizontalWPerM2;
};

export const sun = [
  ...fromSource(
    {
      source:
        'Reda & Andreas 2004, NREL/TP-560-34302 (SPA), worked example of 2003-10-17 12:30:30 UTC-7; a day later by pvlib-python',
      standing: 'READ',
      why: 'suncalc 2 stays within 0.012° of SPA above 5° of elevation; it takes a standard atmosphere for the refraction, not the 820 mbar and 11 °C of the example',
      tolerance: 0.012,
    },
    [
      ['zenith angle, °', () => 90 - spa().elevationDeg, 50.111622],
      ['azimuth, °', () => spa().azimuthDeg, 194.340241],
      ['zenith angle a day later, °', () => 90 - spaNextDay().elevationDeg, 50.47826],
      ['azimuth a day later, °', () => spaNextDay().azimuthDeg, 194.311132],
    ],
  ),
  ...fromSource(
    {
      source: 'Reda & Andreas 2004, same example (slope 30°, azimuth rotation -10°, from memory)',
      standing: 'READ',
      why: 'follows the error of the position, 0.012°',
      tolerance: 0.012,
    },
    [
      [
        'incidence angle, °',
        () => Math.acos(incidenceCosine(spa(), { tiltDeg: 30, azimuthDeg: 170 })) * (180 / Math.PI),
        25.187,
      ],
    ],
  ),
  ...fromSource(
    {
      source:
        'Reda & Andreas 2004 (SPA), rise and set by its web calculator and worked example, in tests of pvlib-python',
      standing: 'READ-2nd',
      why: 'SPA puts both at -0.8333° without refraction, -0.27° with the standard one; suncalc bends 0.09° less at the horizon, as its source remarks',
      tolerance: 0.1,
    },
    HORIZON.map(([name, atMs, place]): Row => [
      `apparent elevation at ${name}, °`,
      () => sunPosition(atMs, ...place).elevationDeg,
      -0.27,
    ]),
  ),
  ...fromSource(
    {
      source: 'Reda & Andreas 2004 (SPA), transit by its web calculator, in tests of pvlib-python',
      standing: 'READ-2nd',
      why: '0.012° of position and half a second of the printed time (0.002°)',
      tolerance: 0.014,
    },
    TRANSIT.map(([name, atMs, place]): Row => [
      `distance from the meridian at ${name}, °`,
      () => offMeridianDeg(atMs, place),
      0,
    ]),
  ),
  ...fromSource(
    {
      source:
        'Ineichen & Perez 2002 as evaluated by pvlib-python, tests of clearsky.ineichen (zenith 10°, air mass 1, Linke 3, 1364 W/m²)',
      standing: 'READ',
      why: 'half a unit of the last printed digit',
      tolerance: 5e-7,
    },
    [
      ['clear sky at the sea, W/m²', () => clearSkyFromElevation(80, 1, 0, 3, 1364), 1038.159219],
      ['clear sky at 2000 m, W/m²', () => clearSkyFromElevation(80, 1, 2000, 3, 1364), 1134.24312405],
      [
        'clear sky with 1370 W/m² outside, W/m²',
        () => clearSkyFromElevation(80, 1, 0, 3, 1370),
        1042.72590228,
      ],
    ],
  ),
  ...fromSource(
    {
      source:
        'Erbs, Klein & Duffie 1982 with Spencer 1971 and 1366.1 W/m², evaluated by pvlib-python irradiance.erbs',
      standing: 'READ-2nd',
      why: 'half a unit of the last printed digit',
      tolerance: 1e-6,
    },
    ERBS.map(([zenith, global, day, beam]): Row => [
      `beam of ${global} W/m² at zenith ${zenith}°`,
      () => erbsBeam(zenith, global, day),
      beam,
    ]),
  ),
  ...fromSource(
    {
      source: 'ASHRAE Fundamentals 2009, chapter 14 table 6 (fractions of the daily range)',
      standing: 'READ',
      why: 'a table of two digits, taken over exactly',
      tolerance: 1e-12,
    },
    [
      ['design day at 5 h: the minimum', () => designProfileC(5, 35, 10), 25],
      ['design day at 14 h: the maximum', () => designProfileC(14, 35, 10), 35],
      ['design day at 0 h', () => designProfileC(0, 35, 10), 26.8],
      ['design day at 20 h', () => designProfileC(20, 35, 10), 30],
      ['design day at 23 h', () => designProfileC(23, 35, 10), 27.5],
    ],
  ),
];

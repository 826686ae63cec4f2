/**
 * The sun's place (suncalc 2), the clear sky, the split of horizontal sunshine into beam and diffuse, and
 * what falls on a tilted plane. Azimuths count clockwise from north: east 90°, south 180°.
 */
import { getPosition } from 'suncalc';
import { DAY_MS } from '../time.ts';
import { standardPressurePa } from './moist-air.ts';

const RADIANS = Math.PI / 180;
const sinD = (degrees: number): number => Math.sin(degrees * RADIANS);
const cosD = (degrees: number): number => Math.cos(degrees * RADIANS);

export interface SunPosition {
  /** Apparent height above the horizon: refraction is counted. */
  readonly elevationDeg: number;
  readonly azimuthDeg: number;
}

/** Position of the sun; within 0.012° of NREL's SPA above 5° at every instant of tests/published. */
export function sunPosition(atMs: number, latitudeDeg: number, longitudeDeg: number): SunPosition {
  const { altitude, azimuth } = getPosition(new Date(atMs), latitudeDeg, longitudeDeg);
  return { elevationDeg: altitude, azimuthDeg: azimuth };
}

/** ASTM E490-00a, W/m². */
const SOLAR_CONSTANT_W_PER_M2 = 1366.1;

/**
 * Sunshine outside the atmosphere on a plane facing the sun, W/m²: Spencer 1971, "Fourier series
 * representation".
 */
export function extraterrestrialWPerM2(atMs: number): number {
  const yearStartMs = Date.UTC(new Date(atMs).getUTCFullYear(), 0, 1);
  const dayAngle = (2 * Math.PI * Math.floor((atMs - yearStartMs) / DAY_MS)) / 365;
  const nearness =
    1.00011 +
    0.034221 * Math.cos(dayAngle) +
    0.00128 * Math.sin(dayAngle) +
    0.000719 * Math.cos(2 * dayAngle) +
    0.000077 * Math.sin(2 * dayAngle);
  return SOLAR_CONSTANT_W_PER_M2 * nearness;
}

/** Relative optical air mass from the apparent elevation: Kasten & Young 1989, eq. 3. */
export function relativeAirMass(elevationDeg: number): number {
  return 1 / (sinD(elevationDeg) + 0.50572 * (elevationDeg + 6.07995) ** -1.6364);
}

/**
 * A rural summer sky. Linke turbidity runs from 2 (clean, cold) to 5 (hazy); without a local value 3 is
 * common practice, no source.
 */
const USUAL_LINKE_TURBIDITY = 3;

/**
 * Global horizontal irradiance of a cloudless sky, W/m²: Ineichen & Perez 2002, "A new airmass independent
 * formulation for the Linke turbidity coefficient", Solar Energy 73(3), as corrected by Perez et al. 2002,
 * Solar Energy 73(5):311, without its factor for high air masses.
 */
export function clearSkyFromElevation(
  elevationDeg: number,
  absoluteAirMass: number,
  siteElevationM: number,
  linkeTurbidity: number,
  extraterrestrial: number,
): number {
  if (!(elevationDeg > 0)) return 0;
  const fh1 = Math.exp(-siteElevationM / 8000);
  const fh2 = Math.exp(-siteElevationM / 1250);
  const cg1 = 5.09e-5 * siteElevationM + 0.868;
  const cg2 = 3.92e-5 * siteElevationM + 0.0387;
  const clarity = Math.exp(-cg2 * absoluteAirMass * (fh1 + fh2 * (linkeTurbidity - 1)));
  return cg1 * extraterrestrial * sinD(elevationDeg) * clarity;
}

/**
 * Global horizontal irradiance under a cloudless sky at a place and instant, W/m²; 0 while the sun is down.
 */
export function clearSkyGhiWPerM2(
  atMs: number,
  latitudeDeg: number,
  longitudeDeg: number,
  siteElevationM: number,
  linkeTurbidity = USUAL_LINKE_TURBIDITY,
): number {
  const { elevationDeg } = sunPosition(atMs, latitudeDeg, longitudeDeg);
  if (!(elevationDeg > 0)) return 0;
  const airMass =
    relativeAirMass(elevationDeg) * (standardPressurePa(siteElevationM) / standardPressurePa(0));
  const extraterrestrial = extraterrestrialWPerM2(atMs);
  return clearSkyFromElevation(elevationDeg, airMass, siteElevationM, linkeTurbidity, extraterrestrial);
}

export interface Irradiance {
  readonly globalHorizontalWPerM2: number;
  readonly directNormalWPerM2: number;
  readonly diffuseHorizontalWPerM2: number;
}

/**
 * Share of the horizontal sunshine that is diffuse, from the clearness index: Erbs, Klein & Duffie 1982, eq.
 * 1.
 */
export function diffuseFraction(clearness: number): number {
  const k = clearness;
  if (k <= 0.22) return 1 - 0.09 * k;
  if (k <= 0.8) return 0.9511 - 0.1604 * k + 4.388 * k ** 2 - 16.638 * k ** 3 + 12.336 * k ** 4;
  return 0.165;
}

/** Below this sine of elevation (3.7°) the beam on a horizontal plane is too little to divide by. */
const LEAST_SINE = 0.065;

/** Splits global horizontal sunshine by Erbs et al. 1982. All is diffuse while the sun is down. */
export function splitGlobal(
  globalHorizontalWPerM2: number,
  elevationDeg: number,
  extraterrestrial: number,
): Irradiance {
  const sine = sinD(elevationDeg);
  if (!(sine > 0)) {
    return {
      globalHorizontalWPerM2,
      directNormalWPerM2: 0,
      diffuseHorizontalWPerM2: globalHorizontalWPerM2,
    };
  }
  const clearness = globalHorizontalWPerM2 / (extraterrestrial * Math.max(sine, LEAST_SINE));
  const diffuseHorizontalWPerM2 = globalHorizontalWPerM2 * diffuseFraction(Math.max(0, clearness));
  const directNormalWPerM2 =
    sine < LEAST_SINE ? 0 : (globalHorizontalWPerM2 - diffuseHorizontalWPerM2) / sine;
  return {
    globalHorizontalWPerM2,
    directNormalWPerM2,
    diffuseHorizontalWPerM2: sine < LEAST_SINE ? globalHorizontalWPerM2 : diffuseHorizontalWPerM2,
  };
}

/** A plane: tilt from horizontal (90 a wall) and the azimuth it faces. */
export interface Plane {
  readonly tiltDeg: number;
  readonly azimuthDeg: number;
}

/** Cosine of the angle between the sun and a plane's normal; negative when the sun is behind it. */
export function incidenceCosine(sun: SunPosition, plane: Plane): number {
  return (
    sinD(sun.elevationDeg) * cosD(plane.tiltDeg) +
    cosD(sun.elevationDeg) * sinD(plane.tiltDeg) * cosD(sun.azimuthDeg - plane.azimuthDeg)
  );
}

/** Reflectance of grass or bare ground, common practice, no source. */
const USUAL_ALBEDO = 0.2;

/** Irradiance on a plane, W/m², sky and ground taken as evenly bright: Liu & Jordan 1963. */
export function planeOfArray(sun: SunPosition, sky: Irradiance, plane: Plane, albedo = USUAL_ALBEDO): number {
  const beam = sky.directNormalWPerM2 * Math.max(0, incidenceCosine(sun, plane));
  const skyShare = (1 + cosD(plane.tiltDeg)) / 2;
  const groundShare = (1 - cosD(plane.tiltDeg)) / 2;
  return beam + sky.diffuseHorizontalWPerM2 * skyShare + albedo * sky.globalHorizontalWPerM2 * groundShare;
}

/**
 * Part of the daily range below the day's maximum at clock hours 0 … 23: ASHRAE Fundamentals 2009, ch. 14
 * table 6.
 */
export const DAILY_RANGE_FRACTIONS = [
  0.82, 0.88, 0.92, 0.95, 0.98, 1, 0.98, 0.91, 0.74, 0.55, 0.38, 0.23, 0.13, 0.05, 0, 0, 0.06, 0.14, 0.24,
  0.39, 0.5, 0.59, 0.68, 0.75,
] as const;

/** Outdoor temperature of a design day at an hour of the clock (fractions between hours are linear), °C. */
export function designProfileC(hour: number, maximumC: number, dailyRangeK: number): number {
  const wrapped = ((hour % 24) + 24) % 24;
  const before = Math.floor(wrapped);
  const share = wrapped - before;
  const fraction =
    (1 - share) * DAILY_RANGE_FRACTIONS[before] + share * DAILY_RANGE_FRACTIONS[(before + 1) % 24];
  return maximumC - dailyRangeK * fraction;
}

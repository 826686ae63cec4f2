/** How warm people feel: Fanger's vote (ISO 7730) and the heat index of the US National Weather Service. */

export interface ComfortState {
  readonly airC: number;
  /** Mean radiant temperature. */
  readonly radiantC: number;
  readonly airSpeedMPerS: number;
  readonly relativeHumidityPct: number;
  /** Activity: 1 met = 58.15 W/m²; sleeping 0.7, seated 1.2. */
  readonly activityMet: number;
  /** Clothing: 1 clo = 0.155 m²K/W; summer 0.5, winter 1. */
  readonly clothingClo: number;
}

export interface ComfortVote {
  /** Predicted mean vote, -3 cold … +3 hot. */
  readonly pmv: number;
  /** Predicted percentage of dissatisfied, %. */
  readonly ppdPct: number;
}

const MET_W_PER_M2 = 58.15;
const CLO_M2K_PER_W = 0.155;
const KELVIN = 273;
const MAX_ITERATIONS = 150;
const CONVERGED_K_PER_100 = 0.00015;

/** Vapour pressure of the room, Pa, by the formula of ISO 7730 annex D. */
export function comfortVapourPressurePa(airC: number, relativeHumidityPct: number): number {
  return relativeHumidityPct * 10 * Math.exp(16.6536 - 4030.183 / (airC + 235));
}

/**
 * PMV and PPD of ISO 7730:2005, eq. 1 to 5, solved as its annex D solves them; no external work. The standard
 * holds them for 10–30 °C air, 0.8–4 met, 0–2 clo and air below 1 m/s. null when an input is not a number of
 * that kind or the clothing surface temperature does not settle.
 */
export function pmvPpd(state: ComfortState): ComfortVote | null {
  const insulation = CLO_M2K_PER_W * state.clothingClo;
  if (!(insulation >= 0 && state.activityMet > 0 && state.airSpeedMPerS >= 0)) return null;
  const surface = clothingSurface(state, insulation);
  if (surface === null) return null;
  const metabolism = state.activityMet * MET_W_PER_M2;
  const sensitivity = 0.303 * Math.exp(-0.036 * metabolism) + 0.028;
  const pmv = sensitivity * (metabolism - heatLoss(state, metabolism, surface));
  if (!Number.isFinite(pmv)) return null;
  const ppdPct = 100 - 95 * Math.exp(-0.03353 * pmv ** 4 - 0.2179 * pmv ** 2);
  return { pmv, ppdPct };
}

interface ClothingSurface {
  readonly temperatureC: number;
  readonly areaFactor: number;
  readonly convectionWPerM2K: number;
}

/** ISO 7730:2005 eq. 2 to 4: clothing surface temperature by damped substitution in hundreds of kelvin. */
function clothingSurface(state: ComfortState, insulation: number): ClothingSurface | null {
  const areaFactor = insulation <= 0.078 ? 1 + 1.29 * insulation : 1.05 + 0.645 * insulation;
  const forced = 12.1 * Math.sqrt(state.airSpeedMPerS);
  const airK = state.airC + KELVIN;
  const radiantK = state.radiantC + KELVIN;
  const metabolism = state.activityMet * MET_W_PER_M2;
  const p1 = insulation * areaFactor;
  const p2 = p1 * 3.96;
  const p3 = p1 * 100;
  const p4 = p1 * airK;
  const p5 = 308.7 - 0.028 * metabolism + p2 * (radiantK / 100) ** 4;
  let guess = (airK + (35.5 - state.airC) / (3.5 * (6.45 * insulation + 0.1))) / 100;
  for (let i = 0; i < MAX_ITERATIONS; i++) {
    const natural = 2.38 * Math.abs(100 * guess - airK) ** 0.25;
    const convectionWPerM2K = Math.max(forced, natural);
    const next = (p5 + p4 * convectionWPerM2K - p2 * guess ** 4) / (100 + p3 * convectionWPerM2K);
    if (Math.abs(next - guess) <= CONVERGED_K_PER_100) {
      return { temperatureC: 100 * next - KELVIN, areaFactor, convectionWPerM2K };
    }
    guess = (guess + next) / 2;
  }
  return null;
}

/** ISO 7730:2005 eq. 1, the six ways that heat leaves the body, W/m². */
function heatLoss(state: ComfortState, metabolism: number, surface: ClothingSurface): number {
  const vapourPa = comfortVapourPressurePa(state.airC, state.relativeHumidityPct);
  const skin = 3.05e-3 * (5733 - 6.99 * metabolism - vapourPa);
  const sweat = Math.max(0, 0.42 * (metabolism - MET_W_PER_M2));
  const latentBreath = 1.7e-5 * metabolism * (5867 - vapourPa);
  const dryBreath = 0.0014 * metabolism * (34 - state.airC);
  const surfaceK = (surface.temperatureC + KELVIN) / 100;
  const radiation = 3.96 * surface.areaFactor * (surfaceK ** 4 - ((state.radiantC + KELVIN) / 100) ** 4);
  const convection = surface.areaFactor * surface.convectionWPerM2K * (surface.temperatureC - state.airC);
  return skin + sweat + latentBreath + dryBreath + radiation + convection;
}

/**
 * Heat index, °C, of shade and light wind: US National Weather Service, Weather Prediction Center, "The Heat
 * Index Equation" (Rothfusz 1990 regression in °F with its two adjustments and the simple form below 80 °F).
 * null when the temperature is no number or the humidity is not within 0–100 %.
 */
export function heatIndexC(airC: number, relativeHumidityPct: number): number | null {
  const meaningful = Number.isFinite(airC) && relativeHumidityPct >= 0 && relativeHumidityPct <= 100;
  if (!meaningful) return null;
  return (heatIndexF(airC * 1.8 + 32, relativeHumidityPct) - 32) / 1.8;
}

function heatIndexF(t: number, r: number): number {
  const simple = (0.5 * (t + 61 + (t - 68) * 1.2 + r * 0.094) + t) / 2;
  if (simple < 80) return simple;
  const linear = -42.379 + 2.04901523 * t + 10.14333127 * r - 0.22475541 * t * r;
  const quadratic = -0.00683783 * t * t - 0.05481717 * r * r;
  const mixed = 0.00122874 * t * t * r + 0.00085282 * t * r * r - 0.00000199 * t * t * r * r;
  return linear + quadratic + mixed + adjustmentF(t, r);
}

function adjustmentF(t: number, r: number): number {
  if (r < 13 && t >= 80 && t <= 112) return -((13 - r) / 4) * Math.sqrt((17 - Math.abs(t - 95)) / 17);
  if (r > 85 && t >= 80 && t <= 87) return ((r - 85) / 10) * ((87 - t) / 5);
  return 0;
}

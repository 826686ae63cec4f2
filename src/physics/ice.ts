/**
 * Ice Ih by the IAPWS equation of state: R10-06(2009), "Revised Release on the Equation of State 2006 for H2O
 * Ice Ih". Gibbs energy g(T, p) of eq. 1–5 and its derivatives of table 4, from 0 to 273.16 K and up to 210
 * MPa. Complex numbers are pairs [real, imaginary].
 */
import { RimeholdError } from '../errors.ts';

type Complex = readonly [re: number, im: number];

const TRIPLE_K = 273.16;
const TRIPLE_PA = 611.657;
const NORMAL_PA = 101_325;
const NORMAL_PRESSURE = NORMAL_PA / TRIPLE_PA;

// R10-06 table 2; g in J/kg, s0 in J/(kg K) of the IAPWS-95 reference state, r in J/(kg K).
const G0 = [
  -0.632020233335886e6, 0.655022213658955, -0.189369929326131e-7, 0.339746123271053e-14,
  -0.556464869058991e-21,
] as const;
const S0 = -0.332733756492168e4;
const T1: Complex = [0.368017112855051e-1, 0.510878114959572e-1];
const R1: Complex = [0.447050716285388e2, 0.656876847463481e2];
const T2: Complex = [0.337315741065416, 0.335449415919309];
const R2: readonly Complex[] = [
  [-0.72597457432922e2, -0.78100842711287e2],
  [-0.557107698030123e-4, 0.464578634580806e-4],
  [0.234801409215913e-10, -0.285651142904972e-10],
];

const add = (a: Complex, b: Complex): Complex => [a[0] + b[0], a[1] + b[1]];
const subtract = (a: Complex, b: Complex): Complex => [a[0] - b[0], a[1] - b[1]];
const times = (a: Complex, b: Complex): Complex => [a[0] * b[0] - a[1] * b[1], a[0] * b[1] + a[1] * b[0]];
const scale = (a: Complex, k: number): Complex => [a[0] * k, a[1] * k];
const inverse = (a: Complex): Complex => scale([a[0], -a[1]], 1 / (a[0] ** 2 + a[1] ** 2));
const log = (a: Complex): Complex => [Math.log(Math.hypot(a[0], a[1])), Math.atan2(a[1], a[0])];
const timesLog = (a: Complex): Complex => times(a, log(a));

/** The bracket of eq. 1: (t-τ)ln(t-τ) + (t+τ)ln(t+τ) - 2t ln t - τ²/t. */
function bracket(t: Complex, tau: number): Complex {
  const sum = add(timesLog(subtract(t, [tau, 0])), timesLog(add(t, [tau, 0])));
  return subtract(subtract(sum, scale(timesLog(t), 2)), scale(inverse(t), tau * tau));
}

/** Its derivative by τ: -ln(t-τ) + ln(t+τ) - 2τ/t. */
function bracketSlope(t: Complex, tau: number): Complex {
  const difference = subtract(log(add(t, [tau, 0])), log(subtract(t, [tau, 0])));
  return subtract(difference, scale(inverse(t), 2 * tau));
}

/** Its second derivative: 1/(t-τ) + 1/(t+τ) - 2/t. */
function bracketBend(t: Complex, tau: number): Complex {
  const sum = add(inverse(subtract(t, [tau, 0])), inverse(add(t, [tau, 0])));
  return subtract(sum, scale(inverse(t), 2));
}

export interface IceProperties {
  /** Zero as for IAPWS water: liquid at the triple point has no internal energy. */
  readonly enthalpyJPerKg: number;
  readonly entropyJPerKgK: number;
  readonly heatCapacityJPerKgK: number;
  readonly densityKgPerM3: number;
}

/** Properties of ice at a temperature (K) and pressure (Pa). Throws outside 0–273.16 K and 0–210 MPa. */
export function iceProperties(temperatureK: number, pressurePa: number): IceProperties {
  if (!(temperatureK > 0 && temperatureK <= TRIPLE_K && pressurePa >= 0 && pressurePa <= 210e6)) {
    throw new RimeholdError(
      'internal',
      `Expected ice of 0 to 273.16 K and 0 to 210 MPa, found ${temperatureK} K and ${pressurePa} Pa.`,
      { temperatureK, pressurePa },
    );
  }
  const tau = temperatureK / TRIPLE_K;
  const x = pressurePa / TRIPLE_PA - NORMAL_PRESSURE;
  const r2 = add(R2[0], add(scale(R2[1], x), scale(R2[2], x * x)));
  const r2Slope = scale(add(R2[1], scale(R2[2], 2 * x)), 1 / TRIPLE_PA);
  const g0 = G0.reduce((sum, g, k) => sum + g * x ** k, 0);
  const g0Slope = G0.reduce((sum, g, k) => (k === 0 ? sum : sum + (g * k * x ** (k - 1)) / TRIPLE_PA), 0);

  const both = (part: (t: Complex, at: number) => Complex): number =>
    add(times(R1, part(T1, tau)), times(r2, part(T2, tau)))[0];
  const gibbs = g0 - S0 * TRIPLE_K * tau + TRIPLE_K * both(bracket);
  const gibbsT = -S0 + both(bracketSlope);
  const gibbsTT = both(bracketBend) / TRIPLE_K;
  const gibbsP = g0Slope + TRIPLE_K * times(r2Slope, bracket(T2, tau))[0];
  return {
    enthalpyJPerKg: gibbs - temperatureK * gibbsT,
    entropyJPerKgK: -gibbsT,
    heatCapacityJPerKgK: -temperatureK * gibbsTT,
    densityKgPerM3: 1 / gibbsP,
  };
}

/** Properties of ice at a temperature of 0 °C or less under a standard atmosphere. */
export function iceAtNormalPressure(iceC: number): IceProperties {
  return iceProperties(iceC + 273.15, NORMAL_PA);
}

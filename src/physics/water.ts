/**
 * Liquid water and ice at atmospheric pressure.
 *
 * Liquid: IAPWS SR6-08(2011), "Revised Supplementary Release on Properties of Liquid Water at 0.1 MPa",
 * equations for the Gibbs energy, volume and heat capacity with their coefficients of Table 1, from -20 to
 * 110 °C: supercooled water is included. The 1.3 kPa to a standard atmosphere are neglected: 1.3 J/kg of
 * enthalpy. Enthalpy has the IAPWS zero: liquid at the triple point has no internal energy, so water at 0 °C
 * has about 60 J/kg.
 */
import { RimeholdError } from '../errors.ts';

/**
 * Mean heat capacity of water between 0 and 15 °C (SR6-08 gives 4201.0), rounded, for rates in that range,
 * J/(kg K).
 */
export const WATER_CP_J_PER_KG_K = 4200;

/**
 * Heat to melt ice at the normal ice point: IAPWS-95 liquid less IAPWS R10-06(2009) ice, 0.0716 + 333.3549
 * kJ/kg.
 */
export const FUSION_J_PER_KG = 333_426.5;

/** Ice at the normal ice point, kg/m³: IAPWS R10-06(2009), check table. */
export const ICE_DENSITY = 916.721463419;

/** Ice at the normal ice point, J/(kg K): IAPWS R10-06(2009), check table. */
export const ICE_CP = 2096.71391024;

/**
 * Thermal conductivity of ice at 0 °C, W/(m K): the middle of the printed values, 2.14 (CRC Handbook), 2.22
 * (FAO) and 2.24; the sources differ by 5 %.
 */
export const ICE_CONDUCTIVITY = 2.22;

const GAS_CONSTANT_J_PER_KG_K = 461.51805;
const KELVIN = 273.15;

type Term = readonly [coefficient: number, exponent: number];

// SR6-08 Table 1. g: terms 1–4, v: terms 5–10.
const G_ALPHA: readonly Term[] = [
  [-1.661470539e5, 4],
  [2.70878164e6, 5],
  [-1.557191544e8, 7],
];
const G_BETA: readonly Term[] = [
  [-8.237426256e-1, 2],
  [1.908956353, 3],
  [-2.017597384, 4],
  [8.546361348e-1, 5],
];
const V_ALPHA: readonly Term[] = [
  [1.93763157e-2, 0],
  [6.74458446e3, 4],
  [-2.22521604e5, 5],
  [1.00231247e8, 7],
  [-1.63552118e9, 8],
  [8.32299658e9, 9],
];
const V_BETA: readonly Term[] = [
  [5.78545292e-3, 1],
  [-1.53195665e-2, 2],
  [3.11337859e-2, 3],
  [-4.23546241e-2, 4],
  [3.38713507e-2, 5],
  [-1.19946761e-2, 6],
];
const C1 = -2.452093414e2;
const C3 = -8.983025854;

/** Coefficients by rising power of Σ weight(n) a x^(n + shift), so that Horner's rule can run over them. */
function byPower(terms: readonly Term[], weight: (n: number) => number, shift: number): readonly number[] {
  const degree = Math.max(...terms.map(([, n]) => n)) + shift;
  const dense = Array.from({ length: degree + 1 }, () => 0);
  for (const [a, n] of terms) dense[n + shift] = a * weight(n);
  return dense;
}

const horner = (coefficients: readonly number[], x: number): number =>
  coefficients.reduceRight((sum, coefficient) => sum * x + coefficient, 0);

const itself = (terms: readonly Term[]): readonly number[] => byPower(terms, () => 1, 0);
const slope = (terms: readonly Term[]): readonly number[] => byPower(terms, (n) => n, 1);
const bend = (terms: readonly Term[]): readonly number[] => byPower(terms, (n) => n * (n + 1), 2);

const GIBBS = { alpha: itself(G_ALPHA), beta: itself(G_BETA) };
const ENTROPY = { alpha: slope(G_ALPHA), beta: slope(G_BETA) };
const HEAT_CAPACITY = { alpha: bend(G_ALPHA), beta: bend(G_BETA) };
const VOLUME = { alpha: itself(V_ALPHA), beta: itself(V_BETA) };

/** The reduced temperatures of SR6-08: tau = T/10 K, alpha = 10 K/(593 K - T), beta = 10 K/(T - 232 K). */
function reduced(waterC: number): { tau: number; alpha: number; beta: number } {
  if (!(waterC >= -20 && waterC <= 110)) {
    throw new RimeholdError('internal', `Expected liquid water of -20 to 110 °C, found ${waterC} °C.`, {
      waterC,
    });
  }
  const kelvin = waterC + KELVIN;
  return { tau: kelvin / 10, alpha: 10 / (593 - kelvin), beta: 10 / (kelvin - 232) };
}

/** Specific enthalpy of liquid water, J/kg: SR6-08 eq. 1 and 4, h = g + T s. Throws outside -20 to 110 °C. */
export function waterEnthalpyJPerKg(waterC: number): number {
  const { tau, alpha, beta } = reduced(waterC);
  const gibbs = C1 + horner(GIBBS.alpha, alpha) + horner(GIBBS.beta, beta);
  const entropy = C3 + horner(ENTROPY.alpha, alpha) - horner(ENTROPY.beta, beta);
  return GAS_CONSTANT_J_PER_KG_K * 10 * (gibbs - tau * entropy);
}

/** Isobaric heat capacity of liquid water, J/(kg K): SR6-08 eq. 5. Throws outside -20 to 110 °C. */
export function waterHeatCapacityJPerKgK(waterC: number): number {
  const { tau, alpha, beta } = reduced(waterC);
  const bends = horner(HEAT_CAPACITY.alpha, alpha) + horner(HEAT_CAPACITY.beta, beta);
  return -GAS_CONSTANT_J_PER_KG_K * (C3 + tau * bends);
}

/** Density of liquid water, kg/m³, greatest at 4 °C: SR6-08 eq. 2. Throws outside -20 to 110 °C. */
export function waterDensityKgPerM3(waterC: number): number {
  const { alpha, beta } = reduced(waterC);
  const volume =
    ((GAS_CONSTANT_J_PER_KG_K * 10) / 1e5) * (horner(VOLUME.alpha, alpha) + horner(VOLUME.beta, beta));
  return 1 / volume;
}

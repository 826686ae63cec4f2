/**
 * Published performance curves of ice tanks: what a tank gives or takes at a state of charge and at its
 * coolant's entering temperature. Signs: heat is counted positive into the coolant while it freezes the
 * tank's water (charging) and positive out of the coolant while it melts ice (discharging), so both are ≥ 0.
 */
import { findRoot } from '../numerics/root.ts';

export type Direction = 'charging' | 'discharging';

/** C1 … C6 of the quadratic-linear curve. */
export type CurveCoefficients = readonly [number, number, number, number, number, number];

/**
 * Quadratic-linear curve of Strand 1992 (MS thesis, University of Illinois), as documented in the EnergyPlus
 * Engineering Reference: q*·dt = (C1 + C2x + C3x²) + (C4 + C5x + C6x²)·LMTD*.
 */
export interface TankCurve {
  readonly charging: CurveCoefficients;
  readonly discharging: CurveCoefficients;
  /** The dt of the fit, s. */
  readonly intervalS: number;
  /** Latent capacity of the full tank, J. */
  readonly capacityJ: number;
  readonly freezingC: number;
}

/** LMTD* = 1 at this mean difference, K: the common nominal value of every published coefficient set. */
const NOMINAL_LMTD_K = 10;

// Least differences that keep the logarithm in bounds: Modelica Buildings Library, calculateLMTDStar.mo.
const LEAST_ENTERING_K = 0.02;
const LEAST_LEAVING_K = 0.01;

/**
 * No freezing or melting nearer to the freezing point than this: Modelica Buildings Library,
 * BaseClasses/Tank.mo.
 */
const DEAD_BAND_K = 0.01;

/** Mean temperature difference over 10 K, regularised at the freezing point; 0 or more. */
export function lmtdStar(enteringC: number, leavingC: number, freezingC: number): number {
  const entering = Math.max(LEAST_ENTERING_K, Math.abs(enteringC - freezingC));
  const leaving = Math.max(LEAST_LEAVING_K, Math.abs(leavingC - freezingC));
  const ratio = entering / leaving;
  // Near equal ends the logarithm loses its digits; the mean of both is its limit.
  if (Math.abs(ratio - 1) < 1e-6) return (entering + leaving) / 2 / NOMINAL_LMTD_K;
  return Math.max(0, Math.abs(enteringC - leavingC) / Math.log(ratio) / NOMINAL_LMTD_K);
}

/**
 * q*, the share of the capacity per interval of the fit, clamped at 0; x is the state of charge or its
 * complement.
 */
export function normalisedRate(c: CurveCoefficients, x: number, star: number): number {
  return Math.max(0, c[0] + c[1] * x + c[2] * x * x + (c[3] + c[4] * x + c[5] * x * x) * star);
}

/** Heat rate of a tank, W, at a state of charge (0–1) and LMTD*. */
export function curveHeatW(
  curve: TankCurve,
  direction: Direction,
  stateOfCharge: number,
  star: number,
): number {
  const x = direction === 'charging' ? stateOfCharge : 1 - stateOfCharge;
  return (normalisedRate(curve[direction], x, star) * curve.capacityJ) / curve.intervalS;
}

export interface TankFlow {
  readonly direction: Direction | null;
  readonly heatW: number;
  readonly leavingC: number;
}

/**
 * Solves the curve together with Q = ṁcp|Tin − Tout|. Direction null, no heat and leaving as entering when
 * there is no flow or the coolant is at the freezing point. Heat never exceeds what brings the coolant to the
 * freezing point.
 */
export function solveTank(
  curve: TankCurve,
  stateOfCharge: number,
  enteringC: number,
  flowWPerK: number,
): TankFlow {
  const approach = enteringC - curve.freezingC;
  if (!(flowWPerK > 0 && Math.abs(approach) > DEAD_BAND_K)) {
    return { direction: null, heatW: 0, leavingC: enteringC };
  }
  const direction: Direction = approach < 0 ? 'charging' : 'discharging';
  // Share of the way to the freezing point that the coolant goes: 0 … 1.
  const surplusW = (share: number): number => {
    const star = lmtdStar(enteringC, enteringC - share * approach, curve.freezingC);
    return curveHeatW(curve, direction, stateOfCharge, star) - share * flowWPerK * Math.abs(approach);
  };
  const share = surplusW(1) >= 0 ? 1 : (findRoot(surplusW, 0, 1) ?? 0);
  return {
    direction,
    heatW: share * flowWPerK * Math.abs(approach),
    leavingC: enteringC - share * approach,
  };
}

/**
 * A simulated tank, both directions, capacity to be given: EnergyPlus testfiles/5ZoneDetailedIceStorage.idf,
 * by Modelica Buildings Library Data/Tank/EnergyPlus.mo.
 */
export function simulatedTank(capacityJ: number): TankCurve {
  const both: CurveCoefficients = [0, 0.09, -0.15, 0.612, -0.324, -0.216];
  return { charging: both, discharging: both, intervalS: 3600, capacityJ, freezingC: 0 };
}

/** Ice mass of the measured tank when full, kg, and the heat of fusion that its authors used, J/kg. */
export const MEASURED_TANK_ICE_KG = 2846.35;
export const MEASURED_TANK_FUSION_J_PER_KG = 333_550;

/**
 * The full-size tank measured by Li, Fu, Pertzborn, Wen & O'Neill 2021, "An Ice Storage Tank Modelica Model"
 * (doi 10.3384/ecp21181177): Modelica Buildings Library Data/Tank/Experiment.mo.
 */
export const MEASURED_TANK: TankCurve = {
  charging: [1.76953858e-4, 0, 0, 0, 0, 0],
  discharging: [5.54e-5, -1.45679e-4, 9.28e-5, 1.126122e-3, -1.1012e-3, 3.00544e-4],
  intervalS: 10,
  capacityJ: MEASURED_TANK_ICE_KG * MEASURED_TANK_FUSION_J_PER_KG,
  freezingC: 0,
};

/** Which face of the ice the coolant or water meets. */
export type MeltForm = 'internal' | 'external';

// Henze & Krarti 2002 (DOE DE-FC-26-01NT41255), as documented in the EnergyPlus Engineering Reference.
const UA_POLYNOMIALS: Readonly<Record<MeltForm, readonly number[]>> = {
  internal: [1.3879, -7.6333, 26.3423, -47.6084, 41.8498, -14.2948],
  external: [1.1756, -5.3689, 17.3602, -30.1077, 25.6387, -8.5102],
};

/**
 * The polynomial alone; y is the ice fraction (charging) or its complement (melting). Charging uses the
 * internal one. Published with no tank loss, for entering temperatures below -1 °C (charging) or above 1 °C
 * (melting).
 */
export function uaPolynomial(form: MeltForm, y: number): number {
  return UA_POLYNOMIALS[form].reduceRight((sum, coefficient) => sum * y + coefficient, 0);
}

/**
 * Conductance between coolant and ice, W/K, of a tank of a nominal capacity in J: polynomial × Q/3600 s/10 K.
 */
export function tankUaWPerK(form: MeltForm, y: number, capacityJ: number): number {
  return (uaPolynomial(form, y) * capacityJ) / 3600 / NOMINAL_LMTD_K;
}

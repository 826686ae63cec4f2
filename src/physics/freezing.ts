/**
 * How ice grows: the exact solutions of Neumann for a flat front, the quasi-steady one of Stefan, and
 * quasi-steady growth on a cold tube. Lengths in m, times in s.
 */
import { erf } from '../numerics/erf.ts';
import { findRoot } from '../numerics/root.ts';
import { FUSION_J_PER_KG, ICE_CONDUCTIVITY, ICE_DENSITY } from './water.ts';

/** Conduction properties of one phase. */
export interface Phase {
  readonly conductivityWPerMK: number;
  readonly heatCapacityJPerKgK: number;
  readonly densityKgPerM3: number;
}

const diffusivity = (p: Phase): number => p.conductivityWPerMK / (p.heatCapacityJPerKgK * p.densityKgPerM3);

/** Above this the front outruns anything that ice does (Stefan number beyond 1e4). */
const LARGEST_LAMBDA = 3;

/**
 * Growth constant λ of the front 2λ√(αt) in water that is already at the ice point: √π λ e^(λ²) erf λ = Ste
 * (Neumann; Carslaw & Jaeger 1959, 11.2). null when the Stefan number is not above zero or beyond any ice.
 */
export function onePhaseLambda(stefanNumber: number): number | null {
  const residual = (l: number): number => Math.sqrt(Math.PI) * l * Math.exp(l * l) * erf(l) - stefanNumber;
  return findRoot(residual, 1e-9, LARGEST_LAMBDA, { tolerance: 1e-12 });
}

export interface TwoPhaseCase {
  readonly ice: Phase;
  readonly water: Phase;
  readonly fusionJPerKg: number;
  /** How far the cold face is below the ice point, K. */
  readonly subcoolingK: number;
  /** How far the water, far away, is above the ice point, K. */
  readonly superheatK: number;
}

/**
 * Growth constant λ when the water is warmer than the ice point (Neumann; Carslaw & Jaeger 1959, 11.2 eq.
 * 11), change of volume neglected. null when no front can grow.
 */
export function twoPhaseLambda(c: TwoPhaseCase): number | null {
  const iceAlpha = diffusivity(c.ice);
  const ratio = iceAlpha / diffusivity(c.water);
  const pull =
    (c.water.conductivityWPerMK / c.ice.conductivityWPerMK) *
    Math.sqrt(ratio) *
    (c.superheatK / c.subcoolingK);
  const latent = (Math.sqrt(Math.PI) * c.fusionJPerKg) / (c.ice.heatCapacityJPerKgK * c.subcoolingK);
  const residual = (l: number): number => {
    const frozen = Math.exp(-l * l) / erf(l);
    const unfrozen = (pull * Math.exp(-l * l * ratio)) / (1 - erf(l * Math.sqrt(ratio)));
    return frozen - unfrozen - latent * l;
  };
  // Beyond an argument of 5 the complement of erf has no digits left, and no front is that fast.
  const most = Math.min(LARGEST_LAMBDA, 5 / Math.sqrt(ratio));
  return findRoot(residual, 1e-9, most, { tolerance: 1e-12 });
}

/** Depth of Neumann's front, m. */
export function frontDepthM(lambda: number, diffusivityM2PerS: number, timeS: number): number {
  return 2 * lambda * Math.sqrt(diffusivityM2PerS * timeS);
}

/**
 * Ice thickness, m, on a flat face held `subcoolingK` below the ice point (Stefan 1891): the heat capacity of
 * the ice is neglected, which over-states the thickness by about Ste/6 (2 % at 20 K).
 */
export function stefanThicknessM(subcoolingK: number, timeS: number): number {
  return Math.sqrt((2 * ICE_CONDUCTIVITY * subcoolingK * timeS) / (ICE_DENSITY * FUSION_J_PER_KG));
}

/**
 * Time, s, to grow ice from the wall of a tube to a radius, its wall held `subcoolingK` below the ice point:
 * quasi-steady conduction through a cylinder, t = ρL/(4kΔT) [2r² ln(r/a) - r² + a²] (textbook result, form
 * from memory).
 */
export function timeOnTubeS(tubeRadiusM: number, iceRadiusM: number, subcoolingK: number): number {
  const a = tubeRadiusM;
  const r = iceRadiusM;
  const shape = 2 * r * r * Math.log(r / a) - r * r + a * a;
  return ((ICE_DENSITY * FUSION_J_PER_KG) / (4 * ICE_CONDUCTIVITY * subcoolingK)) * shape;
}

/**
 * Outer radius, m, of the ice on a tube after a time; the inverse of `timeOnTubeS`. null on input without
 * meaning.
 */
export function radiusOnTubeM(tubeRadiusM: number, timeS: number, subcoolingK: number): number | null {
  // r ln(r/a) ≥ r - a: ice on a tube is never thicker than on a flat face.
  const most = tubeRadiusM + stefanThicknessM(subcoolingK, timeS);
  const late = (r: number): number => timeOnTubeS(tubeRadiusM, r, subcoolingK) - timeS;
  return timeS === 0 ? tubeRadiusM : findRoot(late, tubeRadiusM, most * (1 + 1e-9), { tolerance: 1e-12 });
}

/** Conductance of an ice shell on one metre of tube, W/K: 2πk/ln(r/a). Infinite without ice. */
export function shellConductanceWPerK(tubeRadiusM: number, iceRadiusM: number): number {
  return (2 * Math.PI * ICE_CONDUCTIVITY) / Math.log(iceRadiusM / tubeRadiusM);
}

/**
 * Part of an ice cylinder's surface that still touches water in a square lattice of tubes: 1 until neighbours
 * at `pitchM` meet, then each of the four overlaps hides an arc of 2 acos(pitch/2r), 0 once the gaps are
 * filled. Exact geometry; Jekel, Mitchell & Klein 1993 ("Modeling of ice-storage tanks", ASHRAE Transactions
 * 99(1), from memory) call this regime area-constrained.
 */
export function freeSurfaceFraction(iceRadiusM: number, pitchM: number): number {
  const reach = pitchM / (2 * iceRadiusM);
  if (reach >= 1) return 1;
  return Math.max(0, 1 - (4 / Math.PI) * Math.acos(reach));
}

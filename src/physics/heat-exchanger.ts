/**
 * Heat exchangers: mean temperature difference and effectiveness. Equation numbers are those of Bergman,
 * Lavine, Incropera & DeWitt, "Fundamentals of Heat and Mass Transfer", 7th ed. 2011, chapter 11.
 */
import { RimeholdError } from '../errors.ts';

/** How the streams pass each other. The mixed stream of a half-mixed crossflow is named. */
export type Arrangement =
  | 'counterflow'
  | 'parallel'
  | 'crossflow-unmixed'
  | 'crossflow-cmax-mixed'
  | 'crossflow-cmin-mixed'
  | 'shell-and-tube';

/** Temperatures of both streams at their ends, °C. */
export interface StreamEnds {
  readonly hotInC: number;
  readonly hotOutC: number;
  readonly coldInC: number;
  readonly coldOutC: number;
}

/**
 * Logarithmic mean temperature difference, K: eq. 11.15, ends of eq. 11.16 (parallel) or 11.17 (counterflow).
 * null when a difference is not above zero at both ends: no such exchanger exists.
 */
export function lmtdK(
  ends: StreamEnds,
  arrangement: 'counterflow' | 'parallel' = 'counterflow',
): number | null {
  const parallel = arrangement === 'parallel';
  const first = ends.hotInC - (parallel ? ends.coldInC : ends.coldOutC);
  const second = ends.hotOutC - (parallel ? ends.coldOutC : ends.coldInC);
  if (!(first > 0 && second > 0)) return null;
  const ratio = first / second;
  // Near equal ends the quotient loses its digits; the arithmetic mean is its limit (error below 1e-9 of it).
  return Math.abs(ratio - 1) < 1e-4 ? (first + second) / 2 : (first - second) / Math.log(ratio);
}

/**
 * Effectiveness (0–1) from the number of transfer units and the ratio of capacity rates Cmin/Cmax (0–1).
 * Throws when NTU is not ≥ 0 or the ratio is not within 0–1.
 */
export function effectiveness(ntu: number, capacityRatio: number, arrangement: Arrangement): number {
  if (!(ntu >= 0 && capacityRatio >= 0 && capacityRatio <= 1)) {
    throw new RimeholdError(
      'internal',
      `Expected NTU ≥ 0 and a capacity ratio of 0 to 1, found ${ntu} and ${capacityRatio}.`,
      { ntu, capacityRatio },
    );
  }
  return capacityRatio < 1e-9 ? phaseChangeEffectiveness(ntu) : FORMULAS[arrangement](ntu, capacityRatio);
}

/** Effectiveness when one side changes phase (ice, refrigerant) and stays at one temperature: eq. 11.35a. */
export function phaseChangeEffectiveness(ntu: number): number {
  return -Math.expm1(-ntu);
}

const FORMULAS: Readonly<Record<Arrangement, (ntu: number, cr: number) => number>> = {
  // eq. 11.28a
  parallel: (ntu, cr) => -Math.expm1(-ntu * (1 + cr)) / (1 + cr),
  // eq. 11.29a; its limit NTU/(1 + NTU) near equal capacity rates
  counterflow: (ntu, cr) => {
    if (1 - cr < 1e-9) return ntu / (1 + ntu);
    const decay = Math.exp(-ntu * (1 - cr));
    return (1 - decay) / (1 - cr * decay);
  },
  // eq. 11.30a, one shell pass; tanh form of (1 - e^-x)/(1 + e^-x)
  'shell-and-tube': (ntu, cr) => {
    const root = Math.sqrt(1 + cr * cr);
    const half = Math.tanh((ntu * root) / 2);
    return half === 0 ? 0 : 2 / (1 + cr + root / half);
  },
  // eq. 11.32, a fit to the exact series (printed as exact only for a capacity ratio of 1)
  'crossflow-unmixed': (ntu, cr) => -Math.expm1((ntu ** 0.22 / cr) * Math.expm1(-cr * ntu ** 0.78)),
  // eq. 11.33a
  'crossflow-cmax-mixed': (ntu, cr) => -Math.expm1(cr * Math.expm1(-ntu)) / cr,
  // eq. 11.34a
  'crossflow-cmin-mixed': (ntu, cr) => -Math.expm1(Math.expm1(-cr * ntu) / cr),
};

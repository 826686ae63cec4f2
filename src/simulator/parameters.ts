/**
 * What the true plant is like, beside what its owner wrote in the site file. The site file is a nameplate; the truth
 * differs from it by factors drawn from the seed, unless a caller sets them. Spreads are common practice, no source.
 */
import type { Random } from '../numerics/random.ts';

/** Factors on the site file's figures; 1 is exactly as written. */
export interface TruthFactors {
  /** Efficiency of the ice machine: electrical power is divided by it. */
  readonly copFactor: number;
  /** Refrigerating capacity (refrigerant charge, fouled condenser). */
  readonly capacityFactor: number;
  readonly leakFactor: number;
  readonly flowFactor: number;
  readonly meltFactor: number;
  readonly freezeFactor: number;
  readonly pumpPowerFactor: number;
  readonly coilFactor: number;
  readonly heatLossFactor: number;
  readonly heatCapacityFactor: number;
  readonly apertureFactor: number;
}

export type FactorName = keyof TruthFactors;

export interface TruthParameters extends TruthFactors {
  /** Air changes an hour with windows shut, at 3 m/s of wind. */
  readonly infiltrationPerH: number;
  /** People at home in the home hours. */
  readonly occupants: number | null;
  /** How far below 0 °C a fresh charge goes before its first ice; null draws a few kelvin anew for each charge. */
  readonly supercoolingK: number | null;
  /** Chance that nobody comes home on an evening. */
  readonly awayChance: number;
  /** Condensing temperature above which the high-pressure cut-out opens. */
  readonly mostCondensingC: number;
  /** Change of each factor a day, as a part of its start value; 0.01 is one per cent a day. */
  readonly driftPerDay: Readonly<Partial<Record<FactorName, number>>>;
}

export type TruthOverrides = Partial<TruthParameters>;

const SPREAD: Readonly<TruthFactors> = {
  copFactor: 0.05,
  capacityFactor: 0.05,
  leakFactor: 0.18,
  flowFactor: 0.06,
  meltFactor: 0.12,
  freezeFactor: 0.08,
  pumpPowerFactor: 0.04,
  coilFactor: 0.1,
  heatLossFactor: 0.12,
  heatCapacityFactor: 0.15,
  apertureFactor: 0.18,
};

/** A value for every factor, made by name, in this order. */
function eachFactor(make: (name: FactorName) => number): TruthFactors {
  return {
    copFactor: make('copFactor'),
    capacityFactor: make('capacityFactor'),
    leakFactor: make('leakFactor'),
    flowFactor: make('flowFactor'),
    meltFactor: make('meltFactor'),
    freezeFactor: make('freezeFactor'),
    pumpPowerFactor: make('pumpPowerFactor'),
    coilFactor: make('coilFactor'),
    heatLossFactor: make('heatLossFactor'),
    heatCapacityFactor: make('heatCapacityFactor'),
    apertureFactor: make('apertureFactor'),
  };
}

/** Factors that make the plant exactly what the site file says; for analytic tests. */
export const AS_WRITTEN: TruthFactors = eachFactor(() => 1);

/** Draws every factor in a fixed order, so that setting one leaves the others what the seed says. */
export function drawParameters(random: Random, overrides: TruthOverrides): TruthParameters {
  const factors = eachFactor((name) => Math.exp(SPREAD[name] * clipped(random.normal())));
  return {
    ...factors,
    infiltrationPerH: 0.3 + 0.4 * random.next(),
    occupants: null,
    supercoolingK: null,
    awayChance: 0.1,
    mostCondensingC: 64,
    driftPerDay: {},
    ...overrides,
  };
}

const clipped = (normal: number): number => Math.max(-2, Math.min(2, normal));

/** The factors after some days of drift; never below a hundredth of their start. */
export function driftedFactors(parameters: TruthParameters, days: number): TruthFactors {
  return eachFactor(
    (name) => parameters[name] * Math.max(0.01, 1 + (parameters.driftPerDay[name] ?? 0) * days),
  );
}

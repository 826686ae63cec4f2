/** What the beliefs amount to: the published figures, what was learned, what each probe errs by. */
import type { Phase } from '../commands.ts';
import type { PointName } from '../points.ts';
import { iceOnHandKwh, J_PER_KWH, FUSION_J_PER_KG } from '../plant/bank.ts';
import type { ProbeHealth } from './consistency.ts';
import { sdOf, type Belief } from './filter.ts';
import { LAYERS, PROBE_OFFSET, PROBE_POINTS, STATES, X, type ProbePoint } from './layout.ts';
import { momentsOf, quantileOf, weightsOf, type Bell, type Moments } from './mixture.ts';
import { iceKgOf, onHandKwhOf, waterCOf, type PlantModels } from './models.ts';
import type { Learned, ProbeState } from './types.ts';

/**
 * Errors that last, of model and readings, are counted as if they were new each time, and the lumped bank is not the
 * true one. This makes up for a part of it; `bench ice` says how often the truth is found in the interval.
 */
const WIDEN = 2;
/** Nobody knows a bank better than this part of its capacity. */
const LEAST_SD_PART = 0.006;

export type Slope = readonly (readonly [state: number, slope: number])[];

/** Derivatives of ice on hand by ice and water, kWh for each unit. */
export function onHandSlopes(models: PlantModels, belief: Belief): Slope {
  const { bank } = models;
  const latent = (bank.mostIceKg * FUSION_J_PER_KG) / J_PER_KWH;
  const bath = Math.max(0, 1 - bank.mostIceKg / bank.waterKg);
  const liquid = models.sealed
    ? bath
    : Math.max(0, 1 - (Math.max(0, belief.mean[X.ice]) * bank.mostIceKg) / bank.waterKg);
  const sensible = (-liquid * bank.heatCapacityJPerK) / J_PER_KWH;
  if (models.internal)
    return [
      [X.ice, latent],
      [X.top, sensible],
    ];
  return [[X.ice, latent], ...LAYERS.map((layer) => [layer, sensible / LAYERS.length] as const)];
}

/** Variance that two linear readings of the state share. */
export function shared(belief: Belief, a: Slope, b: Slope): number {
  let sum = 0;
  for (const [i, u] of a) for (const [j, v] of b) sum += u * v * belief.cov[i * STATES + j];
  return sum;
}

function onHandBell(models: PlantModels, belief: Belief, weight: number): Bell {
  const slope = onHandSlopes(models, belief);
  const variance = shared(belief, slope, slope);
  const capacity = iceOnHandKwh(models.bank, models.bank.mostIceKg, 0);
  const least = LEAST_SD_PART * capacity;
  const sd = WIDEN * Math.sqrt(Math.max(variance, 0) + least * least);
  return { weight, mean: onHandKwhOf(models, belief.mean), sd };
}

export interface OnHand {
  readonly kwh: number;
  readonly lowKwh: number;
  readonly highKwh: number;
  readonly iceKg: number;
  readonly waterC: number;
}

export function onHand(models: PlantModels, beliefs: readonly Belief[]): OnHand {
  const weights = weightsOf(beliefs);
  const bells = beliefs.map((belief, i) => onHandBell(models, belief, weights[i]));
  const most = iceOnHandKwh(models.bank, models.bank.waterKg, 0);
  const limit = (kwh: number): number => Math.min(most, Math.max(0, kwh));
  const kwh = limit(momentsOf(bells).mean);
  const mean = (read: (belief: Belief) => number): number =>
    beliefs.reduce((sum, belief, i) => sum + weights[i] * read(belief), 0);
  return {
    kwh,
    lowKwh: Math.min(kwh, limit(quantileOf(bells, 0.05))),
    highKwh: Math.max(kwh, limit(quantileOf(bells, 0.95))),
    iceKg: mean((belief) => iceKgOf(models, belief.mean)),
    waterC: mean((belief) => waterCOf(models, belief.mean)),
  };
}

/** Mean and deviation of one quantity over all beliefs. */
export function marginal(beliefs: readonly Belief[], i: number): Moments {
  const weights = weightsOf(beliefs);
  return momentsOf(
    beliefs.map((belief, k) => ({ weight: weights[k], mean: belief.mean[i], sd: sdOf(belief, i) })),
  );
}

/** A learned factor: log-gain to value and deviation. */
function factor(beliefs: readonly Belief[], i: number, nominal: number): Pick<Learned, 'value' | 'sd'> {
  const { mean, sd } = marginal(beliefs, i);
  const value = nominal * Math.exp(mean);
  return { value, sd: value * sd };
}

export interface Nominal {
  readonly heatLeakWPerK: number;
  readonly meltWPerK: number;
  readonly freezeWPerK: number;
  readonly flowLPerMin: number;
  readonly coilWPerK: number;
  readonly chillerW: number;
  readonly usefulCapacity: Moments;
}

export function learned(beliefs: readonly Belief[], nominal: Nominal): Learned[] {
  const share = (i: number): Pick<Learned, 'value' | 'sd'> => marginalValue(beliefs, i);
  const capacity = nominal.usefulCapacity;
  return [
    { name: 'heat-leak', ...factor(beliefs, X.leak, nominal.heatLeakWPerK), unit: 'W/K' },
    { name: 'charging-factor', ...factor(beliefs, X.cop, 1), unit: '' },
    { name: 'charging-by-outdoor', ...share(X.copOutdoor), unit: '/10K' },
    { name: 'charging-by-inventory', ...share(X.copIce), unit: '' },
    { name: 'machine-power-factor', ...factor(beliefs, X.power, 1), unit: '' },
    { name: 'melt-conductance', ...factor(beliefs, X.melt, nominal.meltWPerK), unit: 'W/K' },
    { name: 'melt-exponent', ...share(X.meltExponent), unit: '' },
    { name: 'freeze-conductance', ...factor(beliefs, X.freeze, nominal.freezeWPerK), unit: 'W/K' },
    { name: 'pump-flow', ...factor(beliefs, X.flow, nominal.flowLPerMin), unit: 'L/min' },
    { name: 'coil-conductance', ...factor(beliefs, X.coil, nominal.coilWPerK), unit: 'W/K' },
    { name: 'useful-capacity', value: capacity.mean, sd: capacity.sd, unit: 'kg' },
  ];
}

function marginalValue(beliefs: readonly Belief[], i: number): Pick<Learned, 'value' | 'sd'> {
  const { mean, sd } = marginal(beliefs, i);
  return { value: mean, sd };
}

export function probeStates(
  beliefs: readonly Belief[],
  health: ReadonlyMap<ProbePoint, ProbeHealth>,
  heard: (point: PointName) => boolean,
  swapped: boolean,
): ProbeState[] {
  return PROBE_POINTS.filter(heard).map((point) => {
    const { mean, sd } = marginal(beliefs, PROBE_OFFSET[point]);
    const state = health.get(point);
    return {
      point,
      errorAtIcePointK: state?.plateauMs == null ? null : mean,
      sd,
      atMs: state?.plateauMs ?? null,
      setAside: state?.setAside ?? swapSentence(point, swapped),
    };
  });
}

function swapSentence(point: ProbePoint, swapped: boolean): string | null {
  if (!swapped) return null;
  if (point === 'leaving-water') return 'swapped with entering-water: read in its place';
  return point === 'entering-water' ? 'swapped with leaving-water: read in its place' : null;
}

export function phaseOf(inventory: number, waterC: number): Phase {
  if (inventory < 0.01 || (inventory < 0.03 && waterC > 4)) return 'all-water';
  return inventory >= 0.97 ? 'full' : 'mixed';
}

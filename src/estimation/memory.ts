/** The estimator as plain data, and back. Covariances are kept as their lower triangles in full precision. */
import type { PointName } from '../points.ts';
import type { Core } from './core.ts';
import type { ProbeHealth, SwapWatch } from './consistency.ts';
import type { Belief } from './filter.ts';
import { METER_SD, STATES, X, type ProbePoint } from './layout.ts';
import type { Moments } from './mixture.ts';
import type { EstimatorMemory } from './types.ts';

/** Raised when the state's layout changes: an older memory is then left aside. */
const VERSION = 3;
const TRIANGLE = (STATES * (STATES + 1)) / 2;

interface StoredBelief {
  readonly logWeight: number;
  readonly mean: readonly number[];
  readonly cov: readonly number[];
}

interface Stored {
  readonly version: number;
  readonly form: string;
  readonly lastMs: number;
  readonly beliefs: readonly StoredBelief[];
  readonly health: readonly [ProbePoint, ProbeHealth][];
  readonly consistency: readonly [PointName, { nis: number; steps: number }][];
  readonly swap: SwapWatch;
  readonly folder: readonly [PointName, number, number][];
  readonly capacity: Moments;
  readonly told: Pick<Core, (typeof TOLD)[number]>;
}

const TOLD = [
  'flows',
  'predictedLeavingC',
  'chargingS',
  'flowingS',
  'restingS',
  'flowChance',
  'plateau',
  'plateauEnded',
  'leavingBeforeC',
  'contrary',
  'meterRatio',
  'electrode',
  'fullSaid',
  'started',
  'sinceTidyS',
] as const satisfies readonly (keyof Core)[];

export function remember(core: Core): EstimatorMemory {
  const stored: Stored = {
    version: VERSION,
    form: core.config.bank.form,
    lastMs: core.lastMs,
    beliefs: core.beliefs.map(storeBelief),
    health: [...core.health],
    consistency: [...core.consistency],
    swap: core.swap,
    folder: core.folder.memory(),
    capacity: core.capacity,
    told: Object.fromEntries(TOLD.map((key) => [key, core[key]])) as Stored['told'],
  };
  // Through text and back: nothing of the living estimator is shared with what is handed out, and NaN becomes null.
  return JSON.parse(JSON.stringify(stored)) as EstimatorMemory;
}

function storeBelief({ logWeight, mean, cov }: Belief): StoredBelief {
  const lower: number[] = [];
  for (let i = 0; i < STATES; i++) for (let j = 0; j <= i; j++) lower.push(cov[i * STATES + j]);
  return { logWeight, mean: [...mean], cov: lower };
}

function restoreBelief(stored: Partial<StoredBelief>): Belief | null {
  const { logWeight = 0, mean: means = [], cov: lower = [] } = stored;
  const mean = Float64Array.from(means);
  const cov = new Float64Array(STATES * STATES);
  if (mean.length !== STATES || lower.length !== TRIANGLE) return null;
  let next = 0;
  for (let i = 0; i < STATES; i++) {
    for (let j = 0; j <= i; j++) {
      cov[i * STATES + j] = lower[next];
      cov[j * STATES + i] = lower[next++];
    }
  }
  const whole = mean.every(Number.isFinite) && cov.every(Number.isFinite);
  return whole ? { logWeight, mean, cov } : null;
}

/**
 * Puts a memory back. What another version or another form of bank left, or what is damaged, is not used: the
 * estimator then starts open.
 */
export function restoreInto(core: Core, memory: unknown): void {
  const stored = memory as Partial<Stored>;
  if (typeof stored !== 'object' || stored.version !== VERSION || stored.form !== core.config.bank.form)
    return;
  const beliefs = (stored.beliefs ?? []).map(restoreBelief);
  if (beliefs.length === 0 || beliefs.includes(null)) return;
  core.beliefs = beliefs as Belief[];
  core.lastMs = stored.lastMs ?? core.lastMs;
  for (const [point, state] of stored.health ?? []) {
    const same = { ...state.sameValue, c: state.sameValue.c ?? Number.NaN };
    core.health.set(point, { ...state, sameValue: same });
  }
  for (const [point, state] of stored.consistency ?? []) core.consistency.set(point, { ...state });
  if (stored.swap) core.swap = { ...stored.swap };
  core.folder.restore((stored.folder ?? []).map(([p, v, at]) => [p, v, at ?? Number.NEGATIVE_INFINITY]));
  if (stored.capacity) core.capacity = stored.capacity;
  if (stored.told) Object.assign(core, stored.told);
  if (core.meterRatio !== null) {
    core.priors.sd[X.flow] = core.models.internal ? METER_SD.brine : METER_SD.water;
  }
}

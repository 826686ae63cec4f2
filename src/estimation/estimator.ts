/**
 * How much ice is left. A recursive Bayesian filter on ice and water together with the slow quantities that drift:
 * readings are folded into steps, the bank is moved through each step by its balance, and every instrument that was
 * heard corrects what it knows about. What is not heard is not corrected: prediction goes on and the interval grows.
 *
 * The filter is deterministic: the same readings give the same figures, whatever the seed.
 */
import type { Command } from '../commands.ts';
import type { SiteConfig } from '../config.ts';
import { POINTS, type PointId, type PointName, type Reading } from '../points.ts';
import { DAY_MS, MINUTE_MS } from '../time.ts';
import { advanceBank } from './step.ts';
import { newCore, type Core } from './core.ts';
import { helpsMost } from './helps.ts';
import { isProbe, LAYERS, PROBE_OFFSET, PROBE_POINTS, X } from './layout.ts';
import { remember, restoreInto } from './memory.ts';
import { newHealth } from './consistency.ts';
import { learned, marginal, onHand, phaseOf, probeStates } from './report.ts';
import { openBeliefs, restate, restateIce } from './start.ts';
import type { Anchor, Estimator, EstimatorMemory, EstimatorOptions, IceEstimate } from './types.ts';
import { bestOf } from './update.ts';

export type { Estimator, EstimatorMemory, EstimatorOptions, IceEstimate } from './types.ts';

/** A clock that jumps back further than this is a clock that was set; less is jitter. */
const JITTER_MS = 2 * MINUTE_MS;
/** After so long a silence nothing is known of the ice any more. */
const SILENCE_MS = 3 * DAY_MS;
/** Readings may come this much late and still count where they are folded next. */
const LATE_MS = 10 * MINUTE_MS;

export function createEstimator(config: SiteConfig, options: EstimatorOptions): Estimator {
  const core = newCore(config, options.startMs, options.stepMs ?? MINUTE_MS);
  if (options.memory !== undefined && options.memory !== null) restoreInto(core, options.memory);
  return {
    advance: (toMs, readings, ordered) => advanceTo(core, toMs, readings, ordered),
    estimate: () => estimateOf(core),
    memory: (): EstimatorMemory => remember(core),
    anchor: (what, point) => anchor(core, what, point),
  };
}

function advanceTo(core: Core, toMs: number, readings: readonly Reading[], ordered: Command | null): void {
  if (!Number.isFinite(toMs)) return;
  meetClock(core, toMs);
  const queue = core.waiting.length > 0 ? [...core.waiting, ...readings] : readings;
  let next = 0;
  while (core.lastMs + core.stepMs <= toMs) {
    const endMs = core.lastMs + core.stepMs;
    for (; next < queue.length && !(queue[next].atMs > endMs); next++) {
      if (queue[next].atMs > core.lastMs - LATE_MS) core.folder.take(queue[next]);
    }
    core.lastMs = endMs;
    advanceBank(core, endMs, ordered);
  }
  core.waiting = queue.slice(next).filter((reading) => reading.atMs <= toMs);
}

/** A clock set back or forward by days leaves the slow quantities as they are and opens what cannot be known. */
function meetClock(core: Core, toMs: number): void {
  const leap = toMs - core.lastMs;
  if (leap < -JITTER_MS) {
    core.lastMs = toMs;
    core.waiting = [];
    core.folder.forgetTimes();
    for (const belief of core.beliefs) belief.cov[0] += 0.03 ** 2;
  } else if (leap > SILENCE_MS) {
    core.lastMs = toMs - core.stepMs;
    core.waiting = [];
    core.folder.forgetTimes();
    core.beliefs = openBeliefs(core.priors, bestOf(core.beliefs));
  }
}

function anchor(core: Core, what: Anchor, point?: PointId): void {
  if (what === 'probe-moved') return probeMoved(core, point);
  if (what === 'tank-refilled') {
    core.beliefs = openBeliefs(core.priors, bestOf(core.beliefs));
    for (const belief of core.beliefs) {
      restate(belief, X.levelZero, core.priors.mean[X.levelZero], core.priors.sd[X.levelZero]);
      restateIce(belief, 0.02, 0.1);
      for (const layer of LAYERS) restate(belief, layer, 10, 8);
    }
    core.beliefs.length = 1;
    return;
  }
  const belief = bestOf(core.beliefs);
  const full = core.capacity.mean / core.models.bank.mostIceKg;
  restateIce(belief, what === 'full' ? full : 0, what === 'full' ? 0.04 : 0.015);
  core.beliefs = [belief];
}

/** A moved probe may err differently from now on; without a name all of them may. */
function probeMoved(core: Core, point?: PointId): void {
  for (const probe of PROBE_POINTS) {
    if (point !== undefined && probe !== point) continue;
    const i = PROBE_OFFSET[probe];
    for (const belief of core.beliefs) restate(belief, i, core.priors.mean[i], core.priors.sd[i]);
    core.health.set(probe, newHealth());
  }
  if (point === undefined || point === 'leaving-water' || point === 'entering-water') {
    core.swap.swapped = false;
  }
}

function estimateOf(core: Core): IceEstimate {
  const { models, beliefs, folder } = core;
  const hand = onHand(models, beliefs);
  const inventory = hand.iceKg / models.bank.mostIceKg;
  const leak = marginal(beliefs, X.leak);
  const heatLeakWPerK = models.bank.leakWPerK * Math.exp(leak.mean);
  const heard = (point: PointName): boolean => folder.everHeard(point);
  return {
    atMs: core.lastMs,
    iceOnHandKwh: hand.kwh,
    lowKwh: hand.lowKwh,
    highKwh: hand.highKwh,
    iceKg: hand.iceKg,
    inventoryPct: 100 * inventory,
    phase: phaseOf(inventory, hand.waterC),
    waterC: hand.waterC,
    heatLeakWPerK,
    heatLeakSd: heatLeakWPerK * leak.sd,
    chargingW: core.flows.chargingW,
    dischargingW: core.flows.loopW,
    leakW: core.flows.leakW,
    predictedLeavingC: core.predictedLeavingC,
    learned: learned(beliefs, { ...core.nominal, usefulCapacity: core.capacity }),
    probes: probeStates(beliefs, core.health, heard, core.swap.swapped),
    helpsMost: helpsMost(models, bestOf(beliefs), heard),
    innovation: innovationsOf(core),
  };
}

function innovationsOf(core: Core): Partial<Record<PointName, number>> {
  const all: Partial<Record<PointName, number>> = {};
  for (const [point, { nis }] of core.consistency) all[point] = nis;
  for (const point of PROBE_POINTS) {
    const state = core.health.get(point);
    if (state && state.steps > 0 && isProbe(point) && point in POINTS) all[point] = state.nis;
  }
  return all;
}

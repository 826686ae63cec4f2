/** One step's readings put to every belief: which instruments count now, how much, and what they made of it. */
import type { PointName } from '../points.ts';
import { judgeProbe, type ProbeHealth } from './consistency.ts';
import {
  correct,
  foresee,
  sdOf,
  truncate,
  type Belief,
  type Innovation,
  type Sense,
  type Workspace,
} from './filter.ts';
import { PROBE_OFFSET, X, type ProbePoint, type WetPoint } from './layout.ts';
import { ANCHOR_SD, NOISE, varianceOf, type Alike } from './noise.ts';
import type { Senses } from './observe.ts';
import { waterCOf, type Drive, type PlantModels } from './models.ts';

export interface Heard {
  readonly waterC: Readonly<Partial<Record<WetPoint, number>>>;
  readonly supplyC: number | null;
  readonly returnC: number | null;
  readonly levelMm: number | null;
  /** Inventory fractions that an anchor says the ice is at, at least or at most. */
  readonly anchors: readonly { readonly ice: number; readonly side: 'at' | 'at-least' | 'at-most' }[];
  readonly flowErrorLog: number | null;
}

export interface Circumstances {
  readonly atMs: number;
  readonly drive: Drive;
  readonly heard: Heard;
  /** Seconds that the machine has been running, and the water flowing or resting, without a break. */
  readonly chargingS: number;
  readonly flowingS: number;
  readonly restingS: number;
}

export interface Learner {
  readonly models: PlantModels;
  readonly senses: Senses;
  readonly work: Workspace;
  readonly health: ReadonlyMap<ProbePoint, ProbeHealth>;
  innovated(point: PointName, innovation: Innovation): void;
}

/** Coolant and power speak of the ice only after the machine has settled. */
const SETTLED_S = 720;
/** After flow starts or stops, pipes and layers need this long before a reading means the water. */
const PIPE_S = 200;
const SUPERCOOLED_C = -0.35;

interface WaterRule {
  readonly noise: Alike;
  readonly plateau: boolean;
}

/** How a thermometer in the water counts for a belief; null when it tells nothing. */
function waterRule(
  point: WetPoint,
  belief: Belief,
  readC: number,
  now: Circumstances,
  models: PlantModels,
): WaterRule | null {
  const { mean } = belief;
  const trueC = readC - mean[PROBE_OFFSET[point]];
  if (trueC < SUPERCOOLED_C && now.drive.charging > 0 && mean[X.ice] < 0.1 && !models.sealed) return null;
  if (now.drive.flowing > 0) {
    const leaving = models.internal ? NOISE.coilFlowing : NOISE.waterFlowing;
    const noise = point === 'leaving-water' ? leaving : NOISE.heightFlowing;
    return now.flowingS < PIPE_S ? null : { noise, plateau: false };
  }
  if (now.restingS < 2 * PIPE_S) return null;
  if (mean[X.ice] > 0.02) return restingOnIce(point, trueC, now, models);
  // An outlet's pipe takes the room's warmth at rest: there the leaving probe does not speak of the bank.
  if (point === 'leaving-water') return null;
  return { noise: waterCOf(models, mean) > 4.5 ? NOISE.waterWarm : NOISE.waterLayered, plateau: false };
}

/**
 * Under ice the densest water, 4 °C, may lie at the bottom, most of all under floating ice: a reading there is no
 * plateau and tells nothing of the ice. A bath of brine round containers has no plateau while it is far from 0 °C.
 */
function restingOnIce(
  point: WetPoint,
  trueC: number,
  now: Circumstances,
  models: PlantModels,
): WaterRule | null {
  if (models.sealed) {
    return point === 'leaving-water' ? null : { noise: NOISE.waterLayered, plateau: settledBath(trueC, now) };
  }
  const layered = !models.bank.guess.iceHeld && point !== 'bank-top';
  if (Math.abs(trueC) > 0.8 || layered) {
    return trueC > 5 && point !== 'leaving-water' ? { noise: NOISE.waterOdd, plateau: false } : null;
  }
  return { noise: NOISE.waterResting, plateau: now.restingS > 1800 };
}

const settledBath = (trueC: number, now: Circumstances): boolean =>
  Math.abs(trueC) < 0.6 && now.drive.charging === 0 && now.restingS > 7200;

/** ln of the flat density of a reading that tells nothing, over the 4 K in which layers hide. */
const SILENT = -Math.log(4);

function weigh(belief: Belief, logLikelihood: number): void {
  belief.logWeight += Math.max(-8, logLikelihood);
}

const logDensity = ({ innovation, variance }: Innovation): number =>
  -0.5 * (Math.min(60, innovation ** 2 / variance) + Math.log(2 * Math.PI * variance));

function learnWater(learner: Learner, beliefs: readonly Belief[], now: Circumstances, point: WetPoint): void {
  const sense = learner.senses.water[point];
  const readC = now.heard.waterC[point];
  const health = learner.health.get(point);
  if (!sense || readC === undefined || !health) return;
  const best = bestOf(beliefs);
  if (!mayLearn(learner, best, sense, point, readC, health, now)) return;
  for (const belief of beliefs) {
    const rule = waterRule(point, belief, readC, now, learner.models);
    if (!rule) {
      weigh(belief, SILENT);
      continue;
    }
    const found = correct(belief, sense, readC, varianceOf(rule.noise, now.drive.dtS), learner.work);
    // How far above 0 °C resting water stands beside ice says little of how much ice there is.
    weigh(belief, rule.noise === NOISE.waterResting ? SILENT : logDensity(found));
    if (belief !== best) continue;
    learner.innovated(point, found);
    notePlateau(health, rule.plateau && iceIsSure(belief));
  }
}

const iceIsSure = (belief: Belief): boolean => belief.mean[X.ice] - 2.5 * sdOf(belief, X.ice) > 0.03;

function notePlateau(health: ProbeHealth, plateau: boolean): void {
  health.plateauSteps = plateau ? health.plateauSteps + 1 : 0;
}

function mayLearn(
  learner: Learner,
  best: Belief,
  sense: Sense,
  point: WetPoint,
  readC: number,
  health: ProbeHealth,
  now: Circumstances,
): boolean {
  const rule = waterRule(point, best, readC, now, learner.models);
  if (!rule) return health.setAside === null;
  const found = foresee(best, sense, readC, varianceOf(rule.noise, now.drive.dtS), learner.work);
  return judgeProbe(health, {
    point,
    readC,
    modelC: readC - found.innovation,
    innovation: found.innovation,
    variance: found.variance,
    dtS: now.drive.dtS,
    atMs: now.atMs,
    flowing: now.drive.flowing > 0,
  });
}

export function bestOf(beliefs: readonly Belief[]): Belief {
  return beliefs.reduce((best, belief) => (belief.logWeight > best.logWeight ? belief : best));
}

function learnScalar(
  learner: Learner,
  beliefs: readonly Belief[],
  now: Circumstances,
  point: PointName,
  sense: Sense,
  value: number,
  noise: Alike,
): void {
  const best = bestOf(beliefs);
  for (const belief of beliefs) {
    const found = correct(belief, sense, value, varianceOf(noise, now.drive.dtS), learner.work);
    weigh(belief, logDensity(found));
    if (belief === best) learner.innovated(point, found);
  }
}

/**
 * At the start of a fresh charge the coil may face ice that has just begun or the water that is still warm: nobody
 * knows which, and what coolant and power say then would be put down to the coil's conductance.
 */
const FRESH = { iceBelow: 0.1, waterAboveC: 1 };

function isFresh({ models }: Learner, { mean }: Belief): boolean {
  return !models.sealed && mean[X.ice] < FRESH.iceBelow && waterCOf(models, mean) > FRESH.waterAboveC;
}

function learnMachine(learner: Learner, beliefs: readonly Belief[], now: Circumstances): void {
  if (now.drive.charging < 1 || now.chargingS < SETTLED_S || isFresh(learner, bestOf(beliefs))) return;
  const { heard, drive } = now;
  const { senses } = learner;
  const noise = learner.models.internal ? NOISE.coolantHidden : NOISE.coolant;
  for (const [point, readC] of [
    ['coolant-supply', heard.supplyC],
    ['coolant-return', heard.returnC],
  ] as const) {
    if (readC !== null && readC < 5) {
      learnScalar(learner, beliefs, now, point, senses.coolant(point, drive), readC, noise);
    }
  }
  if (drive.chillerW !== null) {
    const value = Math.log(drive.chillerW);
    learnScalar(learner, beliefs, now, 'chiller-power', senses.power(drive), value, NOISE.power);
  }
}

function learnAnchors(learner: Learner, beliefs: readonly Belief[], now: Circumstances): void {
  for (const { ice, side } of now.heard.anchors) {
    for (const belief of beliefs) {
      if (side !== 'at') {
        weigh(belief, truncate(belief, X.ice, ice, side, ANCHOR_SD));
        continue;
      }
      weigh(belief, logDensity(correct(belief, learner.senses.ice, ice, ANCHOR_SD ** 2, learner.work)));
    }
  }
}

const WET: readonly WetPoint[] = ['leaving-water', 'bank-top', 'bank-middle', 'bank-bottom'];

/** Learns from everything heard in a step. */
export function learn(learner: Learner, beliefs: readonly Belief[], now: Circumstances): void {
  for (const point of WET) learnWater(learner, beliefs, now, point);
  learnMachine(learner, beliefs, now);
  if (now.heard.levelMm !== null && learner.models.bank.guess.iceHeld) {
    learnScalar(learner, beliefs, now, 'bank-level', learner.senses.level, now.heard.levelMm, NOISE.level);
  }
  learnAnchors(learner, beliefs, now);
}

/** One step of the estimator: what was heard, what ran, where that leads, what the readings make of it. */
import type { Command } from '../commands.ts';
import { coilWetFactor } from '../plant/delivery.ts';
import type { PointName } from '../points.ts';
import type { Core } from './core.ts';
import { DOUBTED_ABOVE, newHealth, watchSwap } from './consistency.ts';
import { forget, predict, type Belief } from './filter.ts';
import { LAYERS, METER_SD, PROBE_OFFSET, STATES, X, type WetPoint } from './layout.ts';
import { tidy, weightsOf } from './mixture.ts';
import { addDoubt, addShare, processNoise } from './noise.ts';
import { newPlateauWatch, watchPlateau } from './plateau-end.ts';
import { loopWPerKOf, newFlows, type Drive } from './models.ts';
import { advance } from './process.ts';
import { SEALED_LEAST } from './sealed.ts';
import { anchorsOf } from './anchors.ts';
import { flowProbability, runningOf, type LeavingStory, type Running } from './running.ts';
import { bound, restate, withIdea } from './start.ts';
import { bestOf, learn, type Circumstances, type Heard } from './update.ts';
import { judgeEntering } from './entering.ts';

const TIDY_S = 600;
/** Beliefs this near in inventory are one. */
const NEAR = 0.03;
/** Air indoors, until a room thermometer is heard, and its humidity. */
const ROOM_C = 24;
const HUMIDITY_PCT = 50;
/** Pump power that ends in the loop (common practice, no source). */
const PUMP_HEAT_PART = 0.8;
/** Until then the return pipe's resting water and the probe's lag make it read what does not count. */
const FLUSHED_S = 180;
/** Layers have settled enough under flow for a second idea of the ice to be tried. */
const IDEAS_AFTER_S = 1500;
/** Heat of a loop that nobody tells of, as part of the nameplate's ice making. No source. */
const UNTOLD_FLOW_PART = 0.7;
/** Water that comes back colder than it left by this much is no water's doing, K: nothing is learned from it. */
const CONTRARY_K = 0.6;
/** The coil and its surroundings are in a steady state after this long under flow, s. */
const PLATEAU_AFTER_S = 1800;
/** Start surges and meter glitches above this multiple of the nameplate are cut. */
const MOST_POWER_FACTOR = 1.8;

export function advanceBank(core: Core, nowMs: number, ordered: Command | null): void {
  const dtS = core.stepMs / 1000;
  const running = toldRunning(core, nowMs, ordered);
  tellTime(core, running, dtS);
  const drive = driveOf(core, running, nowMs);
  const heard = heardOf(core, drive, nowMs);
  start(core, heard);
  const now: Circumstances = {
    atMs: nowMs,
    drive,
    heard,
    chargingS: core.chargingS,
    flowingS: core.flowingS,
    restingS: core.restingS,
  };
  if (core.sinceTidyS >= TIDY_S) housekeep(core);
  core.sinceTidyS += dtS;
  move(core, drive, running, dtS);
  core.predictedLeavingC = drive.flowing > 0 ? expectedLeavingC(core) : null;
  judgeEntering(core, now);
  learn(learnerOf(core), core.beliefs, now);
  for (const belief of core.beliefs) bound(belief, core.priors, core.models.sealed ? SEALED_LEAST : 0);
  datePlateaus(core, nowMs);
  core.folder.close();
}

function learnerOf(core: Core): Parameters<typeof learn>[0] {
  return {
    models: core.models,
    senses: core.senses,
    work: core.work,
    health: core.health,
    innovated: (point, { innovation, variance }) => note(core, point, innovation ** 2 / variance),
  };
}

/** Running mean of normalised squared innovations, about two hours of steps long. */
export function note(core: Core, point: PointName, nis: number): void {
  const state = core.consistency.get(point) ?? { nis: 1, steps: 0 };
  state.steps = Math.min(state.steps + 1, 10_000);
  state.nis += Math.max(1 / 120, 1 / (state.steps + 1)) * (Math.min(nis, 25) - state.nis);
  core.consistency.set(point, state);
}

function toldRunning(core: Core, nowMs: number, ordered: Command | null): Running {
  const running = runningOf(core.config, core.folder, ordered, nowMs, core.flowChance);
  if (running.flowFrom !== 'temperature') {
    core.flowChance = 0.02 + 0.96 * running.flowing;
    return running;
  }
  const drive = driveOf(core, { ...running, flowing: 1 }, nowMs);
  core.flowChance = flowProbability(core.flowChance, core.stepMs / 1000, leavingStory(core, drive));
  return { ...running, flowing: core.flowChance > 0.5 ? 1 : 0 };
}

/** Spread of what flow would show, K: wide at its start, when the bank has rested. */
const FLOW_SD_K = { start: 0.8, run: 0.15 };

function leavingStory(core: Core, drive: Drive): LeavingStory | null {
  const readC = core.folder.fresh('leaving-water');
  const beforeC = core.leavingBeforeC;
  core.leavingBeforeC = readC ?? beforeC;
  if (readC === null || beforeC === null) return null;
  const weights = weightsOf(core.beliefs);
  const flowing = core.beliefs.map(({ mean }, i) => {
    const x = Float64Array.from(mean);
    advance(core.models, x, drive, newFlows());
    return { weight: weights[i], leavingC: x[X.out] + mean[X.leavingOffset] };
  });
  return { readC, beforeC, flowing, flowSdK: core.flowChance > 0.5 ? FLOW_SD_K.run : FLOW_SD_K.start };
}

function tellTime(core: Core, running: Running, dtS: number): void {
  core.chargingS = running.charging > 0 ? core.chargingS + dtS : 0;
  core.flowingS = running.flowing > 0 ? core.flowingS + dtS : 0;
  core.restingS = running.flowing > 0 ? 0 : core.restingS + dtS;
  if (running.flowLPerMin !== null && running.flowing > 0) {
    if (core.meterRatio === null) trustMeter(core);
    core.meterRatio = running.flowLPerMin / core.config.delivery.flowLPerMin;
  }
}

/** A meter's error is small: from its first word the flow gain is the meter's own. */
function trustMeter(core: Core): void {
  const sd = core.models.internal ? METER_SD.brine : METER_SD.water;
  core.priors.sd[X.flow] = sd;
  for (const belief of core.beliefs) restate(belief, X.flow, 0, sd);
}

/** The points that stand for melt water entering and leaving, where an internal-melt tank names only its coolant. */
function loopPoints(core: Core): { readonly entering: PointName; readonly leaving: PointName } {
  const { folder, models } = core;
  const coolantOnly = models.internal && !folder.everHeard('leaving-water') && folder.everHeard('loop-flow');
  if (coolantOnly) return { entering: 'coolant-supply', leaving: 'coolant-return' };
  return core.swap.swapped
    ? { entering: 'leaving-water', leaving: 'entering-water' }
    : { entering: 'entering-water', leaving: 'leaving-water' };
}

function driveOf(core: Core, running: Running, nowMs: number): Drive {
  const { folder, config } = core;
  const held = (point: PointName): number | null => folder.held(point, nowMs);
  const roomC = held('room-temperature');
  const outdoorC = held('outdoor-temperature') ?? config.chiller.ratedOutdoorC;
  const aside = core.health.get('entering-water')?.setAside != null;
  const heardC = core.flowingS >= FLUSHED_S && !aside ? held(loopPoints(core).entering) : null;
  const enteringC = core.contrary ? null : heardC;
  const air = roomC ?? ROOM_C;
  const needsCoil = running.flowing > 0 && enteringC === null;
  const leavingC = Math.max(0, bestOf(core.beliefs).mean[X.out]);
  const flowLPerMin = running.flowLPerMin ?? unmeteredFlow(core, held('pump-power'));
  return {
    dtS: core.stepMs / 1000,
    charging: running.charging,
    chillerW:
      running.chillerW === null
        ? null
        : Math.min(running.chillerW, MOST_POWER_FACTOR * config.chiller.powerW),
    condenserAirC: config.chiller.rejects === 'cooled-room' ? (roomC ?? outdoorC) : outdoorC,
    surroundC: held('bank-surround') ?? surroundOf(core, roomC, outdoorC),
    flowing: running.flowing,
    flowKgPerS: flowLPerMin / 60,
    enteringC,
    roomC: air,
    wet: needsCoil
      ? coilWetFactor(air, held('room-humidity') ?? HUMIDITY_PCT, leavingC, config.site.elevationM)
      : 1,
    pumpW: PUMP_HEAT_PART * (held('pump-power') ?? config.delivery.pumpW),
  };
}

/** A pump this far from its nameplate's power is no pump on a speed control. */
const MOST_SPEED = 1.3;

/**
 * Flow without a meter, or while it is silent: the pump's power tells its speed, flow going as speed and power as its
 * cube (affinity laws of centrifugal pumps). How the nameplate is off is learned on top of it.
 */
function unmeteredFlow(core: Core, pumpW: number | null): number {
  const { flowLPerMin, pumpW: nominalW } = core.config.delivery;
  if (core.meterRatio !== null) return flowLPerMin * core.meterRatio;
  const running = pumpW !== null && nominalW > 0 && pumpW > core.config.delivery.runningAboveW;
  const speed = running ? Math.cbrt(pumpW / nominalW) : 1;
  return flowLPerMin * Math.min(MOST_SPEED, Math.max(1 / MOST_SPEED, speed));
}

function surroundOf(core: Core, roomC: number | null, outdoorC: number): number {
  const { stands, surroundC } = core.config.bank;
  if (stands === 'outdoors') return outdoorC;
  return stands === 'indoors' && roomC !== null ? roomC : surroundC;
}

function heardOf(core: Core, drive: Drive, nowMs: number): Heard {
  const { folder } = core;
  const points = loopPoints(core);
  const leavingC = folder.fresh(points.leaving);
  const enteringC = folder.fresh(points.entering);
  seeRoles(core, drive, enteringC, leavingC);
  seePlateau(core, drive, enteringC, leavingC);
  const waterC: Partial<Record<WetPoint, number>> = {};
  if (leavingC !== null && !core.contrary) waterC['leaving-water'] = leavingC;
  for (const point of ['bank-top', 'bank-middle', 'bank-bottom'] as const) {
    const value = folder.fresh(point);
    if (value !== null) waterC[point] = value;
  }
  return {
    waterC,
    supplyC: points.entering === 'coolant-supply' ? null : folder.fresh('coolant-supply'),
    returnC: points.entering === 'coolant-supply' ? null : folder.fresh('coolant-return'),
    levelMm: folder.fresh('bank-level'),
    anchors: anchorsOf(core, drive, nowMs),
    flowErrorLog: null,
  };
}

/** Beyond this a probe has fallen out rather than changed places, K. */
const MOST_SWAP_K = 8;

/** Whether entering and leaving contradict each other, and whether they have changed places for good. */
function seeRoles(core: Core, drive: Drive, enteringC: number | null, leavingC: number | null): void {
  core.contrary = false;
  if (enteringC === null || leavingC === null || !loadWarms(core, drive)) return;
  if (leavingC - enteringC > MOST_SWAP_K) return;
  core.contrary = enteringC < leavingC - CONTRARY_K;
  if (watchSwap(core.swap, enteringC, leavingC, drive.dtS)) changeOver(core);
}

/** Only a coil that melts from within shows the end of its ice at once; elsewhere the water's own warming shows it. */
function seePlateau(core: Core, drive: Drive, enteringC: number | null, leavingC: number | null): void {
  if (core.flowingS < PLATEAU_AFTER_S) {
    core.plateau = newPlateauWatch();
    core.plateauEnded = false;
  }
  const { models } = core;
  if (!models.internal || core.flowingS < PLATEAU_AFTER_S || drive.charging > 0) return;
  if (enteringC === null || leavingC === null) return;
  const { mean } = bestOf(core.beliefs);
  const entering = enteringC - mean[X.enteringOffset];
  const leaving = leavingC - mean[X.leavingOffset];
  const loopWPerK = loopWPerKOf(models, mean, drive);
  const ended = watchPlateau(core.plateau, entering, leaving, loopWPerK, drive.dtS);
  core.plateauEnded = ended && mean[X.ice] > NEAR;
}

/** Whether the loop can only have been warmed by the load; a brine loop may also carry the machine's cold. */
function loadWarms(core: Core, drive: Drive): boolean {
  if (core.flowingS < FLUSHED_S) return false;
  return !core.models.internal || (drive.charging === 0 && core.folder.everHeard('chiller-power'));
}

/** The two probes changed places: what their offsets were learned from was the other's water. */
function changeOver(core: Core): void {
  core.health.set('leaving-water', newHealth());
  core.health.set('entering-water', newHealth());
  for (const belief of core.beliefs) {
    for (const i of [X.leavingOffset, X.enteringOffset]) {
      restate(belief, i, core.priors.mean[i], core.priors.sd[i]);
    }
    restate(belief, X.meltNow, core.priors.mean[X.meltNow], core.priors.sd[X.meltNow]);
    restate(belief, X.coil, core.priors.mean[X.coil], core.priors.sd[X.coil]);
    belief.cov[X.ice * STATES + X.ice] += 0.1 ** 2;
  }
}

/** The first water heard places every belief's water there, where ice does not forbid it. */
function start(core: Core, heard: Heard): void {
  if (core.started) return;
  const first = Object.values(heard.waterC)[0];
  if (first === undefined) return;
  core.started = true;
  for (const belief of core.beliefs) {
    const iced = belief.mean[X.ice] > 0.05;
    for (const layer of LAYERS) {
      restate(belief, layer, iced ? Math.max(0, Math.min(first, 4)) : first, iced ? 1.5 : 1);
    }
    restate(belief, X.out, first, 1);
  }
}

function move(core: Core, drive: Drive, running: Running, dtS: number): void {
  const best = bestOf(core.beliefs);
  const chillerLost = !running.chillerKnown && core.folder.everHeard('chiller-power');
  // Where only the leaving water tells of flow, a run may be missed or imagined.
  const guessed = running.flowFrom === 'temperature' ? UNTOLD_FLOW_PART * core.models.nominalIceMakingW : 0;
  const unknownW = (chillerLost ? core.models.nominalIceMakingW : 0) + guessed;
  const flows = { ...core.flows };
  const leaving = core.health.get('leaving-water');
  const doubted = leaving?.setAside === null && leaving.nis > DOUBTED_ABOVE && core.flowingS > FLUSHED_S;
  for (const belief of core.beliefs) {
    predict(belief, (x) => advance(core.models, x, drive, flows), ZERO, core.work);
    // The last evaluation of a prediction is at the belief's centre: its flows are the belief's.
    processNoise(core.models, flows, drive, belief.mean[X.ice], unknownW, core.noise);
    if (doubted) addDoubt(core.noise, dtS);
    if (drive.charging > 0) addShare(core.models, belief, dtS);
    for (let i = 0; i < STATES; i++) belief.cov[i * STATES + i] += core.noise[i];
    if (belief === best) core.flows = { ...flows };
  }
}

const ZERO = new Float64Array(STATES);

function expectedLeavingC(core: Core): number {
  const weights = weightsOf(core.beliefs);
  const read = ({ mean }: Belief): number => mean[X.out] + mean[PROBE_OFFSET['leaving-water']];
  return core.beliefs.reduce((sum, belief, i) => sum + weights[i] * read(belief), 0);
}

function housekeep(core: Core): void {
  for (const belief of core.beliefs) {
    forget(belief, core.priors, X.cop, core.sinceTidyS, core.keep);
  }
  core.beliefs = tidy(core.beliefs, X.ice, NEAR);
  const leavingC = core.folder.fresh(loopPoints(core).leaving);
  if (
    core.flowingS > IDEAS_AFTER_S &&
    core.flows.loopW > 0 &&
    leavingC !== null &&
    core.health.get('leaving-water')?.setAside == null
  ) {
    core.beliefs = withIdea(
      core.beliefs,
      bestOf(core.beliefs),
      leavingC,
      core.models.internal,
      core.plateauEnded,
    );
  }
  core.sinceTidyS = 0;
}

function datePlateaus(core: Core, nowMs: number): void {
  for (const state of core.health.values()) {
    if (state.plateauSteps * core.stepMs >= 1_200_000) state.plateauMs = nowMs;
  }
}

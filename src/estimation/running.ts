/**
 * Whether the machine runs and the water flows: from powers and flow where they are heard, else from the command that
 * was ordered, else from what the leaving water does.
 */
import { charges, discharges, type Command } from '../commands.ts';
import type { SiteConfig } from '../config.ts';
import type { Folder } from './fold.ts';

export interface Running {
  /** 0–1 of the step. */
  readonly charging: number;
  readonly chillerW: number | null;
  readonly chillerKnown: boolean;
  readonly flowing: number;
  /** Measured flow, L/min; null when no meter is heard. */
  readonly flowLPerMin: number | null;
  /** How flow was told: the leaving water's own behaviour is the last resort. */
  readonly flowFrom: 'meter' | 'pump' | 'order' | 'temperature';
}

/** A meter at rest may show a little: flow counts from this part of the pump's. */
const LEAST_FLOW_PART = 0.08;
/** Coolant this cold means that the machine runs, when nothing else tells. */
const COLD_COOLANT_C = -2;

function chilling(
  config: SiteConfig,
  folder: Folder,
  ordered: Command | null,
  nowMs: number,
): Pick<Running, 'charging' | 'chillerW' | 'chillerKnown'> {
  const powerW = folder.held('chiller-power', nowMs);
  if (powerW !== null) {
    const running = powerW > config.chiller.runningAboveW;
    return { charging: running ? 1 : 0, chillerW: running ? powerW : null, chillerKnown: true };
  }
  if (ordered !== null) return { charging: charges(ordered) ? 1 : 0, chillerW: null, chillerKnown: true };
  const coolantC = folder.held('coolant-supply', nowMs);
  const cold = coolantC !== null && coolantC < COLD_COOLANT_C && !folder.everHeard('loop-flow');
  return { charging: cold ? 1 : 0, chillerW: null, chillerKnown: coolantC !== null };
}

function flowing(
  config: SiteConfig,
  folder: Folder,
  ordered: Command | null,
  nowMs: number,
  byTemperature: number,
): Pick<Running, 'flowing' | 'flowLPerMin' | 'flowFrom'> {
  const meter = folder.held('loop-flow', nowMs);
  if (meter !== null) {
    const least = LEAST_FLOW_PART * config.delivery.flowLPerMin;
    return { flowing: meter > least ? 1 : 0, flowLPerMin: meter, flowFrom: 'meter' };
  }
  const pumpW = folder.held('pump-power', nowMs);
  if (pumpW !== null) {
    const on = pumpW > Math.max(config.delivery.runningAboveW, config.delivery.dryPumpW ?? 0);
    return { flowing: on ? 1 : 0, flowLPerMin: null, flowFrom: 'pump' };
  }
  if (ordered !== null) {
    return { flowing: discharges(ordered) ? 1 : 0, flowLPerMin: null, flowFrom: 'order' };
  }
  return { flowing: byTemperature > 0.5 ? 1 : 0, flowLPerMin: null, flowFrom: 'temperature' };
}

export function runningOf(
  config: SiteConfig,
  folder: Folder,
  ordered: Command | null,
  nowMs: number,
  byTemperature: number,
): Running {
  return {
    ...chilling(config, folder, ordered, nowMs),
    ...flowing(config, folder, ordered, nowMs, byTemperature),
  };
}

/** Mean length of a rest and of a run of the pump, s, for telling flow by temperature. No source. */
const REST_S = 14_400;
const RUN_S = 9000;
/** What one step's leaving water can tell at most, as a logarithm of odds. */
const MOST_EVIDENCE = 3;
/** Change of a resting probe within a minute, in a pocket or on a pipe that takes the room's warmth, K. */
const REST_SD_K = 0.1;

/** What the leaving water tells in a step: what it read, read before, and would read with flow by each belief. */
export interface LeavingStory {
  readonly readC: number;
  readonly beforeC: number;
  readonly flowing: readonly { readonly weight: number; readonly leavingC: number }[];
  readonly flowSdK: number;
}

const density = (x: number, sd: number): number => Math.exp(-0.5 * (x / sd) ** 2) / sd;

/**
 * Probability of flow after a step (two-state hidden Markov filter). A resting probe changes slowly, wherever it has
 * drifted to; with flow it shows what the bank would send.
 */
export function flowProbability(before: number, dtS: number, story: LeavingStory | null): number {
  const prior = before * Math.exp(-dtS / RUN_S) + (1 - before) * -Math.expm1(-dtS / REST_S);
  if (story === null) return prior;
  const rest = density(story.readC - story.beforeC, REST_SD_K) + 1e-4;
  const flow = story.flowing.reduce(
    (sum, { weight, leavingC }) => sum + weight * density(story.readC - leavingC, story.flowSdK),
    1e-4,
  );
  const evidence = Math.max(-MOST_EVIDENCE, Math.min(MOST_EVIDENCE, Math.log(flow / rest)));
  const odds = (prior / (1 - prior)) * Math.exp(evidence);
  return Math.min(0.995, Math.max(0.005, odds / (1 + odds)));
}

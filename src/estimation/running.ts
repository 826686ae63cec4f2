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

/** Mean time between changes of the pump, s, for telling flow by temperature. No source. */
const DWELL_S = 5400;
/** What one minute's leaving water can tell at most, as a logarithm of odds. */
const MOST_EVIDENCE = 2.5;

/**
 * Probability of flow after a step (two-state hidden Markov filter): `restC` and `flowC` are what the leaving water
 * would read without and with flow, `readC` what it reads; null when it was not heard.
 */
export function flowProbability(
  before: number,
  dtS: number,
  readC: number | null,
  restC: number,
  flowC: number,
  sdK: number,
): number {
  const change = 1 - Math.exp(-dtS / DWELL_S);
  const prior = before * (1 - change) + (1 - before) * change;
  if (readC === null) return prior;
  const evidence = ((readC - restC) ** 2 - (readC - flowC) ** 2) / (2 * sdK * sdK);
  const bounded = Math.max(-MOST_EVIDENCE, Math.min(MOST_EVIDENCE, evidence));
  const odds = (prior / (1 - prior)) * Math.exp(bounded);
  return odds / (1 + odds);
}

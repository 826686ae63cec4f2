/**
 * Whether each probe tells a story that the bank could tell. Innovations squared over their variance should average
 * one; a probe whose average stays far above is set aside by name, watched, and taken back when it behaves.
 */
import type { ProbePoint } from './layout.ts';

export interface ProbeHealth {
  /** Running mean of normalised squared innovations, about an hour long. */
  nis: number;
  /** Steps behind that mean, bounded. */
  steps: number;
  setAside: string | null;
  /** Steps in a row in which a doubted probe agreed. */
  agreed: number;
  lastC: number | null;
  lastMs: number;
  sameValue: { c: number; steps: number; flowSteps: number; leastModelC: number; mostModelC: number };
  /** When it last stood on an ice-point plateau. */
  plateauMs: number | null;
  plateauSteps: number;
}

export function newHealth(): ProbeHealth {
  return {
    nis: 1,
    steps: 0,
    setAside: null,
    agreed: 0,
    lastC: null,
    lastMs: 0,
    sameValue: { c: Number.NaN, steps: 0, flowSteps: 0, leastModelC: 0, mostModelC: 0 },
    plateauMs: null,
    plateauSteps: 0,
  };
}

export interface ProbeLook {
  readonly point: ProbePoint;
  readonly readC: number;
  readonly modelC: number;
  readonly innovation: number;
  readonly variance: number;
  readonly dtS: number;
  readonly atMs: number;
  readonly flowing: boolean;
}

const MEAN_OVER_S = 2400;
/** Mean beyond which a probe is set aside, and below which it is taken back. */
const ASIDE_ABOVE = 6;
const BACK_BELOW = 2.5;
/** A contradiction smaller than this is rather the model's fault than the probe's, K. */
const ASIDE_K = 1.5;
/** Mean beyond which the model is doubted instead. */
export const DOUBTED_ABOVE = 2.5;
const LEAST_STEPS = 20;
const BACK_STEPS = 30;
/** Change between two steps that no water makes, K. */
const LEAP_K = 4;
/** Exactly equal readings for this long, while water flows or the model moved, are no measurement. */
const STUCK_FLOW_S = 2700;
const STUCK_MODEL_K = 0.8;
const STUCK_LEAST_S = 1800;

/** Judges one step's reading; true when the estimate may learn from it. */
export function judgeProbe(health: ProbeHealth, look: ProbeLook): boolean {
  const nis = look.innovation ** 2 / look.variance;
  const share = Math.min(1, look.dtS / MEAN_OVER_S);
  health.nis += Math.max(share, 1 / (health.steps + 2)) * (Math.min(nis, 25) - health.nis);
  health.steps = Math.min(health.steps + 1, 1000);
  const stuck = isStuck(health, look);
  const close = look.atMs - health.lastMs <= 3000 * look.dtS;
  const leapt = close && health.lastC !== null && Math.abs(look.readC - health.lastC) > LEAP_K && nis > 9;
  health.lastC = look.readC;
  health.lastMs = look.atMs;
  if (health.setAside !== null) return reconsider(health, nis, stuck);
  if (stuck) health.setAside = `the same ${look.readC.toFixed(2)} °C again and again`;
  else if (leapt) health.setAside = `leapt to ${look.readC.toFixed(1)} °C, which no water does`;
  else if (health.nis > ASIDE_ABOVE && health.steps >= LEAST_STEPS && Math.abs(look.innovation) > ASIDE_K) {
    const off = look.readC - look.modelC;
    health.setAside = `reads ${Math.abs(off).toFixed(1)} K ${off > 0 ? 'above' : 'below'} what the bank can be`;
  }
  health.agreed = 0;
  return health.setAside === null;
}

function reconsider(health: ProbeHealth, nis: number, stuck: boolean): boolean {
  health.agreed = nis < 4 && !stuck ? health.agreed + 1 : 0;
  if (health.agreed < BACK_STEPS && !(health.agreed >= 3 && health.nis < BACK_BELOW)) return false;
  health.setAside = null;
  health.nis = 1;
  return true;
}

function isStuck(health: ProbeHealth, look: ProbeLook): boolean {
  const same = health.sameValue;
  if (same.c !== look.readC) {
    health.sameValue = {
      c: look.readC,
      steps: 0,
      flowSteps: 0,
      leastModelC: look.modelC,
      mostModelC: look.modelC,
    };
    return false;
  }
  same.steps += 1;
  if (look.flowing) same.flowSteps += 1;
  same.leastModelC = Math.min(same.leastModelC, look.modelC);
  same.mostModelC = Math.max(same.mostModelC, look.modelC);
  const moved = same.mostModelC - same.leastModelC > STUCK_MODEL_K;
  return same.flowSteps * look.dtS >= STUCK_FLOW_S || (moved && same.steps * look.dtS >= STUCK_LEAST_S);
}

/** Whether entering and leaving probes have changed places: the load warms water, so entering must be the warmer. */
export interface SwapWatch {
  /** Running mean of entering less leaving under flow, K, about ten minutes long. */
  riseK: number;
  flowS: number;
  swapped: boolean;
}

export const newSwapWatch = (): SwapWatch => ({ riseK: 0, flowS: 0, swapped: false });

const SWAP_MEAN_S = 900;
const SWAP_LEAST_S = 1200;
/** Two probes of ±0.5 K may seem to cool by 1 K where nothing happens; a working load makes more. */
const SWAP_RISE_K = -1.1;

/** Watches a step under flow; true when roles were just changed over. */
export function watchSwap(watch: SwapWatch, enteringC: number, leavingC: number, dtS: number): boolean {
  const share = Math.min(1, dtS / SWAP_MEAN_S);
  watch.riseK += Math.max(share, dtS / (watch.flowS + dtS)) * (enteringC - leavingC - watch.riseK);
  watch.flowS = Math.min(watch.flowS + dtS, 1e6);
  if (watch.flowS < SWAP_LEAST_S || watch.riseK > SWAP_RISE_K) return false;
  watch.swapped = !watch.swapped;
  watch.riseK = 0;
  watch.flowS = 0;
  return true;
}

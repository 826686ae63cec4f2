/**
 * Late readings in their right place: the estimator is set back to a checkpoint before them and lives on from there
 * with everything that the store now knows. Also how a restart takes up where the last checkpoint stood.
 */
import type { Command } from '../commands.ts';
import type { SiteConfig } from '../config.ts';
import { createEstimator, type Estimator, type IceEstimate } from '../estimation/estimator.ts';
import type { CycleRecord } from '../record.ts';
import type { Store } from '../store/store.ts';
import type { Telling } from './telling.ts';
import { DAY_MS, HOUR_MS, MINUTE_MS } from '../time.ts';

export interface Checkpoint {
  readonly atMs: number;
  readonly memory: unknown;
}

/** Time between checkpoints, and how far back they reach: a sensor may keep a day of readings to itself. */
const CHECKPOINT_MS = HOUR_MS / 2;
const REACH_MS = DAY_MS;
/** Readings later than this no longer fit into the estimator's own step. */
export const LATE_MS = 10 * MINUTE_MS;
/** How much is replayed in one go; bounds the memory it takes. */
const REPLAY_STEP_MS = HOUR_MS;

/** Late readings wait for each other: living through hours again for every one of them would be all there is time for. */
const REWIND_EVERY_MS = 5 * MINUTE_MS;

/** Checkpoints of the last day, and how far back late readings ask to go. */
export class Past {
  #checkpoints: Checkpoint[] = [];
  #lateMs = Number.POSITIVE_INFINITY;
  #relivedMs = Number.NEGATIVE_INFINITY;

  /** Whether late readings wait for the next replay. */
  get waiting(): boolean {
    return Number.isFinite(this.#lateMs);
  }

  /** Notes a late reading; one from before every checkpoint is kept in the store and asks for nothing. */
  late(atMs: number): void {
    if (this.#before(atMs) !== null) this.#lateMs = Math.min(this.#lateMs, atMs);
  }

  /** The checkpoint to live on from again, or null when there is no need, or it was done only just now. */
  due(nowMs: number): Checkpoint | null {
    if (!Number.isFinite(this.#lateMs) || Math.abs(nowMs - this.#relivedMs) < REWIND_EVERY_MS) return null;
    const from = this.#before(this.#lateMs);
    this.#lateMs = Number.POSITIVE_INFINITY;
    this.#relivedMs = nowMs;
    return from;
  }

  keep(nowMs: number, memory: () => unknown): void {
    const last = this.#checkpoints.at(-1);
    if (last && nowMs >= last.atMs && nowMs - last.atMs < CHECKPOINT_MS) return;
    const recent = this.#checkpoints.filter((one) => one.atMs < nowMs && nowMs - one.atMs <= REACH_MS);
    this.#checkpoints = [...recent, { atMs: nowMs, memory: memory() }];
  }

  relived(from: Checkpoint, since: readonly Checkpoint[]): void {
    this.#checkpoints = [...this.#checkpoints.filter((one) => one.atMs < from.atMs), from, ...since];
  }

  #before(atMs: number): Checkpoint | null {
    return this.#checkpoints.findLast((one) => one.atMs < atMs) ?? null;
  }
}

export interface Replayed {
  readonly estimator: Estimator;
  /** Made on the way, so that the next late reading need not go back as far. */
  readonly checkpoints: readonly Checkpoint[];
}

/**
 * An estimator that stands at `toMs`, from a checkpoint, what the store holds since then, and what was told since. Each record
 * on the way is shown to `visit` with the estimator as it stands at its time.
 */
export function replay(
  config: SiteConfig,
  store: Store,
  from: Checkpoint,
  toMs: number,
  seed: number,
  told: readonly Telling[],
  visit: (record: CycleRecord, estimator: Estimator) => void = () => undefined,
): Replayed {
  const estimator = createEstimator(config, { seed, startMs: from.atMs, memory: from.memory });
  const records = store.recordsBetween(from.atMs, toMs);
  const checkpoints: Checkpoint[] = [];
  let keptMs = from.atMs;
  let next = 0;
  const untold = told.filter(({ atMs }) => atMs > from.atMs);
  let ordered: Command | null = null;
  for (let startMs = from.atMs; startMs < toMs;) {
    // in steps of one order: what was ordered tells whether water flowed where no power point does
    const recordMs = records[next]?.atMs ?? Number.POSITIVE_INFINITY;
    const endMs = Math.min(
      toMs,
      startMs + REPLAY_STEP_MS,
      untold[0]?.atMs ?? Number.POSITIVE_INFINITY,
      recordMs > startMs ? recordMs : Number.POSITIVE_INFINITY,
    );
    estimator.advance(endMs, store.readingsBetween(startMs, endMs), ordered);
    while (untold.length > 0 && untold[0].atMs <= endMs) retell(estimator, untold.splice(0, 1)[0]);
    while (next < records.length && records[next].atMs <= endMs) {
      if (records[next].atMs === endMs) visit(records[next], estimator);
      ordered = records[next].command;
      next += 1;
    }
    if (endMs - keptMs >= CHECKPOINT_MS && endMs < toMs) {
      checkpoints.push({ atMs: endMs, memory: estimator.memory() });
      keptMs = endMs;
    }
    startMs = endMs;
  }
  return { estimator, checkpoints };
}

function retell(estimator: Estimator, { what, point }: Telling): void {
  estimator.anchor(what, point ?? undefined);
}

/** A record as it would have been written with this estimate; what was decided stays. */
export function relivedRecord(record: CycleRecord, estimate: IceEstimate): CycleRecord {
  const { iceOnHandKwh, lowKwh, highKwh, iceKg, inventoryPct, phase, waterC } = estimate;
  const { heatLeakWPerK, chargingW, dischargingW, leakW } = estimate;
  // what the coil took is what came into the bank less the pump's own heat; its moist part keeps its share
  const pumpW = record.deliveredW === null ? 0 : Math.max(0, record.dischargingW - record.deliveredW);
  const deliveredW = record.deliveredW === null ? null : Math.max(0, dischargingW - pumpW);
  const share =
    record.deliveredW !== null && record.deliveredW > 0 ? (record.latentW ?? 0) / record.deliveredW : 0;
  return {
    ...record,
    iceOnHandKwh,
    iceOnHandLowKwh: lowKwh,
    iceOnHandHighKwh: highKwh,
    iceKg,
    inventoryPct,
    phase,
    waterC,
    heatLeakWPerK,
    chargingW,
    dischargingW,
    leakW,
    deliveredW,
    latentW: record.latentW === null || deliveredW === null ? record.latentW : deliveredW * share,
  };
}

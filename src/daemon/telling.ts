/**
 * What the owner has told of the bank: that it is empty or full, was refilled, or that a probe was moved. Kept with
 * its time, so that a restart or a late reading lives through it again where it belongs; for an hour it can be taken
 * back, and then the estimate and the records since then are worked out again as if it had never been told.
 */
import { TOLD, type Told } from '../commands.ts';
import { RimeholdError } from '../errors.ts';
import type { Estimator } from '../estimation/types.ts';
import { pointSpec, type PointId } from '../points.ts';
import { DAY_MS, HOUR_MS } from '../time.ts';

export interface Telling {
  readonly atMs: number;
  readonly what: Told;
  /** The probe that was moved; null: any of them may have been. */
  readonly point: PointId | null;
  readonly takenBackMs: number | null;
  /** Ice on hand before and after it was told. */
  readonly beforeKwh: number;
  readonly afterKwh: number;
}

/** The newest telling with what the estimator knew just before it. */
interface Undo {
  readonly atMs: number;
  readonly memory: unknown;
}

export const TAKE_BACK_MS = HOUR_MS;
/** Nights that ended while the daemon was away are closed up to this long after; their sheets want to know. */
const KEPT_MS = 16 * DAY_MS;
/** The same is not taken twice within this time: a hub that repeats itself tells nothing new. */
const REPEAT_MS = 60_000;

export class Tellings {
  #list: readonly Telling[];
  #undo: Undo | null;

  constructor(remembered: string | null) {
    const { list, undo } = readable(remembered);
    this.#list = list;
    this.#undo = undo;
  }

  /** Those that hold, later than an instant and not after another, in order of time. */
  between(fromMs: number, toMs: number): readonly Telling[] {
    return this.#list.filter(
      ({ atMs, takenBackMs }) => takenBackMs === null && atMs > fromMs && atMs <= toMs,
    );
  }

  /** All that was told in a time, taken back or not; for the night sheet. */
  all(fromMs: number, toMs: number): readonly Telling[] {
    return this.#list.filter(({ atMs }) => atMs > fromMs && atMs <= toMs);
  }

  /** The newest one while it can still be taken back. */
  open(nowMs: number): Telling | null {
    const last = this.#list.at(-1);
    if (last === undefined || last.takenBackMs !== null || this.#undo === null) return null;
    return nowMs >= last.atMs && nowMs - last.atMs < TAKE_BACK_MS ? last : null;
  }

  /** Tells it to an estimator that stands at `nowMs`. Throws `usage` for a point that is no probe. */
  tell(estimator: Estimator, what: Told, point: PointId | null, nowMs: number): Telling {
    if (point !== null && (what !== 'probe-moved' || pointSpec(point)?.kind !== 'temperature')) {
      throw new RimeholdError('usage', `Expected a temperature probe with probe-moved, found ${point}.`, {
        point,
      });
    }
    const open = this.open(nowMs);
    if (open?.what === what && open.point === point && nowMs - open.atMs < REPEAT_MS) return open;
    const beforeKwh = estimator.estimate().iceOnHandKwh;
    const memory = estimator.memory();
    estimator.anchor(what, point ?? undefined);
    const afterKwh = estimator.estimate().iceOnHandKwh;
    const telling: Telling = { atMs: nowMs, what, point, takenBackMs: null, beforeKwh, afterKwh };
    this.#undo = { atMs: nowMs - 1, memory };
    this.#list = [...this.#list.filter(({ atMs }) => nowMs - atMs < KEPT_MS), telling];
    return telling;
  }

  /** Takes the newest one back; gives what the estimator knew before it. Throws `usage` when it is too late. */
  takeBack(nowMs: number): Undo {
    const open = this.open(nowMs);
    if (open === null || this.#undo === null) {
      throw new RimeholdError(
        'usage',
        'There is nothing to take back: what is told can be taken back for an hour. Tell what you see now instead.',
      );
    }
    const undo = this.#undo;
    this.#undo = null;
    this.#list = [...this.#list.slice(0, -1), { ...open, takenBackMs: nowMs }];
    return undo;
  }

  memory(): string {
    return JSON.stringify({ list: this.#list, undo: this.#undo });
  }
}

/** What can be read of remembered tellings; a damaged memory is as good as none. */
function readable(remembered: string | null): { list: readonly Telling[]; undo: Undo | null } {
  try {
    const value = JSON.parse(remembered ?? '{}') as { list?: Telling[]; undo?: Undo | null };
    const list = (value.list ?? []).filter(({ atMs, what }) => Number.isFinite(atMs) && TOLD.includes(what));
    return { list, undo: value.undo ?? null };
  } catch {
    return { list: [], undo: null };
  }
}

/** Late readings that belong to nights whose sheets are written: gathered until they have all come, then told as one. */
import type { PointId, Reading } from '../points.ts';
import type { CycleRecord } from '../record.ts';
import { DAY_MS, HOUR_MS, MINUTE_MS, nightAt, type Night } from '../time.ts';

/** Readings that were kept back come in a burst; a sensor that is late with everything must not be waited for. */
const QUIET_MS = 5 * MINUTE_MS;
const MOST_WAIT_MS = HOUR_MS;
/** A sensor keeps some days to itself at most; what claims to be older is stored, and no sheet is made again for it. */
const REACH_MS = 14 * DAY_MS;

export interface Waits {
  /** Earliest of the late readings. */
  readonly fromMs: number;
  readonly count: number;
  readonly points: readonly PointId[];
}

export interface Late extends Waits {
  /** Records as the estimator would have written them, by their time; as far back as it could live again. */
  readonly relived: ReadonlyMap<number, CycleRecord>;
}

export class LateNights {
  readonly #zone: string;
  #fromMs = Number.POSITIVE_INFINITY;
  #firstMs = 0;
  #lastMs = 0;
  #count = 0;
  readonly #points = new Set<PointId>();
  #relived = new Map<number, CycleRecord>();

  /** `before` still waited when the last life ended. */
  constructor(zone: string, before: Waits | null = null) {
    this.#zone = zone;
    if (before === null) return;
    this.#fromMs = before.fromMs;
    this.#count = before.count;
    for (const point of before.points) this.#points.add(point);
  }

  /** Notes a late reading, if its night is over and not older than two weeks; whether it was noted. */
  heard({ point, atMs }: Reading, nowMs: number): boolean {
    if (atMs > nightAt(this.#zone, nowMs).startMs || !(nowMs - atMs <= REACH_MS)) return false;
    if (this.#count === 0) this.#firstMs = nowMs;
    this.#count += 1;
    this.#fromMs = Math.min(this.#fromMs, atMs);
    this.#lastMs = nowMs;
    this.#points.add(point);
    return true;
  }

  /** What was noted and not taken. */
  waits(): Waits | null {
    if (this.#count === 0) return null;
    return { fromMs: this.#fromMs, count: this.#count, points: [...this.#points].toSorted() };
  }

  /** Takes what the estimator made of records when it lived through them again for the sake of late readings. */
  relived(records: Iterable<CycleRecord>): void {
    if (this.#count === 0) return;
    for (const record of records) this.#relived.set(record.atMs, record);
  }

  /** What has come, once no more seems to; null otherwise. */
  take(nowMs: number): Late | null {
    const waits = this.waits();
    if (waits === null) return null;
    const quiet = Math.abs(nowMs - this.#lastMs) >= QUIET_MS;
    if (!quiet && Math.abs(nowMs - this.#firstMs) < MOST_WAIT_MS) return null;
    const late = {
      ...waits,
      fromMs: Math.max(waits.fromMs, nowMs - REACH_MS),
      relived: this.#relived,
    };
    this.#fromMs = Number.POSITIVE_INFINITY;
    this.#count = 0;
    this.#points.clear();
    this.#relived = new Map();
    return late;
  }
}

/** What waits of two, as one. */
export function together(one: Waits | null, other: Waits | null): Waits | null {
  if (one === null || other === null) return one ?? other;
  return {
    fromMs: Math.min(one.fromMs, other.fromMs),
    count: one.count + other.count,
    points: [...new Set([...one.points, ...other.points])],
  };
}

/** What waited when it was kept; what cannot be read is as good as nothing. */
export function readWaits(kept: string | null): Waits | null {
  try {
    const value = JSON.parse(kept ?? 'null') as Partial<Waits> | null;
    const { fromMs, count, points } = value ?? {};
    if (!Number.isFinite(fromMs) || !Number.isFinite(count) || !Array.isArray(points)) return null;
    return { fromMs, count, points } as Waits;
  } catch {
    return null;
  }
}

/** Nights that are over and not older than `fromMs`, oldest first. */
export function nightsSince(zone: string, fromMs: number, nowMs: number): Night[] {
  const nights: Night[] = [];
  for (
    let night = nightAt(zone, fromMs);
    night.endMs <= nowMs;
    night = nightAt(zone, night.endMs + MINUTE_MS)
  )
    nights.push(night);
  return nights;
}

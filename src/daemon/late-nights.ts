/** Late readings that belong to nights whose sheets are written: gathered until they have all come, then told as one. */
import type { PointId, Reading } from '../points.ts';
import type { CycleRecord } from '../record.ts';
import { HOUR_MS, MINUTE_MS, nightAt, type Night } from '../time.ts';

/** Readings that were kept back come in a burst; a sensor that is late with everything must not be waited for. */
const QUIET_MS = 5 * MINUTE_MS;
const MOST_WAIT_MS = HOUR_MS;

export interface Late {
  /** Earliest of the late readings. */
  readonly fromMs: number;
  readonly count: number;
  readonly points: readonly PointId[];
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

  constructor(zone: string) {
    this.#zone = zone;
  }

  /** Notes a late reading, if its night is over. */
  heard({ point, atMs }: Reading, nowMs: number): void {
    if (atMs > nightAt(this.#zone, nowMs).startMs) return;
    if (this.#count === 0) this.#firstMs = nowMs;
    this.#count += 1;
    this.#fromMs = Math.min(this.#fromMs, atMs);
    this.#lastMs = nowMs;
    this.#points.add(point);
  }

  /** Takes what the estimator made of records when it lived through them again for the sake of late readings. */
  relived(records: Iterable<CycleRecord>): void {
    if (this.#count === 0) return;
    for (const record of records) this.#relived.set(record.atMs, record);
  }

  /** What has come, once no more seems to; null otherwise. */
  take(nowMs: number): Late | null {
    if (this.#count === 0) return null;
    const quiet = Math.abs(nowMs - this.#lastMs) >= QUIET_MS;
    if (!quiet && Math.abs(nowMs - this.#firstMs) < MOST_WAIT_MS) return null;
    const late = {
      fromMs: this.#fromMs,
      count: this.#count,
      points: [...this.#points].toSorted(),
      relived: this.#relived,
    };
    this.#fromMs = Number.POSITIVE_INFINITY;
    this.#count = 0;
    this.#points.clear();
    this.#relived = new Map();
    return late;
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

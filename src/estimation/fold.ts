/**
 * Gathers readings of any rate into steps of equal length: what a point said within a step, and what it said last.
 * A point that reports only on change keeps its last value until its greatest age.
 */
import { judge, pointSpec, type PointId, type PointName, type Reading } from '../points.ts';

export interface Gathered {
  /** Mean of the step's values, for powers the mean of what held; null when nothing came in the step. */
  readonly fresh: number | null;
  /** The last value ever, and when. */
  readonly last: number;
  readonly lastMs: number;
}

interface Bin {
  sum: number;
  count: number;
  least: number;
  most: number;
  last: number;
  lastMs: number;
}

const ROOM = /^(room-temperature|room-humidity)(\/|$)/;

/** Rooms are folded together under their bare name. */
function slotOf(point: PointId): PointName {
  return (ROOM.exec(point)?.[1] ?? point) as PointName;
}

export class Folder {
  private readonly bins = new Map<PointName, Bin>();
  private readonly maxAgeMs: (point: PointName) => number;

  constructor(maxAgeMs: (point: PointName) => number) {
    this.maxAgeMs = maxAgeMs;
  }

  /** Takes a reading; what no thermometer could mean is dropped. */
  take(reading: Reading): void {
    const spec = pointSpec(reading.point);
    if (!spec || spec.kind === 'series' || judge(spec, reading.value) !== null) return;
    const slot = slotOf(reading.point);
    const bin = this.bins.get(slot);
    if (!bin) {
      const { value, atMs } = reading;
      this.bins.set(slot, { sum: value, count: 1, least: value, most: value, last: value, lastMs: atMs });
      return;
    }
    if (bin.count === 0) {
      bin.least = reading.value;
      bin.most = reading.value;
    }
    bin.sum += reading.value;
    bin.count += 1;
    bin.least = Math.min(bin.least, reading.value);
    bin.most = Math.max(bin.most, reading.value);
    bin.last = reading.value;
    bin.lastMs = Math.max(bin.lastMs, reading.atMs);
  }

  /** What came for a point in the step that ends now. */
  fresh(point: PointName): number | null {
    const bin = this.bins.get(point);
    if (!bin || bin.count === 0) return null;
    // From four values on, the two extremes are left out: one glitch in a step of ten-second readings says nothing.
    return bin.count >= 4 ? (bin.sum - bin.least - bin.most) / (bin.count - 2) : bin.sum / bin.count;
  }

  /** Fresh, or the last value while it is not too old; null after that. */
  held(point: PointName, nowMs: number): number | null {
    const fresh = this.fresh(point);
    if (fresh !== null) return fresh;
    const bin = this.bins.get(point);
    return bin && nowMs - bin.lastMs <= this.maxAgeMs(point) ? bin.last : null;
  }

  everHeard(point: PointName): boolean {
    return this.bins.has(point);
  }

  /** Closes the step: counts begin anew, last values stay. */
  close(): void {
    for (const bin of this.bins.values()) {
      bin.sum = 0;
      bin.count = 0;
    }
  }

  /** After a leap of the clock nothing of before can be told apart from now. */
  forgetTimes(): void {
    for (const bin of this.bins.values()) bin.lastMs = Number.NEGATIVE_INFINITY;
  }

  memory(): [PointName, number, number][] {
    return [...this.bins].map(([point, bin]) => [point, bin.last, bin.lastMs]);
  }

  restore(rows: readonly [PointName, number, number][]): void {
    for (const [point, last, lastMs] of rows) {
      this.bins.set(point, { sum: 0, count: 0, least: last, most: last, last, lastMs });
    }
  }
}

/**
 * What has been taken but not yet written. It lives in memory until a flush succeeds, so a full disk loses nothing that
 * fits; beyond the bound the oldest goes first and is counted.
 */
import type { CycleRecord, PlanRecord } from '../record.ts';
import type { Reading } from '../points.ts';

export class Waiting {
  readings: Reading[] = [];
  records: CycleRecord[] = [];
  plans: PlanRecord[] = [];
  readonly memories = new Map<string, string>();
  lostReadings = 0;
  lostRecords = 0;
  readonly #mostReadings: number;
  readonly #mostRecords: number;

  constructor(mostReadings: number, mostRecords: number) {
    this.#mostReadings = mostReadings;
    this.#mostRecords = mostRecords;
  }

  get empty(): boolean {
    return (
      this.readings.length === 0 &&
      this.records.length === 0 &&
      this.plans.length === 0 &&
      this.memories.size === 0
    );
  }

  clear(): void {
    this.readings = [];
    this.records = [];
    this.plans = [];
    this.memories.clear();
  }

  /** Called after a flush that failed. */
  keepWithinBound(): void {
    const readings = this.readings.length - this.#mostReadings;
    if (readings > 0) {
      this.readings.splice(0, readings);
      this.lostReadings += readings;
    }
    const records = this.records.length - this.#mostRecords;
    if (records > 0) {
      this.records.splice(0, records);
      this.lostRecords += records;
    }
    if (this.plans.length > MOST_PLANS) this.plans.splice(0, this.plans.length - MOST_PLANS);
  }
}

/** Plans are big and the newest one counts: a day of them at one in a quarter of an hour. */
const MOST_PLANS = 96;

/** Warm hours of the night so far, counted on from record to record. */
import type { CycleRecord } from '../record.ts';
import type { Store } from '../store/store.ts';
import { nightAt } from '../time.ts';

export class WarmTonight {
  readonly #store: Store;
  readonly #zone: string;
  #tonight: { date: string; warmKh: number } = { date: '', warmKh: 0 };

  constructor(store: Store, zone: string) {
    this.#store = store;
    this.#zone = zone;
  }

  get warmKh(): number {
    return this.#tonight.warmKh;
  }

  count(record: CycleRecord): void {
    const { date, startMs } = nightAt(this.#zone, record.atMs);
    if (this.#tonight.date !== date) {
      const before = this.#store.recordsBetween(startMs, record.atMs - 1);
      this.#tonight = { date, warmKh: before.reduce((sum, one) => sum + one.warmKh, 0) };
    }
    this.#tonight = { date, warmKh: this.#tonight.warmKh + record.warmKh };
  }
}

/** The daemon's sheets: closes each night once it is over, and revises a closed one when readings come late for it. */
import type { SiteConfig } from '../config.ts';
import type { IceEstimate } from '../estimation/types.ts';
import type { NightSheet } from '../reports/night-schema.ts';
import type { Reading } from '../points.ts';
import type { CycleRecord } from '../record.ts';
import { MINUTE_MS, nightAt, type Night } from '../time.ts';
import { LateNights, nightsSince, readWaits, together, type Late } from './late-nights.ts';
import { lateWords, nightsToClose, reviseSheet, writeSheet } from './nights.ts';
import type { DaemonParts } from './ports.ts';
import type { Tellings } from './telling.ts';

type Parts = Pick<DaemonParts, 'store' | 'log' | 'config'> & {
  readonly device: Pick<DaemonParts['device'], 'publishNight'>;
};

/** How long a night whose sheet could not be written waits before it is tried again. */
const RETRY_MS = 5 * MINUTE_MS;

/** Nights that late readings changed and that are not written yet. */
interface Work {
  readonly late: Late;
  readonly nights: Night[];
  failedMs: number;
}

export class NightBook {
  readonly #parts: Parts;
  readonly #tell: (sheet: NightSheet) => void;
  readonly #late: LateNights;
  #closedBefore = '';
  #work: Work | null = null;

  constructor(parts: Parts, tell: (sheet: NightSheet) => void) {
    this.#parts = parts;
    this.#tell = tell;
    this.#late = new LateNights(parts.config.site.zone, readWaits(parts.store.loadMemory('late')));
  }

  /** Notes a reading that came too late for the estimator's own step. */
  late(reading: Reading, nowMs: number): void {
    if (this.#late.heard(reading, nowMs)) this.#keep();
  }

  /** Takes records that the estimator lived through again; those of closed nights matter. */
  relived(records: Iterable<CycleRecord>): void {
    this.#late.relived(records);
  }

  /** Writes the sheet of every night that is over and has none. */
  close(config: SiteConfig, nowMs: number, estimate: IceEstimate | null, tellings: Tellings): void {
    const { store } = this.#parts;
    const { zone } = config.site;
    const { date } = nightAt(zone, nowMs);
    if (this.#closedBefore === date) return;
    for (const night of nightsToClose(store, zone, nowMs)) {
      const told = tellings.all(night.startMs, night.endMs);
      const sheet = writeSheet(config, store, night, nowMs, estimate, told);
      if (sheet === null) continue;
      this.#publish(sheet);
      this.#parts.log.info(
        { night: night.date },
        `The night of ${night.date} is closed. ${sheet.balance.sentence}`,
      );
    }
    this.#closedBefore = date;
  }

  /**
   * Writes the next revision of a closed night that late readings changed, once they have all come: one night each
   * time it is called, so that many of them do not hold up the plant. A night whose sheet could not be written stays.
   */
  revise(config: SiteConfig, nowMs: number, tellings: Tellings): void {
    const work = (this.#work ??= this.#next(config, nowMs));
    if (work === null || Math.abs(nowMs - work.failedMs) < RETRY_MS) return;
    const night = work.nights.at(0);
    work.failedMs = nowMs;
    if (night !== undefined) this.#revise(config, night, nowMs, work.late, tellings);
    work.failedMs = Number.NEGATIVE_INFINITY;
    work.nights.shift();
    if (work.nights.length > 0) return;
    this.#work = null;
    this.#keep();
  }

  #next(config: SiteConfig, nowMs: number): Work | null {
    const late = this.#late.take(nowMs);
    if (late === null) return null;
    const nights = nightsSince(config.site.zone, late.fromMs, nowMs);
    return { late, nights, failedMs: Number.NEGATIVE_INFINITY };
  }

  /** What waits outlives a restart. */
  #keep(): void {
    const waits = together(this.#work?.late ?? null, this.#late.waits());
    this.#parts.store.saveMemory('late', JSON.stringify(waits, ['fromMs', 'count', 'points']));
  }

  /** A telling was taken back, and the records since `fromMs` are as if it had never been told: nights closed since then are written again. */
  takenBack(config: SiteConfig, fromMs: number, nowMs: number, tellings: Tellings): void {
    const { store } = this.#parts;
    for (const night of nightsSince(config.site.zone, fromMs, nowMs)) {
      if (store.sheet(night.date) === null) continue;
      const told = tellings.all(night.startMs, night.endMs);
      const sheet = writeSheet(
        config,
        store,
        night,
        nowMs,
        null,
        told,
        'what was told of the bank was taken back',
      );
      if (sheet !== null) this.#publish(sheet);
    }
  }

  #revise(config: SiteConfig, night: Night, nowMs: number, late: Late, tellings: Tellings): void {
    const told = tellings.all(night.startMs, night.endMs);
    const sheet = reviseSheet(config, this.#parts.store, night, nowMs, late, told);
    if (sheet === null) return;
    this.#publish(sheet);
    this.#parts.log.info(
      { night: night.date, revision: sheet.revision },
      `The sheet of ${night.date} has a revision ${sheet.revision}: ${lateWords(late)}. ${sheet.balance.sentence}`,
    );
  }

  #publish(sheet: NightSheet): void {
    const newest = this.#parts.store.sheets().at(-1)?.date;
    // an older night's revision is no news of the last one
    if (newest !== undefined && newest > sheet.night.date) return;
    const noStorage = sheet.comparisons.find((one) => one.strategy === 'no-storage');
    this.#parts.device.publishNight({
      sheet,
      costMoney: sheet.electricity.money,
      savedMoney: noStorage?.savedMoney ?? null,
      balanceResidualPct: sheet.balance.residualPct,
    });
    this.#tell(sheet);
  }
}

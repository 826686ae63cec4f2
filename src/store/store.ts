/**
 * The history on disk: readings as they came, one record a cycle, plans, what the learners remember, night sheets.
 *
 * Durability. WAL with `synchronous = FULL`: every flush is on the medium before it is called done, so neither kill −9
 * nor a power cut takes back a flushed batch. NORMAL would survive kill −9 as well, but after a power cut the log since the
 * last checkpoint may be gone, at our rate up to two hours. One fsync for each flush (every 30 s) costs flash next
 * to nothing beside the four pages that the batch itself writes.
 *
 * All times are epoch milliseconds. Ranges are `fromMs < at ≤ toMs`, as the estimator advances.
 */
import Database from 'better-sqlite3';
import { existsSync, renameSync, rmSync } from 'node:fs';
import { dirname, resolve } from 'node:path';
import process from 'node:process';
import { RimeholdError } from '../errors.ts';
import type { PointId, Reading } from '../points.ts';
import type { CycleRecord, PlanRecord } from '../record.ts';
import { DAY_MS } from '../time.ts';
import { createCompaction, type CompactionResult } from './compaction.ts';
import { storeFault } from './faults.ts';
import { checkedVersion, isCurrent, migrate, pragmaNumber } from './migrations.ts';
import { planAsStored, unpackPlan } from './plan-codec.ts';
import { asStored } from './record-codec.ts';
import { Statements, type StoredSheet } from './statements.ts';
import { Waiting } from './waiting.ts';
import { takeWriterLock, type WriterLock } from './writer-lock.ts';

export interface StoreOptions {
  readonly siteId: string;
  /** Read beside a running daemon; nothing can be written. */
  readonly readOnly?: boolean;
  /** Age from which readings are thinned. Default 14 days. */
  readonly keepRawMs?: number;
  /** Readings held in memory at most while the disk refuses them. Default 200,000, some 25 MB. */
  readonly mostWaiting?: number;
  /** Upper bound of the file in pages of 4 KB; for tests and for partitions that are shared. */
  readonly mostPages?: number;
}

export interface FlushResult {
  /** Null when all that waited is on the medium; otherwise why not, and it goes on waiting. */
  readonly fault: RimeholdError | null;
  readonly written: number;
}

export interface StoreHealth {
  readonly waitingReadings: number;
  readonly waitingRecords: number;
  /** Dropped since the start because the disk refused them for too long. */
  readonly lostReadings: number;
  readonly lostRecords: number;
  readonly fault: RimeholdError | null;
  readonly bytes: number;
}

export type { StoredSheet } from './statements.ts';

/** Readings that are gathered before a flush starts by itself, so that an import needs no timer. */
const FLUSH_AT = 5000;
const MOST_RECORDS = 20_000;
const COMPACT_STEPS = 24;
/** A reader's snapshot or a backup may hold the file for a moment. */
const BUSY_MS = 5000;
const WAL_LIMIT_BYTES = 8 << 20;

export class Store {
  readonly file: string;
  readonly #db: Database.Database;
  readonly #lock: WriterLock | null;
  readonly #waiting: Waiting;
  readonly #sql: Statements;
  readonly #compact: (nowMs: number, mostSteps: number) => CompactionResult;
  #fault: RimeholdError | null = null;

  /** Use `openStore`. */
  constructor(file: string, db: Database.Database, lock: WriterLock | null, options: StoreOptions) {
    this.file = file;
    this.#db = db;
    this.#lock = lock;
    this.#waiting = new Waiting(options.mostWaiting ?? 200_000, MOST_RECORDS);
    this.#sql = new Statements(db);
    this.#compact = createCompaction(db, this.#sql, options.keepRawMs ?? 14 * DAY_MS);
  }

  /** Takes readings of any time and order. The same point and time again replaces the value. */
  addReadings(readings: readonly Reading[]): void {
    for (const reading of readings) {
      if (Number.isFinite(reading.value) && Number.isSafeInteger(Math.round(reading.atMs))) {
        this.#waiting.readings.push(reading);
      }
    }
    if (this.#waiting.readings.length >= FLUSH_AT && this.#fault === null) this.flush();
  }

  /** Takes a record and returns it as it will be read back: that one is to be shown and published. */
  addRecord(record: CycleRecord): CycleRecord {
    const kept = asStored(record);
    this.#waiting.records.push(kept);
    return kept;
  }

  addPlan(plan: PlanRecord): PlanRecord {
    const kept = planAsStored(plan);
    this.#waiting.plans.push(kept);
    return kept;
  }

  saveMemory(name: string, json: string): void {
    this.#waiting.memories.set(name, json);
  }

  /** Writes all that waits in one transaction. Never throws: what could not be written goes on waiting. */
  flush(): FlushResult {
    const waiting = this.#waiting;
    if (waiting.empty) return { fault: null, written: 0 };
    const written = waiting.readings.length + waiting.records.length + waiting.plans.length;
    try {
      this.#db.transaction(() => this.#sql.writeAll(waiting))();
      waiting.clear();
      this.#fault = null;
      return { fault: null, written };
    } catch (error) {
      this.#sql.forget();
      waiting.keepWithinBound();
      this.#fault = storeFault(error, this.file);
      return { fault: this.#fault, written: 0 };
    }
  }

  health(): StoreHealth {
    return {
      waitingReadings: this.#waiting.readings.length,
      waitingRecords: this.#waiting.records.length,
      lostReadings: this.#waiting.lostReadings,
      lostRecords: this.#waiting.lostRecords,
      fault: this.#fault,
      bytes: pragmaNumber(this.#db, 'page_count') * pragmaNumber(this.#db, 'page_size'),
    };
  }

  recordsBetween(fromMs: number, toMs: number): CycleRecord[] {
    return this.#read(() => {
      const waiting = this.#waiting.records.filter((record) => record.atMs > fromMs && record.atMs <= toMs);
      return mergedBy(this.#sql.between(fromMs, toMs), waiting, (record) => record.atMs);
    });
  }

  plansBetween(fromMs: number, toMs: number): PlanRecord[] {
    return this.#read(() => {
      const blobs = this.#sql.plans.all(fromMs, toMs);
      const waiting = this.#waiting.plans.filter((plan) => plan.madeMs > fromMs && plan.madeMs <= toMs);
      return mergedBy(blobs.map(unpackPlan), waiting, (plan) => plan.madeMs);
    });
  }

  latestPlan(): PlanRecord | null {
    return this.#read(() => {
      const blob = this.#sql.lastPlan.get();
      const all = [...(blob ? [unpackPlan(blob)] : []), ...this.#waiting.plans];
      return all.reduce<PlanRecord | null>(
        (last, plan) => (last && last.madeMs > plan.madeMs ? last : plan),
        null,
      );
    });
  }

  /** Time of the first record there is; null before it. */
  firstRecordMs(): number | null {
    return this.#read(() => this.#sql.firstRecordMs.get() ?? this.#waiting.records[0]?.atMs ?? null);
  }

  latestRecord(): CycleRecord | null {
    return this.#read(() => {
      const last = this.#sql.lastRecordMs.get() ?? null;
      const stored = last === null ? [] : this.#sql.between(last - 1, last);
      return mergedBy(stored, this.#waiting.records, (record) => record.atMs).at(-1) ?? null;
    });
  }

  /** Readings in order of time; thinned ones stand in the middle of their minute or quarter hour. */
  readingsBetween(fromMs: number, toMs: number, points?: readonly PointId[]): Reading[] {
    return this.#read(() => {
      const wanted = points === undefined ? null : new Set<string>(points);
      const stored = this.#sql.readingsBetween(fromMs, toMs, wanted);
      const waiting = this.#waiting.readings.filter(
        (reading) =>
          reading.atMs > fromMs && reading.atMs <= toMs && (wanted === null || wanted.has(reading.point)),
      );
      return mergedBy(
        stored,
        waiting,
        (reading) => reading.atMs,
        (reading) => `${reading.atMs} ${reading.point}`,
      );
    });
  }

  loadMemory(name: string): string | null {
    return this.#waiting.memories.get(name) ?? this.#read(() => this.#sql.memory.get(name) ?? null);
  }

  /** Writes a sheet at once under the next revision and returns that. Nothing that was written is ever changed. */
  addSheet(date: string, body: string): number {
    return this.#read(() => this.#sql.addSheet(date, body));
  }

  /** A sheet, the newest revision unless one is named. */
  sheet(date: string, revision?: number): StoredSheet | null {
    return this.#read(() => this.#sql.sheet.get(date, revision ?? null, revision ?? null) ?? null);
  }

  /** The newest revision of each night from one date to another, both included. */
  sheets(fromDate = '0000-00-00', toDate = '9999-99-99'): StoredSheet[] {
    return this.#read(() => this.#sql.sheets.all(fromDate, toDate));
  }

  /** Thins by age, at most `mostSteps` short transactions in one call. */
  compact(nowMs: number, mostSteps = COMPACT_STEPS): CompactionResult {
    return this.#read(() => this.#compact(nowMs, mostSteps));
  }

  /** A consistent copy of the live database in a new file. */
  backup(target: string): void {
    if (existsSync(target)) {
      throw new RimeholdError(
        'usage',
        `Expected a new file for the backup, found ${target} there already; name another.`,
      );
    }
    const part = `${target}.part`;
    rmSync(part, { force: true });
    try {
      // A reader's connection is barred from writing, and SQLite counts this as writing.
      this.#db.pragma('query_only = OFF');
      this.#db.prepare('VACUUM INTO ?').run(part);
      renameSync(part, target);
    } catch (error) {
      rmSync(part, { force: true });
      throw storeFault(error, target);
    } finally {
      this.#db.pragma(`query_only = ${this.#lock ? 'OFF' : 'ON'}`);
    }
  }

  /** Reads the whole file for damage; empty when it is sound. */
  verify(): string[] {
    return this.#read(() => {
      const said = this.#db.prepare<[], string>('PRAGMA quick_check(5)').pluck().all();
      return said.filter((line) => line !== 'ok');
    });
  }

  /** Flushes and closes; the fault of that last flush, if any. */
  close(): FlushResult {
    if (!this.#db.open) return { fault: null, written: 0 };
    const last = this.#lock ? this.flush() : { fault: null, written: 0 };
    this.#db.close();
    this.#lock?.release();
    return last;
  }

  #read<T>(work: () => T): T {
    try {
      return work();
    } catch (error) {
      throw storeFault(error, this.file);
    }
  }
}

/**
 * Opens a database, made when it is not there. Throws `store-busy` when another rimehold writes it, `store-newer`,
 * `store-broken`, `file-unreadable` when it cannot be used, `config` when it is another site's.
 */
export function openStore(file: string, options: StoreOptions): Store {
  if (options.readOnly === true) return openReader(file, options);
  const folder = dirname(resolve(file));
  if (!existsSync(folder)) {
    throw new RimeholdError(
      'file-unreadable',
      `Expected a folder for the database at ${folder}, found none; make it, or name another file under store: file.`,
    );
  }
  const lock = takeWriterLock(file, process.pid);
  let db: Database.Database | null = null;
  try {
    db = new Database(file, { timeout: BUSY_MS });
    const version = checkedVersion(db, file);
    db.pragma('journal_mode = WAL');
    db.pragma('synchronous = FULL');
    db.pragma(`journal_size_limit = ${WAL_LIMIT_BYTES}`);
    if (options.mostPages !== undefined) db.pragma(`max_page_count = ${options.mostPages}`);
    migrate(db, version);
    claim(db, file, options.siteId);
    return new Store(file, db, lock, options);
  } catch (error) {
    db?.close();
    lock.release();
    throw storeFault(error, file);
  }
}

function openReader(file: string, options: StoreOptions): Store {
  if (!existsSync(file)) {
    throw new RimeholdError(
      'file-unreadable',
      `Expected a database in ${file}, found no such file; run the daemon first, or name another file under store: file.`,
    );
  }
  let db: Database.Database | null = null;
  try {
    db = new Database(file, { timeout: BUSY_MS, fileMustExist: true });
    if (!isCurrent(db, checkedVersion(db, file))) {
      db.close();
      openStore(file, { siteId: options.siteId }).close();
      db = new Database(file, { timeout: BUSY_MS, fileMustExist: true });
    }
    db.pragma('query_only = ON');
    checkOwner(db, file, options.siteId);
    return new Store(file, db, null, options);
  } catch (error) {
    db?.close();
    throw storeFault(error, file);
  }
}

/** A database belongs to one site: two plants in one history would be nonsense that nobody notices. */
function claim(db: Database.Database, file: string, siteId: string): void {
  db.prepare('INSERT OR IGNORE INTO site VALUES (1, ?)').run(siteId);
  checkOwner(db, file, siteId);
}

function checkOwner(db: Database.Database, file: string, siteId: string): void {
  const owner = db.prepare<[], string>('SELECT id FROM site').pluck().get();
  if (owner !== undefined && owner !== siteId) {
    throw new RimeholdError(
      'config',
      `Expected the history of site "${siteId}" in ${file}, found that of "${owner}"; name another file under store: file.`,
      { file, owner },
    );
  }
}

/** Two lists as one in order of time; where both have the same key the later list wins. */
function mergedBy<T>(
  stored: T[],
  waiting: readonly T[],
  at: (item: T) => number,
  key: (item: T) => number | string = at,
): T[] {
  if (waiting.length === 0) return stored;
  const byKey = new Map<number | string, T>();
  for (const item of stored) byKey.set(key(item), item);
  for (const item of waiting) byKey.set(key(item), item);
  return [...byKey.values()].toSorted((a, b) => at(a) - at(b));
}

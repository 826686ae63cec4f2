/** The prepared SQL of the store, each statement once. */
import type Database from 'better-sqlite3';
import { isPointId, pointSpec, type Reading } from '../points.ts';
import type { CycleRecord } from '../record.ts';
import { MINUTE_MS } from '../time.ts';
import type { RecordTable } from './compaction.ts';
import { packPlan } from './plan-codec.ts';
import { fromRow, RECORD_COLUMNS, toRow, type Cell } from './record-codec.ts';
import { storedDictionary, type StoredDictionary } from './texts.ts';
import type { Waiting } from './waiting.ts';

type Row = [ts: number, point: number, value: number];
type Between = [fromMs: number, toMs: number];
type ReadingRows = Database.Statement<[{ from: number; to: number }], Row>;
const MOST_PREPARED = 32;

export interface StoredSheet {
  readonly date: string;
  readonly revision: number;
  /** The sheet as it was written, JSON. */
  readonly body: string;
}

const columns = ['atMs', ...RECORD_COLUMNS.keys()].map((name) => `"${name}"`).join(', ');

export class Statements implements RecordTable {
  readonly plans: Database.Statement<Between, Uint8Array>;
  readonly lastPlan: Database.Statement<[], Uint8Array>;
  readonly firstRecordMs: Database.Statement<[], number | null>;
  readonly lastRecordMs: Database.Statement<[], number | null>;
  readonly memory: Database.Statement<[name: string], string>;
  readonly sheet: Database.Statement<
    [date: string, revision: number | null, same: number | null],
    StoredSheet
  >;
  readonly sheets: Database.Statement<[fromDate: string, toDate: string], StoredSheet>;
  readonly #db: Database.Database;
  readonly #points: StoredDictionary;
  readonly #texts: StoredDictionary;
  readonly #putReading: Database.Statement;
  readonly #putRecord: Database.Statement;
  readonly #putPlan: Database.Statement;
  readonly #putMemory: Database.Statement;
  readonly #putSheet: Database.Statement<[date: string, body: string, same: string], number>;
  readonly #records: Database.Statement<Between, Cell[]>;
  readonly #dropRecords: Database.Statement;
  readonly #prepared = new Map<string, ReadingRows>();

  constructor(db: Database.Database) {
    this.#db = db;
    this.#points = storedDictionary(db, 'points', 'name');
    this.#texts = storedDictionary(db, 'texts', 'body');
    this.#putReading = db.prepare(
      'INSERT INTO readings VALUES (?, ?, ?) ON CONFLICT (ts, point) DO UPDATE SET value = excluded.value',
    );
    const holes = ['atMs', ...RECORD_COLUMNS.keys()].map(() => '?').join(', ');
    this.#putRecord = db.prepare(`INSERT OR REPLACE INTO cycles (${columns}) VALUES (${holes})`);
    this.#records = db
      .prepare<Between, Cell[]>(`SELECT ${columns} FROM cycles WHERE atMs > ? AND atMs <= ? ORDER BY atMs`)
      .raw();
    this.#dropRecords = db.prepare('DELETE FROM cycles WHERE atMs > ? AND atMs <= ?');
    this.firstRecordMs = db.prepare<[], number | null>('SELECT min(atMs) FROM cycles').pluck();
    this.lastRecordMs = db.prepare<[], number | null>('SELECT max(atMs) FROM cycles').pluck();
    this.#putPlan = db.prepare('INSERT OR REPLACE INTO plans VALUES (?, ?)');
    this.plans = db
      .prepare<Between, Uint8Array>('SELECT body FROM plans WHERE madeMs > ? AND madeMs <= ? ORDER BY madeMs')
      .pluck();
    this.lastPlan = db.prepare<[], Uint8Array>('SELECT body FROM plans ORDER BY madeMs DESC LIMIT 1').pluck();
    this.#putMemory = db.prepare('INSERT OR REPLACE INTO memories VALUES (?, ?)');
    this.memory = db.prepare<[name: string], string>('SELECT body FROM memories WHERE name = ?').pluck();
    this.#putSheet = db
      .prepare<[string, string, string], number>(
        `INSERT INTO sheets SELECT ?, coalesce(max(revision), 0) + 1, ? FROM sheets WHERE date = ?
         RETURNING revision`,
      )
      .pluck();
    this.sheet = db.prepare<[string, number | null, number | null], StoredSheet>(
      'SELECT date, revision, body FROM sheets WHERE date = ? AND (? IS NULL OR revision = ?) ORDER BY revision DESC LIMIT 1',
    );
    this.sheets = db.prepare<[string, string], StoredSheet>(
      `SELECT date, max(revision) AS revision, body FROM sheets WHERE date >= ? AND date <= ?
       GROUP BY date ORDER BY date`,
    );
  }

  /** Everything that waits, inside the caller's transaction. */
  writeAll(waiting: Waiting): void {
    for (const reading of waiting.readings) {
      this.#putReading.run(Math.round(reading.atMs), this.#points.idOf(reading.point), reading.value);
    }
    for (const record of waiting.records) this.#putRecord.run(...toRow(record, this.#texts));
    for (const plan of waiting.plans) this.#putPlan.run(plan.madeMs, packPlan(plan));
    for (const [name, body] of waiting.memories) this.#putMemory.run(name, body);
  }

  /** After a transaction was rolled back: dictionary entries made in it are gone. */
  forget(): void {
    this.#points.forget();
    this.#texts.forget();
  }

  between(fromMs: number, toMs: number): CycleRecord[] {
    return this.#records.all(fromMs, toMs).map((row) => fromRow(row, this.#texts));
  }

  replace(fromMs: number, toMs: number, records: readonly CycleRecord[]): void {
    this.#dropRecords.run(fromMs, toMs);
    for (const record of records) this.#putRecord.run(...toRow(record, this.#texts));
  }

  addSheet(date: string, body: string): number {
    return this.#db.transaction(() => this.#putSheet.get(date, body, date) ?? 1)();
  }

  /** A replay asks the same thousands of times; the few selections of points there are stay prepared. */
  #readings(sql: string): ReadingRows {
    const known = this.#prepared.get(sql);
    if (known !== undefined) return known;
    if (this.#prepared.size >= MOST_PREPARED) this.#prepared.clear();
    const fresh = this.#db.prepare<{ from: number; to: number }, Row>(sql).raw() as ReadingRows;
    this.#prepared.set(sql, fresh);
    return fresh;
  }

  /** Raw readings and the means of older ones, in order of time. */
  readingsBetween(fromMs: number, toMs: number, wanted: ReadonlySet<string> | null): Reading[] {
    const ids = wanted === null ? null : [...wanted].flatMap((name) => this.#points.find(name) ?? []);
    const only = ids === null ? '' : `AND point IN (${ids.join(', ')})`;
    const part = (table: string, value: string, middleMs: number): string =>
      `SELECT ts + ${middleMs}, point, ${value} FROM ${table}
       WHERE ts > :from - ${middleMs} AND ts <= :to - ${middleMs} ${only}`;
    const sql = `${part('readings', 'value', 0)} UNION ALL ${part('minutes', 'mean', MINUTE_MS / 2)}
         UNION ALL ${part('quarters', 'mean', (15 * MINUTE_MS) / 2)} ORDER BY 1, 2`;
    const rows = this.#readings(sql).all({ from: fromMs, to: toMs });
    return rows.flatMap(([atMs, id, value]) => {
      const point = this.#points.textOf(id);
      if (!isPointId(point)) return [];
      const truth = pointSpec(point)?.kind === 'boolean';
      return [{ point, atMs, value: truth ? Math.round(value) : value }];
    });
  }
}

/** The prepared SQL of the store, each statement once. */
import type Database from 'better-sqlite3';
import { pointSpec, type PointId, type Reading } from '../points.ts';
import type { CycleRecord } from '../record.ts';
import { MINUTE_MS } from '../time.ts';
import type { RecordTable } from './compaction.ts';
import { packPlan } from './plan-codec.ts';
import { fromRow, RECORD_COLUMNS, toRow, type Cell } from './record-codec.ts';
import { storedDictionary, type StoredDictionary } from './texts.ts';
import type { Waiting } from './waiting.ts';

type Row = [ts: number, point: number, value: number];

const columns = ['atMs', ...RECORD_COLUMNS.keys()].map((name) => `"${name}"`).join(', ');

export class Statements implements RecordTable {
  readonly plans: Database.Statement;
  readonly lastPlan: Database.Statement;
  readonly firstRecordMs: Database.Statement;
  readonly lastRecordMs: Database.Statement;
  readonly memory: Database.Statement;
  readonly sheet: Database.Statement;
  readonly sheets: Database.Statement;
  readonly #db: Database.Database;
  readonly #points: StoredDictionary;
  readonly #texts: StoredDictionary;
  readonly #putReading: Database.Statement;
  readonly #putRecord: Database.Statement;
  readonly #putPlan: Database.Statement;
  readonly #putMemory: Database.Statement;
  readonly #putSheet: Database.Statement;
  readonly #records: Database.Statement;
  readonly #dropRecords: Database.Statement;

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
      .prepare(`SELECT ${columns} FROM cycles WHERE atMs > ? AND atMs <= ? ORDER BY atMs`)
      .raw();
    this.#dropRecords = db.prepare('DELETE FROM cycles WHERE atMs > ? AND atMs <= ?');
    this.firstRecordMs = db.prepare('SELECT min(atMs) FROM cycles').pluck();
    this.lastRecordMs = db.prepare('SELECT max(atMs) FROM cycles').pluck();
    this.#putPlan = db.prepare('INSERT OR REPLACE INTO plans VALUES (?, ?)');
    this.plans = db
      .prepare('SELECT body FROM plans WHERE madeMs > ? AND madeMs <= ? ORDER BY madeMs')
      .pluck();
    this.lastPlan = db.prepare('SELECT body FROM plans ORDER BY madeMs DESC LIMIT 1').pluck();
    this.#putMemory = db.prepare('INSERT OR REPLACE INTO memories VALUES (?, ?)');
    this.memory = db.prepare('SELECT body FROM memories WHERE name = ?').pluck();
    this.#putSheet = db.prepare(
      `INSERT INTO sheets SELECT ?, coalesce(max(revision), 0) + 1, ? FROM sheets WHERE date = ?
       RETURNING revision`,
    );
    this.sheet = db.prepare(
      'SELECT date, revision, body FROM sheets WHERE date = ? AND (? IS NULL OR revision = ?) ORDER BY revision DESC LIMIT 1',
    );
    this.sheets = db.prepare(
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
    return (this.#records.all(fromMs, toMs) as Cell[][]).map((row) => fromRow(row, this.#texts));
  }

  replace(fromMs: number, toMs: number, records: readonly CycleRecord[]): void {
    this.#dropRecords.run(fromMs, toMs);
    for (const record of records) this.#putRecord.run(...toRow(record, this.#texts));
  }

  addSheet(date: string, body: string): number {
    return this.#db.transaction(() => {
      const row = this.#putSheet.get(date, body, date) as { revision: number };
      return row.revision;
    })();
  }

  /** Raw readings and the means of older ones, in order of time. */
  readingsBetween(fromMs: number, toMs: number, wanted: ReadonlySet<string> | null): Reading[] {
    const ids = wanted === null ? null : [...wanted].flatMap((name) => this.#points.find(name) ?? []);
    const only = ids === null ? '' : `AND point IN (${ids.join(', ')})`;
    const part = (table: string, value: string, middleMs: number): string =>
      `SELECT ts + ${middleMs}, point, ${value} FROM ${table}
       WHERE ts > :from - ${middleMs} AND ts <= :to - ${middleMs} ${only}`;
    const rows = this.#db
      .prepare(
        `${part('readings', 'value', 0)} UNION ALL ${part('minutes', 'mean', MINUTE_MS / 2)}
         UNION ALL ${part('quarters', 'mean', (15 * MINUTE_MS) / 2)} ORDER BY 1, 2`,
      )
      .raw()
      .all({ from: fromMs, to: toMs }) as Row[];
    return rows.map(([atMs, id, value]) => {
      const point = this.#points.textOf(id) as PointId;
      const truth = pointSpec(point)?.kind === 'boolean';
      return { point, atMs, value: truth ? Math.round(value) : value };
    });
  }
}

/**
 * Thinning by age, in short transactions so that the daemon's loop is never held up for long. Every step moves an
 * hour or a day whole, so a crash between steps loses nothing and running it again changes nothing. Late readings of
 * a time already thinned are averaged in, weighted by how many there were.
 */
import type Database from 'better-sqlite3';
import type { CycleRecord } from '../record.ts';
import { DAY_MS, HOUR_MS, MINUTE_MS } from '../time.ts';
import { thin } from './thin.ts';

/** Minute means become quarter-hour means after this age. */
const KEEP_MINUTES_MS = 60 * DAY_MS;
/** Cycle records are thinned to quarter hours after this age: five weeks, so that a month is replayed in full. */
const KEEP_RECORDS_MS = 35 * DAY_MS;
/** Plans: all for three days, then one an hour, then one in three hours. */
const PLAN_AGES: readonly (readonly [ageMs: number, keepOneInMs: number, mark: string])[] = [
  [3 * DAY_MS, HOUR_MS, 'plans-hourly-until'],
  [60 * DAY_MS, 3 * HOUR_MS, 'plans-three-hourly-until'],
];
const RECORDS_MARK = 'records-thinned-until';

export interface RecordTable {
  /** Records with fromMs < atMs ≤ toMs, in order. */
  between(fromMs: number, toMs: number): CycleRecord[];
  replace(fromMs: number, toMs: number, records: readonly CycleRecord[]): void;
}

export interface CompactionResult {
  readonly steps: number;
  /** False when more is left for the next call. */
  readonly done: boolean;
}

type Step = () => boolean;

export function createCompaction(db: Database.Database, records: RecordTable, keepRawMs: number) {
  const moveReadings = mover(db, 'readings', 'minutes', MINUTE_MS, HOUR_MS, 'avg(value)', 'count(*)');
  const moveMinutes = mover(db, 'minutes', 'quarters', 15 * MINUTE_MS, DAY_MS, 'avg(mean)', 'count(*)');
  const thinOne = recordThinner(db, records);
  const plans = PLAN_AGES.map(([ageMs, keepOneInMs, mark]) => ({
    ageMs,
    step: planThinner(db, keepOneInMs, mark),
  }));

  return function compact(nowMs: number, mostSteps: number): CompactionResult {
    const work: Step[] = [
      () => moveReadings(floorTo(nowMs - keepRawMs, HOUR_MS)),
      () => moveMinutes(floorTo(nowMs - Math.max(KEEP_MINUTES_MS, keepRawMs), DAY_MS)),
      () => thinOne(floorTo(nowMs - KEEP_RECORDS_MS, HOUR_MS)),
      ...plans.map((plan) => () => plan.step(floorTo(nowMs - plan.ageMs, 3 * HOUR_MS))),
    ];
    let steps = 0;
    for (const step of work) {
      while (steps < mostSteps && step()) steps++;
    }
    return { steps, done: steps < mostSteps };
  };
}

function floorTo(value: number, step: number): number {
  return Math.floor(value / step) * step;
}

/** Moves the oldest chunk of one table into means of another; false when nothing is old enough. */
function mover(
  db: Database.Database,
  from: string,
  to: string,
  spanMs: number,
  chunkMs: number,
  mean: string,
  count: string,
): (cutoffMs: number) => boolean {
  const oldest = db.prepare<[], number | null>(`SELECT min(ts) FROM ${from}`).pluck();
  const insert = db.prepare(
    `INSERT INTO ${to} (ts, point, mean, n)
     SELECT ts - ((ts % ${spanMs}) + ${spanMs}) % ${spanMs} AS start, point, ${mean}, ${count}
     FROM ${from} WHERE ts >= ? AND ts < ? GROUP BY start, point
     ON CONFLICT (ts, point) DO UPDATE SET
       mean = (mean * n + excluded.mean * excluded.n) / (n + excluded.n), n = n + excluded.n`,
  );
  const remove = db.prepare(`DELETE FROM ${from} WHERE ts >= ? AND ts < ?`);
  const move = db.transaction((start: number, end: number) => {
    insert.run(start, end);
    remove.run(start, end);
  });
  return (cutoffMs) => {
    const first = oldest.get() ?? null;
    if (first === null || first >= cutoffMs) return false;
    const start = floorTo(first, chunkMs);
    move(start, Math.min(start + chunkMs, cutoffMs));
    return true;
  };
}

interface Marks {
  get(name: string): number | null;
  set(name: string, value: number): void;
}

function marksOf(db: Database.Database): Marks {
  const get = db.prepare<[name: string], number>('SELECT value FROM marks WHERE name = ?').pluck();
  const set = db.prepare('INSERT OR REPLACE INTO marks (name, value) VALUES (?, ?)');
  return {
    get: (name) => get.get(name) ?? null,
    set: (name, value) => void set.run(name, value),
  };
}

function recordThinner(db: Database.Database, records: RecordTable): (cutoffMs: number) => boolean {
  const marks = marksOf(db);
  const next = db
    .prepare<[afterMs: number], number | null>('SELECT min(atMs) FROM cycles WHERE atMs > ?')
    .pluck();
  const thinHour = db.transaction((start: number, end: number) => {
    const full = records.between(start, end);
    const thinned = thin(full);
    if (thinned.length < full.length) records.replace(start, end, thinned);
    marks.set(RECORDS_MARK, end);
  });
  return (cutoffMs) => {
    const after = marks.get(RECORDS_MARK) ?? Number.MIN_SAFE_INTEGER;
    const first = next.get(after) ?? null;
    if (first === null) return false;
    const start = Math.max(after, floorTo(first - 1, HOUR_MS));
    if (start + HOUR_MS > cutoffMs) return false;
    thinHour(start, floorTo(start, HOUR_MS) + HOUR_MS);
    return true;
  };
}

function planThinner(
  db: Database.Database,
  keepOneInMs: number,
  mark: string,
): (cutoffMs: number) => boolean {
  const marks = marksOf(db);
  const next = db
    .prepare<[fromMs: number], number | null>('SELECT min(madeMs) FROM plans WHERE madeMs >= ?')
    .pluck();
  const remove = db.prepare(
    `DELETE FROM plans WHERE madeMs >= ? AND madeMs < ? AND madeMs NOT IN
       (SELECT min(madeMs) FROM plans WHERE madeMs >= ? AND madeMs < ? GROUP BY madeMs / ${keepOneInMs})`,
  );
  const thinDay = db.transaction((start: number, end: number) => {
    remove.run(start, end, start, end);
    marks.set(mark, end);
  });
  return (cutoffMs) => {
    const first = next.get(marks.get(mark) ?? Number.MIN_SAFE_INTEGER) ?? null;
    if (first === null || first >= cutoffMs) return false;
    const start = floorTo(first, 3 * HOUR_MS);
    thinDay(start, Math.min(start + DAY_MS, cutoffMs));
    return true;
  };
}

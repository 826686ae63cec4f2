/**
 * The shape of the database, one step a version (`user_version`). A step is never edited after release; the next one
 * is appended. A database from a newer rimehold is refused, untouched.
 *
 * `readings` is WITHOUT ROWID with time first: new rows land on the last page, so a batch of fifty writes four pages
 * instead of one page a point, which is what wears flash. `cycles` gets one column for each field of the record
 * (see record-codec.ts): fields only ever come, so they are added by name and need no version of their own.
 */
import type Database from 'better-sqlite3';
import { RimeholdError } from '../errors.ts';
import { RECORD_COLUMNS } from './record-codec.ts';

/** "RIME" in the file's header: says whose database it is. */
const APPLICATION_ID = 0x52494d45;

const STEPS: readonly string[] = [
  `CREATE TABLE site (one INTEGER PRIMARY KEY CHECK (one = 1), id TEXT NOT NULL);
   CREATE TABLE points (id INTEGER PRIMARY KEY, name TEXT NOT NULL UNIQUE);
   CREATE TABLE readings (ts INTEGER NOT NULL, point INTEGER NOT NULL, value REAL NOT NULL,
     PRIMARY KEY (ts, point)) WITHOUT ROWID;
   CREATE TABLE minutes (ts INTEGER NOT NULL, point INTEGER NOT NULL, mean REAL NOT NULL, n INTEGER NOT NULL,
     PRIMARY KEY (ts, point)) WITHOUT ROWID;
   CREATE TABLE quarters (ts INTEGER NOT NULL, point INTEGER NOT NULL, mean REAL NOT NULL, n INTEGER NOT NULL,
     PRIMARY KEY (ts, point)) WITHOUT ROWID;
   CREATE TABLE texts (id INTEGER PRIMARY KEY, body TEXT NOT NULL UNIQUE);
   CREATE TABLE cycles (atMs INTEGER PRIMARY KEY);
   CREATE TABLE plans (madeMs INTEGER PRIMARY KEY, body BLOB NOT NULL);
   CREATE TABLE memories (name TEXT PRIMARY KEY, body TEXT NOT NULL) WITHOUT ROWID;
   CREATE TABLE sheets (date TEXT NOT NULL, revision INTEGER NOT NULL, body TEXT NOT NULL,
     PRIMARY KEY (date, revision)) WITHOUT ROWID;
   CREATE TABLE marks (name TEXT PRIMARY KEY, value INTEGER NOT NULL) WITHOUT ROWID;`,
];

export const LATEST_VERSION = STEPS.length;

/** Version of an open database after making sure that it is ours and not from the future. 0 for a fresh file. */
export function checkedVersion(db: Database.Database, file: string): number {
  const owner = pragmaNumber(db, 'application_id');
  const tables = db.prepare<[], number>('SELECT count(*) FROM sqlite_master').pluck().get() ?? 0;
  if (owner !== APPLICATION_ID && tables > 0) {
    throw new RimeholdError(
      'store-broken',
      `Expected a rimehold database in ${file}, found the database of another program; name another file under store: file.`,
      { file },
    );
  }
  const version = pragmaNumber(db, 'user_version');
  if (version > LATEST_VERSION) {
    throw new RimeholdError(
      'store-newer',
      `Expected a database of version ${LATEST_VERSION} or older in ${file}, found version ${version} of a newer rimehold; update rimehold or restore the backup made before the update.`,
      { file, version },
    );
  }
  return version;
}

export function pragmaNumber(db: Database.Database, name: string): number {
  return Number(db.pragma(name, { simple: true }));
}

/** Brings the database to the newest shape, each step whole or not at all. */
export function migrate(db: Database.Database, fromVersion: number): void {
  for (let version = fromVersion; version < LATEST_VERSION; version++) {
    db.transaction(() => {
      db.exec(STEPS[version]);
      db.pragma(`application_id = ${APPLICATION_ID}`);
      db.pragma(`user_version = ${version + 1}`);
    })();
  }
  if (missingColumns(db).length > 0) db.transaction(() => addColumns(db))();
}

/** True when a reader may use the database as it is. */
export function isCurrent(db: Database.Database, version: number): boolean {
  return version === LATEST_VERSION && missingColumns(db).length === 0;
}

function missingColumns(db: Database.Database): string[] {
  const present = new Set(
    db.prepare<[], string>("SELECT name FROM pragma_table_info('cycles')").pluck().all(),
  );
  return [...RECORD_COLUMNS.keys()].filter((name) => !present.has(name));
}

function addColumns(db: Database.Database): void {
  for (const name of missingColumns(db)) {
    db.exec(`ALTER TABLE cycles ADD COLUMN "${name}" ${RECORD_COLUMNS.get(name)}`);
  }
}

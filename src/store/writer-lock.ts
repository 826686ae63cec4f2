/**
 * One writer for each database. The lock is SQLite's own reserved lock on a small file beside it, held for as long as
 * the process lives: the system drops it when the process dies, however it dies, so nothing ever needs cleaning up.
 * Readers never touch the file. The process number stands in it only for the message.
 */
import Database from 'better-sqlite3';
import { RimeholdError } from '../errors.ts';
import { sqliteCode, storeFault } from './faults.ts';

export interface WriterLock {
  release(): void;
}

export function writerLockFile(file: string): string {
  return `${file}-writer`;
}

/** Takes the lock or throws `store-busy`, naming the process that holds it. */
export function takeWriterLock(file: string, pid: number): WriterLock {
  const lockFile = writerLockFile(file);
  let lock: Database.Database | null = null;
  try {
    lock = new Database(lockFile, { timeout: 0 });
    lock.pragma('synchronous = OFF');
    lock.exec('CREATE TABLE IF NOT EXISTS holder (one INTEGER PRIMARY KEY, pid INTEGER NOT NULL)');
    lock.prepare('INSERT OR REPLACE INTO holder VALUES (1, ?)').run(pid);
    lock.exec('BEGIN IMMEDIATE');
  } catch (error) {
    const busy = sqliteCode(error).startsWith('SQLITE_BUSY');
    const holder = busy && lock ? holderOf(lock) : null;
    lock?.close();
    if (!busy) throw storeFault(error, lockFile);
    throw new RimeholdError(
      'store-busy',
      `Expected to be the only rimehold writing ${file}, found another one${holder === null ? '' : ` (process ${holder})`}; stop it first, or name another file under store: file.`,
      { file, pid: holder },
    );
  }
  const held = lock;
  return { release: () => held.close() };
}

function holderOf(lock: Database.Database): number | null {
  try {
    return lock.prepare<[], number>('SELECT pid FROM holder').pluck().get() ?? null;
  } catch {
    return null;
  }
}

/** What SQLite says, as one of our own sentences. */
import { RimeholdError } from '../errors.ts';

/** The SQLite result code name of an error, empty for any other error. */
export function sqliteCode(error: unknown): string {
  const code = error instanceof Error ? (error as Error & { code?: unknown }).code : undefined;
  return typeof code === 'string' && code.startsWith('SQLITE_') ? code : '';
}

/** Turns any error met on the database into a RimeholdError that says what to do. */
export function storeFault(error: unknown, file: string): RimeholdError {
  if (error instanceof RimeholdError) return error;
  const code = sqliteCode(error);
  const wrap = (kind: RimeholdError['code'], sentence: string): RimeholdError =>
    new RimeholdError(kind, sentence, { file, sqlite: code }, { cause: error });
  if (code === 'SQLITE_FULL' || code === 'SQLITE_IOERR_WRITE' || code === 'SQLITE_IOERR_FSYNC') {
    return wrap(
      'store-full',
      `Expected room to write to ${file}, found its disk full or refusing writes; free some space, readings wait in memory meanwhile.`,
    );
  }
  if (code.startsWith('SQLITE_CORRUPT') || code === 'SQLITE_NOTADB') {
    return wrap(
      'store-broken',
      `Expected a rimehold database in ${file}, found a file that SQLite cannot read; move it away and restore a backup, or start afresh without it.`,
    );
  }
  if (code.startsWith('SQLITE_BUSY') || code === 'SQLITE_LOCKED') {
    return wrap(
      'store-busy',
      `Expected ${file} to be free for writing, found another program writing it; stop that one first.`,
    );
  }
  if (code.startsWith('SQLITE_CANTOPEN') || code.startsWith('SQLITE_READONLY') || code === 'SQLITE_PERM') {
    return wrap(
      'file-unreadable',
      `Expected to open ${file} for reading and writing, found that the system refuses it; check that its folder exists and belongs to the user that runs rimehold.`,
    );
  }
  const said = error instanceof Error ? error.message : String(error);
  return wrap('internal', `The database ${file} could not be used: ${said}.`);
}

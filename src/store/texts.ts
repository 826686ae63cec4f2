/** Dictionaries kept in two tables: words of the records, and names of the points. */
import type Database from 'better-sqlite3';
import type { Dictionary } from './record-codec.ts';

/**
 * A dictionary over a table of (id, text). New texts are written at once, inside whatever transaction runs; when that
 * one is rolled back, `forget` must be called so that memory and table agree again.
 */
export interface StoredDictionary extends Dictionary {
  forget(): void;
  /** The number of a text that is already there, null otherwise; never writes. */
  find(text: string): number | null;
}

export function storedDictionary(db: Database.Database, table: string, column: string): StoredDictionary {
  const ids = new Map<string, number>();
  const texts = new Map<number, string>();
  const insert = db.prepare(`INSERT INTO ${table} (${column}) VALUES (?)`);
  const byText = db.prepare<[text: string], number>(`SELECT id FROM ${table} WHERE ${column} = ?`).pluck();
  const byId = db.prepare<[id: number], string>(`SELECT ${column} FROM ${table} WHERE id = ?`).pluck();
  const keep = (text: string, id: number): number => {
    ids.set(text, id);
    texts.set(id, text);
    return id;
  };
  const find = (text: string): number | null => {
    const known = ids.get(text);
    if (known !== undefined) return known;
    const id = byText.get(text);
    return id === undefined ? null : keep(text, id);
  };
  return {
    find,
    idOf: (text) => find(text) ?? keep(text, Number(insert.run(text).lastInsertRowid)),
    textOf: (id) => {
      const known = texts.get(id);
      if (known !== undefined) return known;
      const text = byId.get(id);
      if (text === undefined) return '';
      keep(text, id);
      return text;
    },
    forget: () => {
      ids.clear();
      texts.clear();
    },
  };
}

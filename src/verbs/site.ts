/** What every verb that works on a site begins with: its file, its secrets, its database. */
import { readFileSync } from 'node:fs';
import type { SiteConfig } from '../config.ts';
import { RimeholdError, sentenceOf } from '../errors.ts';
import { faultLines, parseSiteFile } from '../site-file.ts';
import { openStore, type Store } from '../store/store.ts';

/** Reads a text file or throws `file-unreadable` with what the file was for. */
export function readText(file: string, what: string): string {
  try {
    return readFileSync(file, 'utf8');
  } catch (error) {
    throw new RimeholdError(
      'file-unreadable',
      `Expected ${what} in ${file}, but it cannot be read: ${systemWords(error)}.`,
      { file },
      { cause: error },
    );
  }
}

const SYSTEM_WORDS: Readonly<Record<string, string>> = {
  ENOENT: 'there is no such file',
  EACCES: 'this user may not read it',
  EISDIR: 'it is a folder',
};

function systemWords(error: unknown): string {
  const code = error instanceof Error && 'code' in error ? String(error.code) : '';
  return SYSTEM_WORDS[code] ?? sentenceOf(error);
}

/** Reads and checks a site file; throws `config` with every fault at once. */
export function loadSite(file: string): SiteConfig {
  const parsed = parseSiteFile(readText(file, 'a site file'));
  if (!parsed.ok) throw new RimeholdError('config', faultLines(file, parsed.faults), { file });
  return parsed.config;
}

/** A secret from the file or the environment variable that the site file names; null when it names neither. */
export function secret(what: string, file: string | null, variable: string | null): string | null {
  if (file !== null) {
    const first = readText(file, what).split(/\r?\n/)[0];
    if (first === '')
      throw new RimeholdError('config', `Expected ${what} on the first line of ${file}, found it empty.`, {
        file,
      });
    return first;
  }
  if (variable === null) return null;
  const value = process.env[variable];
  if (value === undefined || value === '') {
    throw new RimeholdError(
      'config',
      `Expected ${what} in the environment variable ${variable}, found it unset; set it, or use a file.`,
      { variable },
    );
  }
  return value;
}

export function siteStore(config: SiteConfig, readOnly: boolean): Store {
  return openStore(config.store.file, {
    siteId: config.site.id,
    readOnly,
    keepRawMs: config.store.keepRawMs,
  });
}

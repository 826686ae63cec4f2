/** What every verb that works on a site begins with: its file, its secrets, its database; and files beside them. */
import { readFileSync, writeFileSync } from 'node:fs';
import { isAbsolute } from 'node:path';
import type { SiteConfig } from '../config.ts';
import { RimeholdError, systemWords } from '../errors.ts';
import { templateFaults } from '../mqtt/announce.ts';
import { pointFaults } from '../mqtt/intake.ts';
import { faultLines, parseSiteFile, type Fault } from '../site-file.ts';
import { openStore, type Store } from '../store/store.ts';

/** Reads a file or throws `file-unreadable` with what the file was for and what a person can do. */
export function readBytes(file: string, what: string, todo: string): Buffer {
  try {
    return readFileSync(file);
  } catch (error) {
    throw unreadable(file, what, todo, error);
  }
}

/** `file-unreadable` for a file that was opened some other way. */
export function unreadable(file: string, what: string, todo: string, cause: unknown): RimeholdError {
  const sentence = `Expected ${what} in ${file}, but it cannot be read: ${reasonFor(cause, file)}; ${todo}.`;
  return new RimeholdError('file-unreadable', sentence, { file }, { cause });
}

/** Writes a text file or throws `file-unwritable`. */
export function writeText(file: string, text: string, what: string, todo: string): void {
  try {
    writeFileSync(file, text);
  } catch (cause) {
    const sentence = `Expected to write ${what} to ${file}, but it cannot be written: ${reasonFor(cause, file)}; ${todo}.`;
    throw new RimeholdError('file-unwritable', sentence, { file }, { cause });
  }
}

/** The reason, and for a relative path that is not there the folder it was looked for in. */
function reasonFor(error: unknown, file: string): string {
  const missing = error instanceof Error && 'code' in error && error.code === 'ENOENT';
  return `${systemWords(error)}${missing && !isAbsolute(file) ? ` (looked for in ${process.cwd()})` : ''}`;
}

/** Reads and checks a site file; throws `config` with every fault at once. */
export function loadSite(file: string): SiteConfig {
  const text = readBytes(file, 'a site file', 'name one that can be read with --config').toString('utf8');
  // Six missing sections would be a riddle to whoever made the file with a slip of the editor.
  if (text.split('\n').every((line) => /^\s*(#.*)?$/.test(line)))
    throw new RimeholdError(
      'config',
      `Expected a site file in ${file}, found nothing written in it; begin with a copy of config/juniper.yaml and change it to your plant.`,
      { file },
    );
  const parsed = parseSiteFile(text);
  const faults = parsed.ok ? messageFaults(parsed.config) : parsed.faults;
  if (!parsed.ok || faults.length > 0) throw new RimeholdError('config', faultLines(file, faults), { file });
  return parsed.config;
}

/** What points and templates say that no message could meet: better found before anything is opened. */
function messageFaults(config: SiteConfig): Fault[] {
  return [...pointFaults(config.points), ...templateFaults(config)].map((line) => {
    const [, where, sentence] = /^(\S+): (.*?)\.?$/s.exec(line) ?? ['', '', line];
    return { path: where.replaceAll('.', '/'), sentence };
  });
}

/**
 * A secret from the file or the environment variable that the site file names; null when it names neither.
 * `key` is its name in the site file without `-file` or `-env`.
 */
export function secret(
  what: string,
  key: string,
  file: string | null,
  variable: string | null,
): string | null {
  if (file !== null) {
    const todo = `make that file with ${what} on its first line, or mend ${key}-file in the site file`;
    const first = readBytes(file, what, todo).toString('utf8').split(/\r?\n/)[0];
    if (first === '')
      throw new RimeholdError(
        'config',
        `Expected ${what} on the first line of ${file}, found it empty; write it there, or mend ${key}-file in the site file.`,
        { file },
      );
    return first;
  }
  if (variable === null) return null;
  const value = process.env[variable];
  if (value === undefined || value === '') {
    throw new RimeholdError(
      'config',
      `Expected ${what} in the environment variable ${variable}, found it ${value === undefined ? 'unset' : 'empty'}; set it where rimehold is started, or name a file under ${key}-file in the site file.`,
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

/** `rimehold backup F`: a consistent copy of the database, also while the daemon writes it. */
import { EXIT, RimeholdError } from '../errors.ts';
import { loadSite, siteStore } from './site.ts';

export function backup(target: string, options: { config: string; json?: boolean }): number {
  const config = loadSite(options.config);
  const store = siteStore(config, true);
  try {
    store.backup(target);
  } catch (error) {
    throw error instanceof RimeholdError && error.code === 'store-full' ? noRoom(target, error) : error;
  } finally {
    store.close();
  }
  if (options.json) console.log(JSON.stringify({ from: config.store.file, to: target }));
  else console.log(`${config.store.file} is copied to ${target}.`);
  return EXIT.yes;
}

function noRoom(target: string, cause: RimeholdError): RimeholdError {
  const sentence = `Expected room for the copy ${target}, found its disk full or refusing writes; free some space or name a file on another disk.`;
  return new RimeholdError('store-full', sentence, cause.context, { cause });
}

/** `rimehold backup F`: a consistent copy of the database, also while the daemon writes it. */
import { EXIT } from '../errors.ts';
import { loadSite, siteStore } from './site.ts';

export function backup(target: string, options: { config: string; json?: boolean }): number {
  const config = loadSite(options.config);
  const store = siteStore(config, true);
  try {
    store.backup(target);
  } finally {
    store.close();
  }
  if (options.json) console.log(JSON.stringify({ from: config.store.file, to: target }));
  else console.log(`${config.store.file} is copied to ${target}.`);
  return EXIT.yes;
}

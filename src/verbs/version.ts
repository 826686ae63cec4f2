/** The version of rimehold, read once from its package description. */
import { readFileSync } from 'node:fs';

export const VERSION: string = (
  JSON.parse(readFileSync(new URL('../../package.json', import.meta.url), 'utf8')) as { version: string }
).version;

/** Writing what waits to the disk, with a word in the log when that begins to fail and when it works again. */
import type { DaemonParts } from './ports.ts';

export function flush({ store, log }: Pick<DaemonParts, 'store' | 'log'>): void {
  const before = store.health().fault;
  const { fault } = store.flush();
  if (fault !== null && before?.code !== fault.code) log.error({ code: fault.code }, fault.message);
  if (fault === null && before !== null)
    log.info({}, 'The database takes data again; what waited in memory is written.');
}

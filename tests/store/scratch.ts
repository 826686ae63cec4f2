import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { onTestFinished } from 'vitest';
import { openStore, type Store, type StoreOptions } from '../../src/store/store.ts';

/** A folder of the running test, gone when it ends. */
export function scratchFolder(): string {
  const folder = mkdtempSync(join(tmpdir(), 'rimehold-store-'));
  onTestFinished(() => rmSync(folder, { recursive: true, force: true }));
  return folder;
}

export function scratchFile(): string {
  return join(scratchFolder(), 'history.db');
}

/** Opens a store that the test closes by itself or that is closed when it ends. */
export function opened(file: string, options: Partial<StoreOptions> = {}): Store {
  const store = openStore(file, { siteId: 'juniper', ...options });
  onTestFinished(() => void store.close());
  return store;
}

/** What `rimehold check` reads of the database: whether it is sound, and what the daemon has learned of the plant. */
import { existsSync } from 'node:fs';
import type { SiteConfig } from '../config.ts';
import { sentenceOf } from '../errors.ts';
import { createEstimator, type IceEstimate } from '../estimation/estimator.ts';
import type { Store } from '../store/store.ts';
import { siteStore } from './site.ts';

export interface StoreLook {
  readonly words: string;
  readonly sound: boolean;
  /** As the daemon last kept it; null before it has. */
  readonly estimate: Pick<IceEstimate, 'atMs' | 'learned' | 'probes'> | null;
}

export function lookAtStore(config: SiteConfig): StoreLook {
  const { file } = config.store;
  if (!existsSync(file))
    return { words: `${file} is not there yet; the first run makes it`, sound: true, estimate: null };
  try {
    const store = siteStore(config, true);
    try {
      const faults = store.verify();
      const estimate = lastEstimate(config, store);
      return faults.length === 0
        ? { words: `${file} is sound`, sound: true, estimate }
        : { words: `${file} is damaged: ${faults[0]}; put a backup in its place`, sound: false, estimate };
    } finally {
      store.close();
    }
  } catch (error) {
    return { words: sentenceOf(error), sound: false, estimate: null };
  }
}

/** The estimate of the last checkpoint; null where there is none that can be read. */
function lastEstimate(config: SiteConfig, store: Store): StoreLook['estimate'] {
  const text = store.loadMemory('estimator');
  if (text === null) return null;
  try {
    const { atMs, memory } = JSON.parse(text) as { atMs: number; memory: unknown };
    return { ...createEstimator(config, { seed: 1, startMs: atMs, memory }).estimate(), atMs };
  } catch {
    return null;
  }
}

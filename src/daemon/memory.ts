/** What outlives a restart, as JSON in the store by name. A damaged memory is said and learned anew. */
import { freshMemory } from '../dispatch/limits.ts';
import type { DispatchMemory } from '../dispatch/types.ts';
import type { Store } from '../store/store.ts';
import type { Log } from './ports.ts';
import type { Checkpoint } from './rewind.ts';

export class Memory {
  readonly #store: Store;
  readonly #log: Log;

  constructor(store: Store, log: Log) {
    this.#store = store;
    this.#log = log;
  }

  load(name: 'estimator' | 'forecaster' | 'dispatch'): unknown {
    const text = this.#store.loadMemory(name);
    if (text === null) return null;
    try {
      return JSON.parse(text) as unknown;
    } catch {
      this.#log.warn({ name }, `What was learned (${name}) is damaged in the store; it is learned anew.`);
      return null;
    }
  }

  save(name: 'estimator' | 'forecaster' | 'dispatch', value: unknown): void {
    this.#store.saveMemory(name, JSON.stringify(value));
  }

  /** What a crash in the next half minute must not lose. A fault of the disk is told by the next flush as well. */
  saveNow(name: 'dispatch', value: unknown): void {
    this.save(name, value);
    this.#store.flush();
  }

  /** Latches outlive a restart; of the compressor nothing is known until its power is heard. */
  dispatch(nowMs: number): DispatchMemory {
    const stored = this.load('dispatch') as Partial<DispatchMemory> | null;
    const { chillerOn, chillerSinceMs, chillerSeenMs, chillerKnown, pumpOnSinceMs } = freshMemory(nowMs);
    return {
      ...freshMemory(nowMs),
      ...stored,
      chillerOn,
      chillerSinceMs,
      chillerSeenMs,
      chillerKnown,
      pumpOnSinceMs,
    };
  }

  /**
   * The estimator's last checkpoint, or null when there is none. With the clock behind it, what was learned still
   * holds: it is taken as if it had been kept at `nowMs`, and the estimator meets the clock from there.
   */
  checkpoint(nowMs: number): Checkpoint | null {
    const stored = this.load('estimator') as Partial<Checkpoint> | null;
    if (stored === null || typeof stored.atMs !== 'number' || !Number.isFinite(stored.atMs)) return null;
    return { atMs: Math.min(stored.atMs, nowMs), memory: stored.memory };
  }
}

/** What of the memory a crash must not lose: rests after a trip or a dry run. */
export function latchesOf({ trippedUntilMs, dryUntilMs }: DispatchMemory): string {
  return `${trippedUntilMs} ${dryUntilMs}`;
}

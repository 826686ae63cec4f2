/** A plant on a real broker as a stranger's daemon meets it: somebody who watches, somebody who publishes, a database. */
import { join } from 'node:path';
import { onTestFinished } from 'vitest';
import { startMosquitto } from '../mqtt/mosquitto.ts';
import { observe, until, type Observer } from '../mqtt/observer.ts';
import { openStore, type Store } from '../../src/store/store.ts';
import { ownFolder } from './stranger.ts';

export const STATE = 'homie/5/juniper/$state';
/** The machine may be busy with much else. */
export const PATIENCE_MS = 60_000;

export interface Plant {
  readonly url: string;
  readonly folder: string;
  readonly observer: Observer;
  readonly halt: () => Promise<void>;
  /** Publishes leaving-water values, each a hundredth of a kelvin further, and returns them. */
  readonly publish: (count: number) => Promise<number[]>;
}

export async function plant(): Promise<Plant> {
  const broker = await startMosquitto();
  onTestFinished(() => broker.stop());
  const observer = await observe(broker.url, 'homie/5/juniper/#');
  onTestFinished(() => observer.stop());
  let next = 0;
  let lastMs = 0;
  const publish = async (count: number): Promise<number[]> => {
    const values = Array.from({ length: count }, () => 4 + next++ / 100);
    for (const value of values) {
      // each with a time of its own: two arrivals in one millisecond would be one reading
      lastMs = Math.max(lastMs + 1, Date.now());
      await observer.publish('juniper/bank/leaving', JSON.stringify({ value, at: new Date(lastMs) }));
    }
    return values;
  };
  return { url: broker.url, folder: ownFolder(), observer, halt: () => broker.halt(), publish };
}

/** The leaving water tells its own time. */
export const TIMED = [
  'juniper/bank/leaving, unit: degC',
  'juniper/bank/leaving, read: /value, time: /at, unit: degC',
] as const;

/** Looks into the database beside the daemon. */
export function look<T>(folder: string, read: (store: Store) => T, readOnly = true): T {
  const store = openStore(join(folder, 'juniper.db'), { siteId: 'juniper', readOnly });
  try {
    return read(store);
  } finally {
    store.close();
  }
}

export const valuesIn = (store: Store): number[] =>
  store.readingsBetween(0, Infinity).map(({ value }) => value);
export const stateOf = (observer: Observer): string | undefined => observer.latest(STATE)?.text;
export const ready = (observer: Observer): Promise<void> =>
  until('the device to be ready', () => stateOf(observer) === 'ready', PATIENCE_MS);

/** Waits until the database holds so many readings; looks five times a second, for each look opens it anew. */
export async function stored(folder: string, holds: (count: number) => boolean): Promise<void> {
  const endMs = Date.now() + PATIENCE_MS;
  for (let count = 0; !holds(count); count = look(folder, valuesIn).length) {
    if (Date.now() > endMs) throw new Error(`waited in vain for readings in the database; it holds ${count}`);
    await new Promise((done) => setTimeout(done, 200));
  }
}

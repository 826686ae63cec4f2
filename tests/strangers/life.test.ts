/** The daemon's life on a real broker: told to stop, killed, its disk full, and a second daemon beside it. */
import { execFileSync } from 'node:child_process';
import { readdirSync, writeFileSync } from 'node:fs';
import { createServer } from 'node:net';
import { join } from 'node:path';
import { describe, expect, it, onTestFinished } from 'vitest';
import { freePort, hasMosquitto, startMosquitto } from '../mqtt/mosquitto.ts';
import { observe, until, type Observer } from '../mqtt/observer.ts';
import { openStore, type Store } from '../../src/store/store.ts';
import {
  expectNoInsides,
  expectRefusal,
  expectSentence,
  ownFolder,
  rimehold,
  rimeholdAs,
  start,
  startDaemon,
  writeSite,
} from './stranger.ts';

const STATE = 'homie/5/juniper/$state';
/** The machine may be busy with much else. */
const PATIENCE_MS = 60_000;

interface Plant {
  readonly url: string;
  readonly folder: string;
  readonly observer: Observer;
  readonly halt: () => Promise<void>;
  /** Publishes leaving-water values, each a hundredth of a kelvin further, and returns them. */
  readonly publish: (count: number) => Promise<number[]>;
}

async function plant(): Promise<Plant> {
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
const TIMED = [
  'juniper/bank/leaving, unit: degC',
  'juniper/bank/leaving, read: /value, time: /at, unit: degC',
] as const;

/** Looks into the database beside the daemon. */
function look<T>(folder: string, read: (store: Store) => T, readOnly = true): T {
  const store = openStore(join(folder, 'juniper.db'), { siteId: 'juniper', readOnly });
  try {
    return read(store);
  } finally {
    store.close();
  }
}

const valuesIn = (store: Store): number[] => store.readingsBetween(0, Infinity).map(({ value }) => value);
const stateOf = (observer: Observer): string | undefined => observer.latest(STATE)?.text;
const ready = (observer: Observer): Promise<void> =>
  until('the device to be ready', () => stateOf(observer) === 'ready', PATIENCE_MS);

describe.skipIf(!hasMosquitto)('the daemon', () => {
  it('told to stop says goodbye, writes what waited and ends with 0', async () => {
    const { url, folder, observer, publish } = await plant();
    // five minutes between two writes: only the last one, at the end, can have brought the readings in
    writeSite(folder, { url, changes: [TIMED], store: 'file: juniper.db, flush: PT5M' });
    const daemon = await startDaemon(folder);
    await ready(observer);
    const values = await publish(20);
    daemon.signal('SIGTERM');
    const { status, err } = await daemon.ended;
    expect(status, err).toBe(0);
    expectNoInsides(err);
    await until('the goodbye', () => stateOf(observer) === 'disconnected');
    expect(observer.seen.filter(({ topic, text }) => topic === STATE && text === 'lost')).toEqual([]);
    expect(look(folder, valuesIn, false)).toEqual(values);
  });

  it('told to stop while the broker is away, and while one that never answers holds its start', async () => {
    const { url, folder, observer, halt } = await plant();
    writeSite(folder, { url });
    const daemon = await startDaemon(folder);
    await ready(observer);
    await halt();
    daemon.signal('SIGINT');
    expect((await daemon.ended).status).toBe(0);

    const port = await freePort();
    let heard = false;
    const mute = createServer((socket) =>
      socket.on('error', () => undefined).on('data', () => (heard = true)),
    );
    await new Promise<void>((done) => mute.listen(port, '127.0.0.1', done));
    onTestFinished(() => void mute.close());
    writeSite(folder, { url: `mqtt://127.0.0.1:${port}` });
    const waiting = start(folder, 'run');
    await until('the first packet', () => heard, PATIENCE_MS);
    waiting.signal('SIGTERM');
    expect(await waiting.ended).toMatchObject({ status: 0, err: '' });
  });

  it('killed with -9 loses nothing that was flushed, and the next one starts on the same database', async () => {
    const { url, folder, observer, publish } = await plant();
    writeSite(folder, { url, changes: [TIMED], store: 'file: juniper.db, flush: PT1S' });
    const daemon = await startDaemon(folder);
    await ready(observer);
    await publish(50);
    await until('a flush', () => look(folder, valuesIn).length >= 50, PATIENCE_MS);
    const more = publish(200);
    await until('another', () => look(folder, valuesIn).length > 50, PATIENCE_MS);
    const flushed = look(folder, (store) => ({
      values: valuesIn(store),
      records: store.recordsBetween(0, Infinity).length,
    }));
    daemon.signal('SIGKILL');
    expect((await daemon.ended).status).toBeNull();
    await more;

    const next = await startDaemon(folder);
    next.signal('SIGTERM');
    const { status, err } = await next.ended;
    expect(status, err).toBe(0);
    look(folder, (store) => {
      expect(store.verify()).toEqual([]);
      expect(valuesIn(store).slice(0, flushed.values.length)).toEqual(flushed.values);
      expect(store.recordsBetween(0, Infinity).length).toBeGreaterThan(flushed.records);
    });
  });

  it('with a second one on its store or its page goes on undisturbed; the second could not (3)', async () => {
    const { url, folder, observer } = await plant();
    const port = await freePort();
    writeSite(folder, { url, web: `port: ${port}` });
    const first = await startDaemon(folder);
    await ready(observer);
    const words = observer.seen.filter(({ topic }) => topic === STATE).length;

    expectRefusal(await rimehold(folder, 'run'), 3, 'juniper.db', `process ${first.pid}`, 'stop it');
    const other = ownFolder();
    writeSite(other, { url, web: `port: ${port}` });
    expectRefusal(await rimehold(other, 'run'), 3, `127.0.0.1:${port}`, 'web.port');

    // same client identifier, same device: a second one that had got as far as the broker would have shown here
    expect(observer.seen.filter(({ topic }) => topic === STATE)).toHaveLength(words);
    expect(first.alive()).toBe(true);
    first.signal('SIGTERM');
    expect(await first.ended).toMatchObject({ status: 0, out: '' });
  });

  it('with a second one under its name is told which name, and both still end when told to', async () => {
    const { url, folder, observer } = await plant();
    const other = ownFolder();
    for (const one of [folder, other]) writeSite(one, { url, log: 'level: info' });
    const both = [await startDaemon(folder), await startDaemon(other)];
    await until(
      'a word of the name',
      () => both.some((daemon) => /identifier "rimehold-juniper"/.test(daemon.err())),
      PATIENCE_MS,
    );
    expect(both.every((daemon) => daemon.alive())).toBe(true);
    for (const daemon of both) daemon.signal('SIGTERM');
    for (const { ended } of both) expect((await ended).status).toBe(0);
    expect(observer.seen.length).toBeGreaterThan(0);
  });
});

it('whose name another client has taken over, by a broker that tells, ends (3) and frees its store', async () => {
  // CONNACK with success, then DISCONNECT with "session taken over" (MQTT 5 sections 3.2 and 3.14)
  const server = createServer((socket) => {
    socket.on('error', () => undefined);
    socket.once('data', () => {
      socket.write(Buffer.from('2003000000', 'hex'));
      setTimeout(() => socket.end(Buffer.from('e0028e00', 'hex')), 1500);
    });
  });
  const port = await freePort();
  await new Promise<void>((done) => server.listen(port, '127.0.0.1', done));
  onTestFinished(() => void server.close());
  const folder = ownFolder();
  writeSite(folder, { url: `mqtt://127.0.0.1:${port}` });
  const { status, err } = await rimehold(folder, 'run');
  expect(status).toBe(3);
  const last = err.trimEnd().split('\n').at(-1) ?? '';
  expectSentence(`${last}\n`);
  expect(last).toMatch(/rimehold-juniper.*broker\.client-id/);
  expect(look(folder, (store) => store.verify(), false)).toEqual([]);
});

const hasPrlimit = prlimitWorks();

function prlimitWorks(): boolean {
  try {
    execFileSync('prlimit', ['--version'], { stdio: 'pipe' });
    return true;
  } catch {
    console.warn('SKIPPED: prlimit is not installed; the full disk is not tried (it comes with util-linux).');
    return false;
  }
}

describe.skipIf(!hasPrlimit)('a full disk', () => {
  /** Files may not be written (or may again), as on a full disk: SQLite meets EFBIG where it would meet ENOSPC. */
  const room = (pid: number, bytes: '0' | 'unlimited'): void => {
    execFileSync('prlimit', ['--pid', String(pid), `--fsize=${bytes}:unlimited`]);
  };

  it.skipIf(!hasMosquitto)(
    'stops nothing: what comes waits in memory and is written when there is room again',
    async () => {
      const { url, folder, observer, publish } = await plant();
      writeSite(folder, {
        url,
        changes: [TIMED],
        store: 'file: juniper.db, flush: PT1S',
        cycle: 'PT5S',
        log: 'level: info',
      });
      const daemon = await startDaemon(folder);
      await ready(observer);
      const before = await publish(5);
      await until('the first write', () => look(folder, valuesIn).length === 5, PATIENCE_MS);

      room(daemon.pid, '0');
      const fullMs = Date.now();
      const during = await publish(30);
      await until('a word of it', () => daemon.err().includes('juniper.db'), PATIENCE_MS);
      await until(
        'an alert',
        () => alerts(observer).some((text) => text.includes('juniper.db')),
        PATIENCE_MS,
      );
      const records = (): number =>
        observer.seen.filter(({ topic }) => topic.endsWith('/dispatch/order')).length;
      const then = records();
      await until('another command', () => records() > then, PATIENCE_MS);
      expect(look(folder, valuesIn)).toEqual(before);

      room(daemon.pid, 'unlimited');
      await until('the waiting readings', () => look(folder, valuesIn).length === 35, PATIENCE_MS);
      expect(look(folder, valuesIn)).toEqual([...before, ...during]);
      expect(look(folder, (store) => store.recordsBetween(fullMs, Infinity).length)).toBeGreaterThan(0);
      await until('a word that it is over', () => daemon.err().includes('takes data again'), PATIENCE_MS);

      room(daemon.pid, '0');
      await publish(7);
      daemon.signal('SIGTERM');
      const { status, err } = await daemon.ended;
      expect(status).toBe(3);
      expectNoInsides(err);
      const last = err.trimEnd().split('\n').at(-1) ?? '';
      expectSentence(`${last}\n`);
      expect(last).toMatch(/\d+ readings and \d+ records .*juniper\.db.*free some space/);
      expect(look(folder, (store) => store.verify(), false)).toEqual([]);
      expect(look(folder, valuesIn)).toEqual([...before, ...during]);
    },
  );

  it('while a log comes in says so (3), and the same import later brings all of it once', async () => {
    const folder = ownFolder();
    writeSite(folder);
    look(folder, () => undefined, false);
    const lines = Array.from({ length: 20_000 }, (_, index) => {
      const at = new Date(Date.UTC(2026, 6, 14) + index * 1000).toISOString();
      return `${at},leaving-water,${4 + (index % 100) / 100}`;
    });
    writeFileSync(join(folder, 'july.csv'), `time,point,value\n${lines.join('\n')}\n`);
    const ended = await rimeholdAs({ mostFileBytes: 300_000 }, folder, 'import', 'july.csv');
    expectRefusal(ended, 3, 'juniper.db', 'july.csv', 'disk full', 'free some space');
    expect(look(folder, valuesIn).length).toBeLessThan(lines.length);

    expect(await rimehold(folder, 'import', 'july.csv')).toMatchObject({ status: 0, err: '' });
    expect(look(folder, valuesIn)).toHaveLength(lines.length);
  });

  it('while a copy is made leaves no half of one (3)', async () => {
    const folder = ownFolder();
    writeSite(folder);
    look(folder, () => undefined, false);
    const ended = await rimeholdAs({ mostFileBytes: 40_000 }, folder, 'backup', 'copy.db');
    expectRefusal(ended, 3, 'copy.db', 'disk full', 'free some space');
    expect(readdirSync(folder).filter((name) => name.startsWith('copy'))).toEqual([]);
  });
});

const alerts = ({ seen }: Observer): string[] =>
  seen.filter(({ topic }) => topic.includes('/$alert/')).map(({ text }) => text);

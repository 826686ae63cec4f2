/** The daemon's life on a real broker: told to stop, killed, and a second daemon beside it. */
import { createServer } from 'node:net';
import { describe, expect, it, onTestFinished } from 'vitest';
import { freePort, hasMosquitto } from '../mqtt/mosquitto.ts';
import { until } from '../mqtt/observer.ts';
import { look, PATIENCE_MS, plant, ready, STATE, stateOf, stored, TIMED, valuesIn } from './plant.ts';
import {
  expectNoInsides,
  expectRefusal,
  expectSentence,
  ownFolder,
  rimehold,
  start,
  startDaemon,
  writeSite,
} from './stranger.ts';

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
    await stored(folder, (count) => count >= 50);
    const more = publish(200);
    await stored(folder, (count) => count > 50);
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

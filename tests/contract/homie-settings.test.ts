/** What controllers may set, and how the device answers, as an observer on raw MQTT sees it (Homie 5.0.0). */
import { describe, expect } from 'vitest';
import { hasMosquitto } from '../mqtt/mosquitto.ts';
import { pause, until, type Seen } from '../mqtt/observer.ts';
import { ROOT, SETTINGS, test, untilReady } from '../mqtt/stage.ts';

describe.skipIf(!hasMosquitto).concurrent('settings on a real broker', () => {
  test('a valid /set: $target is what was sent, byte for byte, then the value (34); twice is the same (38)', async ({
    stage,
  }) => {
    const { url } = await stage.broker();
    const seen = await stage.observer(url);
    const { sets } = await stage.rig(url);
    await untilReady(seen);
    for (const times of [1, 2]) {
      const before = seen.seen.length;
      await seen.publish(`${ROOT}/dispatch/wish-for/set`, 'PT90M', { qos: 2 });
      await until('the value', () =>
        seen.seen.slice(before).some(({ topic }) => topic === `${ROOT}/dispatch/wish-for`),
      );
      const answers = seen.seen.slice(before).filter(({ topic }) => !topic.endsWith('/set'));
      expect(answers.map(({ topic, text }) => [topic.slice(ROOT.length + 1), text])).toEqual([
        ['dispatch/wish-for/$target', 'PT90M'],
        ['dispatch/wish-for', 'PT1H30M'],
      ]);
      expect(sets).toHaveLength(times);
      expect(sets.at(-1)).toEqual(['dispatch/wish-for', 5_400_000]);
    }
  });

  test.for([
    ['comfort/limit', '25.04', 25, '25'],
    ['plan/strategy', 'timetable', 'timetable', 'timetable'],
    ['dispatch/wish', 'cool-now', 'cool-now', 'cool-now'],
  ] as const)('%s takes %s', async ([path, payload, value, shown], { stage }) => {
    const { url } = await stage.broker();
    const seen = await stage.observer(url);
    const { sets } = await stage.rig(url);
    await untilReady(seen);
    await seen.publish(`${ROOT}/${path}/set`, payload, { qos: 2 });
    await until('the value', () => seen.latest(`${ROOT}/${path}`)?.text === shown);
    expect(seen.latest(`${ROOT}/${path}/$target`)?.text).toBe(payload);
    expect(sets).toEqual([[path, value]]);
  });

  test('an invalid or refused /set is told once on $log/warn and to the log; what stands is published again (36, 39)', async ({
    stage,
  }) => {
    const { url } = await stage.broker();
    const seen = await stage.observer(url);
    const made = await stage.rig(url);
    await untilReady(seen);
    const before = seen.seen.length;
    const bad = [
      ['comfort/limit', '99'],
      ['comfort/limit', 'warm'],
      ['plan/strategy', 'Planned'],
      ['dispatch/wish', ''],
      ['dispatch/wish-for', 'P1D'],
    ];
    for (const [path, payload] of bad) await seen.publish(`${ROOT}/${path}/set`, payload, { qos: 2 });
    made.refuse = 'not tonight';
    await seen.publish(`${ROOT}/dispatch/wish/set`, 'make-ice', { qos: 2 });
    const told = (): Seen[] => seen.seen.filter(({ topic }) => topic.includes('/$log/'));
    await until('six warnings', () => told().length === 6);
    // what stands is published again, unchanged, and nothing else
    const again = (): Seen[] => seen.seen.slice(before).filter(({ topic }) => !/\/set$|\$log/.test(topic));
    const isBack = (path: string): boolean => again().some(({ topic }) => topic === `${ROOT}/${path}`);
    await until('every value', () => bad.every(([path]) => isBack(path)));
    expect(told().map(({ topic, retain }) => [topic, retain])).toEqual(
      Array.from({ length: 6 }, () => [`${ROOT}/$log/warn`, false]),
    );
    expect(told().at(-1)?.text).toContain('dispatch/wish was not set: not tonight. It stays none;');
    expect(made.refused).toEqual(told().map(({ text }) => text));
    const kept = (topic: string): string | undefined =>
      seen.seen.slice(0, before).findLast((one) => one.topic === topic)?.text;
    for (const { topic, text } of again()) expect([topic, text]).toEqual([topic, kept(topic)]);
  });

  test.for(['5', '3.1.1'] as const)(
    'a retained /set that lies on the broker is ignored (37, MQTT %s)',
    async (protocol, { stage }) => {
      const { url } = await stage.broker();
      const seen = await stage.observer(url);
      await seen.publish(`${ROOT}/dispatch/wish/set`, 'stand-down', { retain: true });
      const { sets } = await stage.rig(url, { protocol });
      await untilReady(seen);
      await pause(100);
      expect(sets).toEqual([]);
      expect(seen.latest(`${ROOT}/dispatch/wish`)?.text).toBe('none');
    },
  );

  test('a setting that changes by itself is its own target again', async ({ stage }) => {
    const { url } = await stage.broker();
    const seen = await stage.observer(url);
    const { device } = await stage.rig(url);
    await untilReady(seen);
    await seen.publish(`${ROOT}/dispatch/wish/set`, 'cool-now', { qos: 2 });
    await until('set', () => seen.latest(`${ROOT}/dispatch/wish`)?.text === 'cool-now');
    device.publishSettings({ ...SETTINGS, wish: 'none' });
    await until('given back', () => seen.latest(`${ROOT}/dispatch/wish`)?.text === 'none');
    expect(seen.latest(`${ROOT}/dispatch/wish/$target`)?.text).toBe('none');
  });
});

/**
 * Homie 5.0.0 as an observer on raw MQTT sees it. Numbers in test names are those of the project's list of assertions
 * on the convention; what does not apply to a single root device without colours, booleans or non-retained
 * properties (14, the colour part of 16, 22, 32) is not here.
 */
import { spawn } from 'node:child_process';
import { describe, expect } from 'vitest';
import { hasMosquitto } from '../mqtt/mosquitto.ts';
import { pause, until, type Observer, type Seen } from '../mqtt/observer.ts';
import { cycleRecord, NOW_MS, pretendCleared } from '../mqtt/site.ts';
import { oneCycle, ROOT, stateOf, test, untilReady } from '../mqtt/stage.ts';

const SETTABLE = ['bank/told', 'plan/strategy', 'dispatch/wish', 'dispatch/wish-for', 'comfort/limit'];

/** Not known in the records of these tests: no humidity is heard and no night is closed yet. */
const UNKNOWN = [
  'bank/lasts-until',
  'comfort/feels-like',
  'night/cost',
  'night/saved',
  'health/balance-residual',
];

const indexOf = (seen: Observer, suffix: string): number =>
  seen.seen.findIndex(({ topic }) => topic === `${ROOT}/${suffix}`);

interface Described {
  readonly datatype: string;
  readonly format?: string;
  readonly settable?: boolean;
  readonly retained?: boolean;
}

function described(document: string): Map<string, Described> {
  const parsed = JSON.parse(document) as { nodes: Record<string, { properties: Record<string, Described> }> };
  return new Map(
    Object.entries(parsed.nodes).flatMap(([node, { properties }]) =>
      Object.entries(properties).map(([id, property]) => [`${node}/${id}`, property] as const),
    ),
  );
}

/** Payload rules of the convention, written down here a second time and from its text. */
function isLegal(property: Described, { text, bytes }: Seen): boolean {
  if (bytes.length === 0 || text.startsWith('\uFEFF')) return false;
  switch (property.datatype) {
    case 'integer':
      return /^-?\d+$/.test(text) && BigInt.asIntN(64, BigInt(text)) === BigInt(text);
    case 'float': {
      const [low, high] = (property.format ?? '').split(':').map((part) => (part ? Number(part) : null));
      const value = Number(text);
      return (
        /^[-0-9.eE]+$/.test(text) &&
        Number.isFinite(value) &&
        value >= (low ?? value) &&
        value <= (high ?? value)
      );
    }
    case 'enum':
      return (property.format ?? '').split(',').includes(text);
    case 'string':
      return !text.includes('\0') || text === '\0';
    case 'datetime':
      return /^\d{4}-\d{2}-\d{2}T\d{2}:\d{2}:\d{2}Z$/.test(text) && Number.isFinite(Date.parse(text));
    case 'duration':
      return /^PT(\d+H)?(\d+M)?(\d+S)?$/.test(text) && text !== 'PT';
    case 'json':
      return typeof JSON.parse(text) === 'object' && JSON.parse(text) !== null;
    default:
      return false;
  }
}

describe.skipIf(!hasMosquitto).concurrent('the Homie device on a real broker', () => {
  test.for(['5', '3.1.1'] as const)(
    'announces itself by the book: 1–3, 5–9, 12–21, 23–31, 33, 35 (MQTT %s)',
    async (protocol, { stage }) => {
      const { url } = await stage.broker();
      const seen = await stage.observer(url, '#');
      await stage.rig(url, { protocol });
      await untilReady(seen);

      for (const { topic } of seen.seen) {
        const [domain, five, ...levels] = topic.split('/');
        expect([domain, five]).toEqual(['homie', '5']);
        for (const level of levels) {
          expect(level).toMatch(/^([a-z0-9]([a-z0-9-]*[a-z0-9])?|\$(state|description|target|log|alert))$/);
        }
      }
      expect(seen.seen[0]).toMatchObject({ topic: `${ROOT}/$state`, text: 'init' });
      expect(indexOf(seen, '$description')).toBeGreaterThan(0);

      const document = seen.latest(`${ROOT}/$description`)?.text ?? '';
      const parsed = JSON.parse(document) as Record<string, unknown>;
      expect(parsed['homie']).toMatch(/^5\.\d+$/);
      expect(Number.isInteger(parsed['version'])).toBe(true);
      expect(document).not.toContain('null');
      expect(parsed).not.toHaveProperty('root');
      expect(parsed).not.toHaveProperty('parent');

      const properties = described(document);
      const ready = seen.seen.findIndex(({ text }) => text === 'ready');
      const values = new Map(
        seen.seen
          .slice(0, ready)
          .filter(({ topic }) => !topic.includes('$'))
          .map((one) => [one.topic.slice(ROOT.length + 1), one] as const),
      );
      for (const [path, property] of properties) {
        expect(property.retained).toBeUndefined();
        const value = values.get(path);
        // what is not known has no value; nothing else may be missing when the device is ready
        if (!UNKNOWN.includes(path)) expect(value, path).toBeDefined();
        if (value) expect([path, value.text, isLegal(property, value)]).toEqual([path, value.text, true]);
        if (property.datatype === 'enum') {
          const choices = property.format?.split(',') ?? [];
          expect(new Set(choices).size).toBe(choices.length);
          expect(choices.every((choice) => choice !== '')).toBe(true);
        }
        if (property.datatype === 'json') expect(() => JSON.parse(property.format ?? '')).not.toThrow();
      }
      expect([...values.keys()].filter((path) => !properties.has(path))).toEqual([]);
      expect(seen.seen.every(({ qos, retain }) => qos === 2 && retain)).toBe(true);
      expect(values.get('dispatch/held-back-by')?.bytes).toEqual(Buffer.from([0]));

      const targets = seen.seen.flatMap(({ topic }) => (topic.endsWith('/$target') ? [topic] : []));
      expect(targets.toSorted()).toEqual(SETTABLE.map((path) => `${ROOT}/${path}/$target`).toSorted());
      expect([...properties].flatMap(([path, { settable }]) => (settable ? [path] : []))).toEqual(SETTABLE);
    },
  );

  test('the whole of it is retained: a hub that comes later sees the same (4, 6, 18, 31)', async ({
    stage,
  }) => {
    const { url } = await stage.broker();
    const early = await stage.observer(url);
    await stage.rig(url);
    await untilReady(early);
    const late = await stage.observer(url);
    await until(
      'everything again',
      () => late.seen.length >= new Set(early.seen.map(({ topic }) => topic)).size,
    );
    expect(late.seen.every(({ retain, qos }) => retain && qos === 2)).toBe(true);
    expect(stateOf(late)).toBe('ready');
  });

  test('is not ready before the first cycle', async ({ stage }) => {
    const { url } = await stage.broker();
    const seen = await stage.observer(url);
    const { device } = await stage.rig(url, { cycle: false });
    await until('init', () => stateOf(seen) === 'init');
    await pause(500);
    expect(stateOf(seen)).toBe('init');
    oneCycle(device);
    await untilReady(seen);
  });

  test('values are published when they change, and the order in every cycle with its expiry', async ({
    stage,
  }) => {
    const { url } = await stage.broker();
    const seen = await stage.observer(url);
    const { device } = await stage.rig(url);
    await untilReady(seen);
    const before = seen.seen.length;
    device.publishOrder(pretendCleared({ expiresMs: NOW_MS + 120_000 }));
    device.publishCycle(cycleRecord({ iceOnHandKwh: 8.434, iceKg: 87 }), {
      pointsHeard: 4,
      warmTonightKh: 0,
    });
    await until('the changes', () => seen.latest(`${ROOT}/bank/ice-mass`)?.text === '87');
    const changed = seen.seen.slice(before);
    expect(changed.map(({ topic }) => topic.slice(ROOT.length + 1)).toSorted()).toEqual([
      'bank/ice-mass',
      'dispatch/command',
      'dispatch/expires',
      'dispatch/order',
    ]);
    const expiring = changed.filter(({ topic }) => topic.includes('/dispatch/'));
    expect(expiring.every(({ expiryS }) => expiryS !== null && expiryS > 110 && expiryS <= 120)).toBe(true);
    expect(changed.find(({ topic }) => topic.endsWith('ice-mass'))?.expiryS).toBeNull();
  });

  test('a value that is no longer known is cleared', async ({ stage }) => {
    const { url } = await stage.broker();
    const seen = await stage.observer(url);
    const { device } = await stage.rig(url);
    await untilReady(seen);
    device.publishCycle(cycleRecord({ nextChangeMs: null }), { pointsHeard: 4, warmTonightKh: 0 });
    await until('cleared', () => seen.latest(`${ROOT}/plan/next-change`)?.bytes.length === 0);
    const late = await stage.observer(url, `${ROOT}/plan/next-change`);
    await pause(150);
    expect(late.seen).toEqual([]);
  });

  test('subscribes to /set of the settable properties and to nothing else of its own (33)', async ({
    stage,
  }) => {
    const { url } = await stage.broker();
    const seen = await stage.observer(url);
    const { device, sets } = await stage.rig(url);
    await untilReady(seen);
    await seen.publish(`${ROOT}/bank/ice-on-hand/set`, '0', { qos: 2 });
    await seen.publish('homie/5/$broadcast/alert', 'intruder', { qos: 2 });
    await pause(150);
    expect(sets).toEqual([]);
    expect(seen.latest(`${ROOT}/bank/ice-on-hand`)?.text).toBe('8.43');
    expect(
      device.hear({ topic: 'homie/5/$broadcast/alert', payload: Buffer.from('x'), retained: false }),
    ).toBe(false);
    expect(stateOf(seen)).toBe('ready');
  });

  test('alerts stand until they are resolved, and an earlier life leaves none behind (40)', async ({
    stage,
  }) => {
    const { url } = await stage.broker();
    const seen = await stage.observer(url);
    await seen.publish(`${ROOT}/$alert/old`, 'The tray is wet.', { retain: true });
    const { device } = await stage.rig(url);
    await untilReady(seen);
    expect(seen.latest(`${ROOT}/$alert/old`)?.bytes).toHaveLength(0);
    device.alert('dry-pump', 'The pump has run dry.');
    device.alert('dry-pump', 'The pump has run dry.');
    await until('the alert', () => seen.latest(`${ROOT}/$alert/dry-pump`)?.text === 'The pump has run dry.');
    expect(seen.latest(`${ROOT}/$alert/dry-pump`)).toMatchObject({ retain: true, qos: 2 });
    device.alert('dry-pump', null);
    await until('resolved', () => seen.latest(`${ROOT}/$alert/dry-pump`)?.bytes.length === 0);
    expect(seen.seen.filter(({ topic }) => topic === `${ROOT}/$alert/dry-pump`)).toHaveLength(2);
    expect(() => device.alert('Dry pump', 'x')).toThrow(TypeError);
  });

  test('an alert that is resolved while the broker is out of reach is gone when it is back (40)', async ({
    stage,
  }) => {
    const { url, port } = await stage.broker();
    const seen = await stage.observer(url);
    const wire = await stage.cuttable(port);
    const { device, client } = await stage.rig(wire.url);
    await untilReady(seen);
    device.alert('dry-pump', 'The pump has run dry.');
    await until('the alert', () => seen.latest(`${ROOT}/$alert/dry-pump`)?.text !== undefined);
    wire.cut();
    await until('away', () => !client.connected);
    device.alert('dry-pump', null);
    await until('resolved', () => seen.latest(`${ROOT}/$alert/dry-pump`)?.bytes.length === 0);
    await untilReady(seen);
  });

  test('log levels below the least are not told (39)', async ({ stage }) => {
    const { url } = await stage.broker();
    const seen = await stage.observer(url);
    const { device } = await stage.rig(url);
    await untilReady(seen);
    device.log('info', 'quiet');
    device.log('error', 'loud');
    await until('the error', () => seen.latest(`${ROOT}/$log/error`) !== undefined);
    expect(seen.latest(`${ROOT}/$log/info`)).toBeUndefined();
    expect(seen.latest(`${ROOT}/$log/error`)).toMatchObject({ text: 'loud', retain: false });
  });

  test('what an earlier life left is cleared before ready, foreign topics are not (19, 44)', async ({
    stage,
  }) => {
    const { url } = await stage.broker();
    const seen = await stage.observer(url, 'homie/5/#');
    await seen.publish(`${ROOT}/bank/colour`, 'blue', { retain: true });
    await seen.publish(`${ROOT}/old-node/thing`, '3', { retain: true });
    await seen.publish(`${ROOT}/bank/lasts-until`, '2020-01-01T00:00:00Z', { retain: true });
    await seen.publish('homie/5/juniper-2/bank/colour', 'blue', { retain: true });
    await stage.rig(url);
    await until('ready', () => stateOf(seen) === 'ready');
    for (const path of ['bank/colour', 'old-node/thing', 'bank/lasts-until']) {
      expect(seen.latest(`${ROOT}/${path}`)?.bytes).toHaveLength(0);
    }
    const ready = seen.seen.findIndex(({ text }) => text === 'ready');
    expect(seen.seen.findLastIndex(({ topic }) => topic.endsWith('old-node/thing'))).toBeLessThan(ready);
    expect(seen.latest('homie/5/juniper-2/bank/colour')?.text).toBe('blue');
  });

  test('a clean stop ends with disconnected (41), and the will stays away', async ({ stage }) => {
    const { url } = await stage.broker();
    const seen = await stage.observer(url);
    const { device, client } = await stage.rig(url);
    await untilReady(seen);
    await device.stop();
    await client.stop();
    await pause(1300);
    expect(stateOf(seen)).toBe('disconnected');
  });

  test('a broker that restarted gets the whole announcement again (11, 43)', async ({ stage }) => {
    const mosquitto = await stage.broker();
    const seen = await stage.observer(mosquitto.url);
    const { device } = await stage.rig(mosquitto.url);
    await untilReady(seen);
    await mosquitto.halt();
    await pause(100);
    device.publishCycle(cycleRecord({ iceKg: 90 }), { pointsHeard: 4, warmTonightKh: 0 });
    await mosquitto.resume();
    const again = await stage.observer(mosquitto.url);
    await untilReady(again);
    expect(again.latest(`${ROOT}/bank/ice-mass`)?.text).toBe('90');
    expect(described(again.latest(`${ROOT}/$description`)?.text ?? '').size).toBeGreaterThan(25);
    const states = seen.seen.filter(({ topic }) => topic === `${ROOT}/$state`).map(({ text }) => text);
    expect(states.slice(0, 2)).toEqual(['init', 'ready']);
    for (const [index, { topic }] of seen.seen.entries()) {
      if (!topic.endsWith('$description')) continue;
      const before = seen.seen.slice(0, index).findLast((one) => one.topic === `${ROOT}/$state`)?.text;
      expect(['init', 'disconnected', 'lost']).toContain(before);
    }
  });

  test('removal clears $state first and leaves nothing (45, 48)', async ({ stage }) => {
    const { url } = await stage.broker();
    const seen = await stage.observer(url);
    const { device, client } = await stage.rig(url);
    await untilReady(seen);
    device.alert('dry-pump', 'The pump has run dry.');
    const before = seen.seen.length;
    await device.remove();
    await client.stop();
    expect(seen.seen[before].topic).toBe(`${ROOT}/$alert/dry-pump`);
    expect(seen.seen[before + 1]).toMatchObject({ topic: `${ROOT}/$state`, text: '' });
    const late = await stage.observer(url, 'homie/#');
    await pause(200);
    expect(late.seen).toEqual([]);
  });

  test('a killed daemon is lost (3, 42)', { timeout: 60_000 }, async ({ stage }) => {
    const { url } = await stage.broker();
    const seen = await stage.observer(url);
    const child = spawn(
      process.execPath,
      ['--import', 'tsx', new URL('doomed-device.ts', import.meta.url).pathname, url],
      {
        stdio: 'inherit',
      },
    );
    stage.onEnd(() => void child.kill('SIGKILL'));
    await until('ready', () => stateOf(seen) === 'ready', 40_000);
    child.kill('SIGKILL');
    await until('lost', () => stateOf(seen) === 'lost');
    expect(seen.latest(`${ROOT}/$state`)).toMatchObject({ retain: true });
  });
});

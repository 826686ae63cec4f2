import { describe, expect, test } from 'vitest';
import { Actuators } from '../../src/mqtt/actuators.ts';
import type { LivePoints } from '../../src/points.ts';
import { NOW_MS, pretendCleared, siteConfig } from './site.ts';

const MINUTE = 60_000;

function actuators(chiller: string): Actuators {
  return new Actuators(siteConfig(`actuators: {chiller: ${chiller}}`));
}

const order = (chiller: boolean, issuedMs = NOW_MS) =>
  pretendCleared({
    switches: { chiller, pump: false, fan: false },
    issuedMs,
    expiresMs: issuedMs + 90_000,
  });

const say = (payload: string, topic = 'plug7/state') => ({
  topic,
  payload: Buffer.from(payload),
  retained: false,
});

const drawing = (value: number): LivePoints => ({ 'chiller-power': { value, atMs: NOW_MS } });

describe('switching', () => {
  test('the words of the site file, at QoS 1, not retained, until the order expires', () => {
    const made = actuators('{topic: plug7/set, on: "1", off: "0"}');
    expect(made.order(order(true), NOW_MS)).toEqual([
      { topic: 'plug7/set', payload: '1', qos: 1, retain: false, expiresInS: 90 },
    ]);
    expect(made.order(order(false), NOW_MS + 60_000)).toMatchObject([{ payload: '0' }]);
  });

  test('an order is repeated in every cycle', () => {
    const made = actuators('{topic: plug7/set}');
    const sent = [0, 1, 2].map((cycle) =>
      made.order(order(true, NOW_MS + cycle * 30_000), NOW_MS + cycle * 30_000),
    );
    expect(sent.map(([one]) => one.payload)).toEqual(['ON', 'ON', 'ON']);
    expect(made.status()).toMatchObject([{ machine: 'chiller', ordered: true, sinceMs: NOW_MS }]);
  });

  test('only machines of the site file are switched', () => {
    expect(new Actuators(siteConfig()).order(order(true), NOW_MS)).toEqual([]);
    const all = new Actuators(
      siteConfig('actuators: {chiller: {topic: c}, pump: {topic: p}, fan: {topic: f}}'),
    );
    const switches = { chiller: false, pump: true, fan: true };
    expect(
      all.order(pretendCleared({ switches }), NOW_MS).map(({ topic, payload }) => [topic, payload]),
    ).toEqual([
      ['c', 'OFF'],
      ['p', 'ON'],
      ['f', 'ON'],
    ]);
  });

  test('nothing but a cleared command is taken, by type', () => {
    const made = actuators('{topic: plug7/set}');
    const plain = {
      command: 'charge-now',
      reason: '',
      issuedMs: 0,
      expiresMs: 0,
      heldBackBy: '',
      switches: { chiller: true, pump: false, fan: false },
      numbers: {},
    } as const;
    // @ts-expect-error a plain object is no cleared command: the brand cannot be written outside the interlocks
    made.order(plain, NOW_MS);
  });
});

describe('readback', () => {
  const plain = '{topic: plug7/set, readback: {topic: plug7/state}}';

  test('disobedience is a fault after the time to confirm, in one sentence', () => {
    const made = actuators(plain);
    expect(made.topics()).toEqual(['plug7/state']);
    made.order(order(true), NOW_MS);
    expect(made.hear(say('OFF'))).toBe(true);
    expect(made.faults({}, NOW_MS + 2 * MINUTE - 1)).toEqual([]);
    expect(made.faults({}, NOW_MS + 2 * MINUTE)).toEqual([
      {
        machine: 'chiller',
        id: 'actuator-chiller',
        sentence: 'The ice machine was told to be on 2 min ago but says that it is off; look at plug7/set.',
      },
    ]);
    made.hear(say('ON'));
    expect(made.faults({}, NOW_MS + 3 * MINUTE)).toEqual([]);
  });

  test('the time to confirm begins with the change, not with its repetition', () => {
    const made = actuators(plain);
    made.hear(say('OFF'));
    made.order(order(true), NOW_MS);
    made.order(order(true), NOW_MS + MINUTE);
    expect(made.faults({}, NOW_MS + 2 * MINUTE)).toHaveLength(1);
    made.order(order(false), NOW_MS + 2 * MINUTE);
    expect(made.faults({}, NOW_MS + 2 * MINUTE)).toEqual([]);
  });

  test.each([
    ['{topic: s, readback: {topic: plug7/state, read: /output}}', '{"output":true}', true],
    ['{topic: s, readback: {topic: plug7/state, read: /output}}', '{"output":false}', false],
    ['{topic: s, on: "1", off: "0", readback: {topic: plug7/state, read: /r}}', '{"r":1}', true],
    ['{topic: s, readback: {topic: plug7/state, on: running}}', 'running', true],
    ['{topic: s, readback: {topic: plug7/state, on: running}}', 'defrosting', false],
    ['{topic: s, readback: {topic: plug7/state}}', ' ON\n', true],
    ['{topic: s, readback: {topic: plug7/state}}', 'unavailable', null],
    ['{topic: s, readback: {topic: plug7/state}}', '', null],
    ['{topic: s, readback: {topic: plug7/state, read: /r}}', 'no json', null],
    ['{topic: s, readback: {topic: plug7/state, read: /r}}', '{"r":{}}', null],
  ])('%s hears %s as %s', (config, payload, says) => {
    const made = actuators(config);
    made.hear(say(payload));
    expect(made.status()[0].says).toBe(says);
  });

  test('what tells nothing leaves what was known', () => {
    const made = actuators(plain);
    made.hear(say('ON'));
    made.hear(say('unavailable'));
    expect(made.status()[0].says).toBe(true);
    expect(made.hear(say('ON', 'plug8/state'))).toBe(false);
  });
});

describe('confirmation by power', () => {
  const byPower = '{topic: plug7/set, confirm-by: chiller-power, confirm-within: PT3M}';
  const stale: LivePoints = { 'chiller-power': { value: null, reason: 'stale', last: null } };

  test.each([
    [true, drawing(550), 0],
    [true, drawing(2), 1],
    [false, drawing(2), 0],
    [false, drawing(550), 1],
    [true, stale, 0],
    [true, {}, 0],
  ])('ordered %s with %j: %i faults', (on, live, count) => {
    const made = actuators(byPower);
    made.order(order(on), NOW_MS);
    expect(made.faults(live, NOW_MS + 2 * MINUTE)).toEqual([]);
    expect(made.faults(live, NOW_MS + 3 * MINUTE)).toHaveLength(count);
  });

  test('says what it draws', () => {
    const made = actuators(byPower);
    made.order(order(false), NOW_MS);
    expect(made.faults(drawing(551.6), NOW_MS + 10 * MINUTE)[0].sentence).toBe(
      'The ice machine was told to be off 10 min ago but draws 552 W; look at plug7/set and at the machine.',
    );
  });

  test('a relay that obeys does not excuse a machine that does not', () => {
    const made = actuators(
      '{topic: s, readback: {topic: plug7/state}, confirm-by: chiller-power, confirm-within: PT3M}',
    );
    made.order(order(true), NOW_MS);
    made.hear(say('ON'));
    expect(made.faults(drawing(2), NOW_MS + 3 * MINUTE)).toHaveLength(1);
  });
});

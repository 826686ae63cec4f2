import * as fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { Intake, pointFaults, type Heard } from '../../src/mqtt/intake.ts';
import type { PointConfig } from '../../src/config.ts';
import { pointConfig } from './points.ts';

const T0 = Date.UTC(2026, 6, 14, 18, 0);
const S = 1000;

const plain = pointConfig({ topic: 'shed/out' });
const dated = pointConfig({ topic: 'shed/out', read: '/v', timePointer: '/t' });

function intake(points: Record<string, PointConfig>): Intake {
  return new Intake(points);
}

function hear(into: Intake, payload: string, atMs: number, retained = false, topic = 'shed/out'): Heard {
  return into.hear({ topic, payload: Buffer.from(payload), retained }, atMs);
}

const at = (seconds: number, value: number): string =>
  JSON.stringify({ v: value, t: new Date(T0 + seconds * S).toISOString() });

describe('order of readings', () => {
  test('a reading heard twice is dropped once', () => {
    const into = intake({ 'leaving-water': dated });
    expect(hear(into, at(0, 4), T0).readings).toHaveLength(1);
    expect(hear(into, at(0, 4), T0 + S).readings).toHaveLength(0);
    expect(into.status()[0]).toMatchObject({ heard: 1, dropped: { duplicate: 1 } });
  });

  test('the same time with another value is a correction', () => {
    const into = intake({ 'leaving-water': dated });
    hear(into, at(0, 4), T0);
    expect(hear(into, at(0, 5), T0 + S).readings).toEqual([{ point: 'leaving-water', atMs: T0, value: 5 }]);
    expect(into.live(T0 + S)['leaving-water']).toEqual({ value: 5, atMs: T0 });
  });

  test('a late reading keeps its own time and does not move the latest value back', () => {
    const into = intake({ 'leaving-water': dated });
    hear(into, at(60, 6), T0 + 60 * S);
    expect(hear(into, at(0, 4), T0 + 61 * S).readings).toEqual([
      { point: 'leaving-water', atMs: T0, value: 4 },
    ]);
    expect(into.live(T0 + 61 * S)['leaving-water']).toEqual({ value: 6, atMs: T0 + 60 * S });
    expect(into.status()[0]).toMatchObject({ heard: 2, late: 1 });
  });

  test('any order of the same batch ends in the same readings and the same latest value', () => {
    const batch = Array.from({ length: 12 }, (_, index) => ({ second: index * 10, value: index }));
    fc.assert(
      fc.property(fc.shuffledSubarray(batch, { minLength: 12 }), fc.array(fc.nat(11)), (order, repeats) => {
        const into = intake({ 'leaving-water': dated });
        const sent = [...order, ...repeats.map((index) => batch[index])];
        const readings = sent.flatMap((one) => hear(into, at(one.second, one.value), T0 + 200 * S).readings);
        expect(readings.toSorted((a, b) => a.atMs - b.atMs)).toEqual(
          batch.map((one) => ({ point: 'leaving-water', atMs: T0 + one.second * S, value: one.value })),
        );
        expect(into.live(T0 + 200 * S)['leaving-water']).toEqual({ value: 11, atMs: T0 + 110 * S });
      }),
      { numRuns: 100 },
    );
  });
});

describe('age', () => {
  test('fresh up to max-age, stale after it, the last reading still shown', () => {
    const into = intake({ 'leaving-water': { ...plain, maxAgeMs: 60 * S } });
    hear(into, '4', T0);
    expect(into.live(T0 + 60 * S)['leaving-water']).toEqual({ value: 4, atMs: T0 });
    expect(into.live(T0 + 60 * S + 1)['leaving-water']).toEqual({
      value: null,
      reason: 'stale',
      last: { point: 'leaving-water', atMs: T0, value: 4 },
    });
  });

  test('never heard', () => {
    const into = intake({ 'leaving-water': plain });
    expect(into.live(T0)['leaving-water']).toEqual({ value: null, reason: 'never-heard', last: null });
  });

  test("the sender's own promise shortens the age, never lengthens it", () => {
    const config = pointConfig({ topic: 'shed/out', read: 'senml:a', maxAgeMs: 60 * S });
    const into = intake({ 'leaving-water': config });
    hear(into, '[{"n":"a","v":4,"ut":20}]', T0);
    expect(into.live(T0 + 21 * S)['leaving-water']).toMatchObject({ value: null, reason: 'stale' });
    hear(into, '[{"n":"a","v":4,"ut":900}]', T0);
    expect(into.live(T0 + 61 * S)['leaving-water']).toMatchObject({ value: null, reason: 'stale' });
  });

  test('retained with its own time: placed there, stale by its age', () => {
    const into = intake({ 'leaving-water': dated });
    expect(hear(into, at(-3600, 4), T0, true).readings).toHaveLength(1);
    expect(into.live(T0)['leaving-water']).toMatchObject({
      value: null,
      reason: 'stale',
      last: { value: 4 },
    });
    expect(hear(into, at(-60, 5), T0, true).readings).toHaveLength(1);
    expect(into.live(T0)['leaving-water']).toMatchObject({ value: 5 });
  });

  test('retained without a time of its own: shown, but no reading and not fresh', () => {
    const into = intake({ 'leaving-water': plain });
    expect(hear(into, '4', T0, true).readings).toEqual([]);
    expect(into.live(T0)['leaving-water']).toEqual({ value: null, reason: 'stale', last: null });
    expect(into.status()[0]).toMatchObject({
      heard: 0,
      undated: { value: 4, heardMs: T0 },
      dropped: { 'retained-undated': 1 },
    });
    hear(into, '4', T0 + S);
    expect(into.live(T0 + S)['leaving-water']).toEqual({ value: 4, atMs: T0 + S });
    expect(into.status()[0].undated).toBeNull();
  });

  test('retained SenML with a relative time is of unknown age too', () => {
    const into = intake({ 'leaving-water': pointConfig({ topic: 'shed/out', read: 'senml:a' }) });
    expect(hear(into, '[{"n":"a","t":-5,"v":4}]', T0, true).readings).toEqual([]);
  });

  test('an emptied retained topic says nothing', () => {
    const into = intake({ 'leaving-water': plain });
    expect(hear(into, '', T0, true)).toEqual({ readings: [], says: [] });
  });
});

describe('clocks', () => {
  test('a reading from the future counts as of arrival and raises doubt', () => {
    const into = intake({ 'leaving-water': dated });
    expect(into.ahead(T0)).toBeNull();
    expect(hear(into, at(61, 4), T0).readings).toEqual([{ point: 'leaving-water', atMs: T0, value: 4 }]);
    expect(into.ahead(T0)).toEqual({ medianMs: 61 * S, points: ['leaving-water'] });
    hear(into, at(2, 4.1), T0 + 2 * S);
    expect(into.ahead(T0 + 2 * S)).toBeNull();
  });

  test('one sensor with a wrong clock among several raises no doubt, and a silent one is forgotten', () => {
    const own = (topic: string) => pointConfig({ topic, read: '/v', timePointer: '/t' });
    const into = intake({ 'leaving-water': own('a'), 'entering-water': own('b'), 'bank-bottom': own('c') });
    const say = (topic: string, aheadS: number): Heard =>
      hear(into, JSON.stringify({ v: 4, t: new Date(T0 + aheadS * S).toISOString() }), T0, false, topic);
    say('a', 1e9);
    expect(into.ahead(T0)?.points).toEqual(['leaving-water']);
    say('b', 0);
    say('c', 0);
    expect(into.ahead(T0)).toBeNull();
    const alone = intake({ 'leaving-water': own('a') });
    hear(alone, JSON.stringify({ v: 4, t: new Date(T0 + 1e9).toISOString() }), T0, false, 'a');
    expect(alone.ahead(T0 + 3_600 * S)).toBeNull();
  });

  test('a minute ahead is still taken at its word', () => {
    const into = intake({ 'leaving-water': dated });
    expect(hear(into, at(60, 4), T0).readings).toMatchObject([{ atMs: T0 + 60 * S }]);
  });

  test('a clock that is set back does not block what comes next', () => {
    const into = intake({ 'leaving-water': plain });
    hear(into, '4', T0);
    const back = T0 - 3600 * S;
    expect(into.live(back)['leaving-water']).toMatchObject({ value: null, reason: 'stale' });
    hear(into, '5', back);
    expect(into.live(back)['leaving-water']).toEqual({ value: 5, atMs: back });
  });
});

describe('what is not used', () => {
  test('one-wire glitches are dropped by name, with a count', () => {
    const into = intake({ 'leaving-water': plain });
    for (const [index, payload] of ['85', '4', '-127', '85.0'].entries()) hear(into, payload, T0 + index * S);
    expect(into.status()[0]).toMatchObject({
      heard: 1,
      dropped: { 'one-wire-power-on-85': 2, 'one-wire-cut': 1 },
    });
    expect(into.live(T0 + 4 * S)['leaving-water']).toMatchObject({ value: 4 });
  });

  test('an implausible value is set aside and shown', () => {
    const into = intake({ 'leaving-water': plain });
    hear(into, '4', T0);
    expect(hear(into, '60', T0 + S).readings).toEqual([]);
    expect(into.status()[0]).toMatchObject({
      dropped: { implausible: 1 },
      quarantined: { value: 60, atMs: T0 + S },
      last: { value: 4 },
    });
  });

  test('bad payloads are counted each time and said at a limited rate', () => {
    const into = intake({ 'leaving-water': plain });
    const says = Array.from({ length: 700 }, (_, second) => hear(into, 'x', T0 + second * S).says).flat();
    expect(says).toEqual([
      'Topic shed/out, point leaving-water: expected a number, found "x"; dropped.',
      'Topic shed/out, point leaving-water: expected a number, found "x"; dropped (599 more since it was last said).',
    ]);
    expect(into.status()[0]).toMatchObject({ dropped: { 'bad-payload': 700 }, heard: 0 });
  });
});

describe('topics', () => {
  test('several points share a topic', () => {
    const into = intake({
      'room-temperature': pointConfig({ topic: 'home/room', read: '/t' }),
      'room-humidity': pointConfig({ topic: 'home/room', read: '/h' }),
      'room-temperature/loft': pointConfig({ topic: 'home/loft' }),
    });
    expect(into.topics()).toEqual(['home/room', 'home/loft']);
    expect(hear(into, '{"t":24,"h":45}', T0, false, 'home/room').readings).toEqual([
      { point: 'room-temperature', atMs: T0, value: 24 },
      { point: 'room-humidity', atMs: T0, value: 45 },
    ]);
    expect(hear(into, '25', T0, false, 'home/other').readings).toEqual([]);
  });

  test('one bad value of a shared topic does not take the other with it', () => {
    const into = intake({
      'room-temperature': pointConfig({ topic: 'home/room', read: '/t' }),
      'room-humidity': pointConfig({ topic: 'home/room', read: '/h' }),
    });
    const heard = hear(into, '{"t":24}', T0, false, 'home/room');
    expect(heard.readings).toEqual([{ point: 'room-temperature', atMs: T0, value: 24 }]);
    expect(heard.says).toHaveLength(1);
  });

  test('series are kept whole, retained or not, and stay out of the live points', () => {
    const into = intake({
      'outdoor-forecast': pointConfig({ topic: 'hub/weather', read: '/hourly' }),
      prices: pointConfig({ topic: 'hub/prices' }),
    });
    const hourly = [{ time: '2026-07-14T20:00:00Z', temperature: 24 }];
    hear(into, JSON.stringify({ hourly }), T0, true, 'hub/weather');
    hear(into, '{"intervals":[]}', T0 + S, true, 'hub/prices');
    expect(into.forecast()).toEqual({
      heardMs: T0,
      value: [{ atMs: Date.UTC(2026, 6, 14, 20), temperatureC: 24 }],
    });
    expect(into.prices()).toEqual({ heardMs: T0 + S, value: { intervals: [] } });
    expect(into.live(T0 + S)).toEqual({});
    expect(into.status().map((status) => status.heard)).toEqual([1, 1]);
  });
});

describe('points that cannot be read as written', () => {
  test.each([
    ['leaving-water', { unit: 'L' }, /points.leaving-water.unit: expected one of degC, .*found "L"/],
    ['drip-tray-wet', { unit: 'degC' }, /expected no unit, found "degC"/],
    ['leaving-water', { timePointer: '/t' }, /points.leaving-water.time: expected `read`/],
    ['prices', { read: 'senml:x' }, /points.prices.read/],
  ] as const)('%s with %j', (id, config, sentence) => {
    const points = { [id]: pointConfig(config) };
    expect(pointFaults(points)).toEqual([expect.stringMatching(sentence)]);
    expect(() => new Intake(points)).toThrow(sentence);
  });

  test.each([
    ['leaving-water', { unit: '°F' }],
    ['outdoor-forecast', { unit: 'degF' }],
    ['prices', { unit: 'money/kWh' }],
  ] as const)('%s with %j is fine', (id, config) => {
    expect(pointFaults({ [id]: pointConfig(config) })).toEqual([]);
  });
});

import * as fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { decode, openPayload, type Decoded, type KnownPoint } from '../../src/mqtt/payload.ts';
import { POINTS, type PointId } from '../../src/points.ts';
import { knownPoint } from './points.ts';

const ARRIVAL_MS = Date.UTC(2026, 6, 14, 18, 30);

function heard(payload: string | Uint8Array, point: KnownPoint): Decoded {
  const bytes = typeof payload === 'string' ? Buffer.from(payload) : payload;
  return decode(openPayload(bytes), point, ARRIVAL_MS);
}

function values(payload: string, point: KnownPoint): number[] {
  const decoded = heard(payload, point);
  if (decoded.kind !== 'readings') throw new Error(JSON.stringify(decoded));
  return decoded.readings.map((reading) => reading.value);
}

describe('plain payloads', () => {
  const leaving = knownPoint('leaving-water');

  test.each([
    ['4.5', 4.5],
    [' -0.25\n', -0.25],
    ['+3', 3],
    ['.5', 0.5],
    ['1e1', 10],
  ])('%j is a number', (payload, value) => {
    expect(values(payload, leaving)).toEqual([value]);
  });

  test.each(['', 'nan', 'Infinity', '1e999', '4,5', '0x10', '4.5 degC', 'unavailable', 'true', '{"a":1}'])(
    '%j is refused in one sentence',
    (payload) => {
      const decoded = heard(payload, leaving);
      expect(decoded).toMatchObject({ kind: 'fault' });
      expect(decoded.kind === 'fault' && decoded.fault).toMatch(/^expected a number, found /);
    },
  );

  test('bytes that are no UTF-8 are refused', () => {
    expect(heard(Uint8Array.of(0xff, 0xfe), leaving)).toEqual({
      kind: 'fault',
      fault: 'expected text, found bytes that are not UTF-8',
    });
  });

  test('arrival is the time, and is not the own time', () => {
    expect(heard('4.5', leaving)).toMatchObject({ readings: [{ atMs: ARRIVAL_MS, ownTime: false }] });
  });

  test.each([
    ['degF', '50', 10],
    ['K', '273.15', 0],
    ['Cel', '7', 7],
  ])('converts %s', (unit, payload, value) => {
    expect(values(payload, knownPoint('leaving-water', { unit }))[0]).toBeCloseTo(value, 9);
  });

  test('adds the offset of a thermometer, after conversion', () => {
    expect(values('32', knownPoint('leaving-water', { unit: 'degF', offsetK: 0.3 }))[0]).toBeCloseTo(0.3, 9);
  });

  test.each([
    ['85', {}, 'one-wire-power-on-85'],
    ['-127', {}, 'one-wire-cut'],
    ['185', { unit: 'degF' }, 'one-wire-power-on-85'],
    ['85', { offsetK: 0.2 }, 'one-wire-power-on-85'],
    ['46', {}, 'implausible'],
    ['45', {}, null],
    ['44.9', { offsetK: 0.2 }, 'implausible'],
  ] as const)('%s with %j is judged %s', (payload, config, unusable) => {
    expect(heard(payload, knownPoint('leaving-water', config))).toMatchObject({ readings: [{ unusable }] });
  });
});

describe('truth values', () => {
  test.each([
    ['true', {}, 1],
    ['false', {}, 0],
    ['wet', { trueText: 'wet', falseText: 'dry' }, 1],
    ['false', { trueText: 'false', falseText: 'true' }, 1],
    ['{"s":true}', { read: '/s' }, 1],
    ['{"s":true}', { read: '/s', trueText: 'false', falseText: 'true' }, 0],
    ['{"s":false}', { read: '/s', trueText: 'on', falseText: 'off' }, 0],
    ['{"s":"on"}', { read: '/s', trueText: 'on', falseText: 'off' }, 1],
    ['{"s":1}', { read: '/s', trueText: '1', falseText: '0' }, 1],
    ['[{"n":"tray","vb":true}]', { read: 'senml:tray' }, 1],
  ])('%s with %j is %i', (payload, config, value) => {
    expect(values(payload, knownPoint('drip-tray-wet', config))).toEqual([value]);
  });

  test('anything else is refused, naming both texts', () => {
    expect(heard('TRUE', knownPoint('drip-tray-wet'))).toEqual({
      kind: 'fault',
      fault: 'expected "true" or "false", found "TRUE"',
    });
  });
});

describe('JSON payloads', () => {
  test('number by pointer, number as text by pointer', () => {
    expect(values('{"a":[{"t":4.5}]}', knownPoint('leaving-water', { read: '/a/0/t' }))).toEqual([4.5]);
    expect(values('{"t":"4.5"}', knownPoint('leaving-water', { read: '/t' }))).toEqual([4.5]);
  });

  test.each([
    ['{"t":null}', 'expected a number, found null'],
    ['{"u":1}', 'expected a value at /t, found none'],
    ['{"t":', 'expected JSON, found "{\\"t\\":"'],
    ['{"t":[1]}', 'expected a number, found [1]'],
  ])('%s: %s', (payload, fault) => {
    expect(heard(payload, knownPoint('leaving-water', { read: '/t' }))).toEqual({ kind: 'fault', fault });
  });

  test.each([
    ['"2026-07-14T18:29:30Z"', Date.UTC(2026, 6, 14, 18, 29, 30)],
    ['"2026-07-14T20:29:30.250+02:00"', Date.UTC(2026, 6, 14, 18, 29, 30, 250)],
    ['1784053770', 1_784_053_770_000],
    ['1784053770.5', 1_784_053_770_500],
    ['1784053770500', 1_784_053_770_500],
    ['"1784053770"', 1_784_053_770_000],
  ])('own time %s', (time, atMs) => {
    const point = knownPoint('leaving-water', { read: '/v', timePointer: '/time' });
    expect(heard(`{"v":1,"time":${time}}`, point)).toMatchObject({ readings: [{ atMs, ownTime: true }] });
  });

  test.each([
    ['1970', '120'],
    ['2000', '"2000-01-01T00:00:00Z"'],
    ['the year 201', '"0201-07-14T18:29:30Z"'],
  ])('a sensor whose clock counts from %s has no time of its own', (_, time) => {
    const point = knownPoint('leaving-water', { read: '/v', timePointer: '/time' });
    expect(heard(`{"v":1,"time":${time}}`, point)).toMatchObject({
      readings: [{ atMs: ARRIVAL_MS, ownTime: false }],
    });
  });

  test.each(['"yesterday"', 'null', '1e300', '"2026-13-01T00:00:00Z"'])('no time: %s', (time) => {
    const point = knownPoint('leaving-water', { read: '/v', timePointer: '/time' });
    expect(heard(`{"v":1,"time":${time}}`, point)).toMatchObject({ kind: 'fault' });
  });
});

describe('SenML payloads', () => {
  test('all records of the name, each at its own time, and the promised update', () => {
    const pack = [
      { bn: 'shed/', bt: ARRIVAL_MS / 1000, n: 'out', u: 'Cel', t: -60, v: 4.5, ut: 90 },
      { n: 'in', u: 'Cel', v: 11 },
      { n: 'out', u: 'K', v: 278.15 },
    ];
    const decoded = heard(JSON.stringify(pack), knownPoint('leaving-water', { read: 'senml:shed/out' }));
    expect(decoded).toMatchObject({
      readings: [
        { value: 4.5, atMs: ARRIVAL_MS - 60_000, ownTime: true },
        { value: 5, atMs: ARRIVAL_MS, ownTime: true },
      ],
      updateMs: 90_000,
    });
  });

  test('a relative time counts from arrival and is not the own time', () => {
    const decoded = heard('[{"n":"a","t":-10,"v":4}]', knownPoint('leaving-water', { read: 'senml:a' }));
    expect(decoded).toMatchObject({ readings: [{ value: 4, atMs: ARRIVAL_MS - 10_000, ownTime: false }] });
  });

  test.each([-900_000_000, -57_000_000_000])('a relative time of %d s is no time', (t) => {
    const decoded = heard(`[{"n":"a","t":${t},"v":4}]`, knownPoint('leaving-water', { read: 'senml:a' }));
    expect(decoded).toMatchObject({ kind: 'fault' });
  });

  test.each([
    ['chiller-power', 'kW', 0.55, 550],
    ['loop-flow', 'l/s', 0.2, 12],
    ['loop-flow', 'm3/s', 0.0002, 12],
    ['bank-level', 'm', 0.8, 800],
    ['bank-level', 'mm', 800, 800],
    ['battery-charge', '%', 0.6, 60],
    ['battery-charge', '/', 0.6, 60],
    ['battery-charge', '/100', 60, 60],
    ['room-humidity', '%RH', 45, 45],
  ] as const)('%s in %s', (id, u, v, value) => {
    const payload = JSON.stringify([{ bver: 26, n: 'x', u, v }]);
    expect(values(payload, knownPoint(id, { read: 'senml:x' }))[0]).toBeCloseTo(value, 9);
  });

  test.each([
    ['[{"n":"b","v":1}]', /record named "a", found none/],
    ['[{"n":"a","u":"V","v":1}]', /one of the units degC, .*, found "V"/],
    ['[{"n":"a","v":1,"y_":0}]', /must be understood/],
    ['23.5', /expected a SenML pack/],
  ])('%s is refused', (payload, sentence) => {
    const decoded = heard(payload, knownPoint('leaving-water', { read: 'senml:a' }));
    expect(decoded.kind === 'fault' && decoded.fault).toMatch(sentence);
  });
});

describe('series', () => {
  test('a forecast is sorted, converted and keeps the last of two entries for one time', () => {
    const hourly = [
      { time: '2026-07-14T20:00:00Z', temperature: 77 },
      { time: '2026-07-14T19:00:00Z', temperature: 86, wind: 3 },
      { time: '2026-07-14T20:00:00Z', temperature: '68' },
    ];
    const point = knownPoint('outdoor-forecast', { read: '/hourly', unit: 'degF' });
    const decoded = heard(JSON.stringify({ hourly }), point);
    expect(decoded).toEqual({
      kind: 'forecast',
      entries: [
        { atMs: Date.UTC(2026, 6, 14, 19), temperatureC: expect.closeTo(30, 9) },
        { atMs: Date.UTC(2026, 6, 14, 20), temperatureC: expect.closeTo(20, 9) },
      ],
    });
  });

  test.each([
    ['{}', /expected an array/],
    ['[{"time":1784053770}]', /as entry 0/],
    ['[{"time":"noon","temperature":20}]', /the time of entry 0/],
    ['[{"time":1784053770,"temperature":99}]', /-50 to 60 degC as entry 0, found 99/],
    ['[null]', /as entry 0/],
  ])('%s is no forecast', (payload, sentence) => {
    const decoded = heard(payload, knownPoint('outdoor-forecast'));
    expect(decoded.kind === 'fault' && decoded.fault).toMatch(sentence);
  });

  test('prices pass through as JSON', () => {
    const document = { eventName: 'x', intervals: [] };
    expect(heard(JSON.stringify(document), knownPoint('prices'))).toEqual({ kind: 'prices', document });
  });
});

describe('whatever comes', () => {
  const reads = ['plain', '/a', '/a/0', 'senml:a'];
  const points = fc
    .tuple(
      fc.constantFrom(...(Object.keys(POINTS) as PointId[])),
      fc.constantFrom(...reads),
      fc.constantFrom(null, '/t'),
      fc.constantFrom(null, 'degF', 'kW', '%', 'nonsense'),
    )
    .map(([id, read, timePointer, unit]) => knownPoint(id, { read, timePointer, unit }));
  const leaf = fc.oneof(
    fc.double(),
    fc.string(),
    fc.boolean(),
    fc.constant(null),
    fc.integer(),
    fc.constantFrom('2026-07-14T18:29:30Z', '85', '-127', 268_435_456, 1e308, -1e308),
  );
  const senml = fc.array(
    fc.dictionary(
      fc.constantFrom('n', 'bn', 'bt', 't', 'v', 'vs', 'vb', 'u', 'bu', 's', 'bver', 'ut', 'x_'),
      leaf,
    ),
    { maxLength: 4 },
  );
  const json = fc.oneof(
    fc.record({
      a: fc.oneof(leaf, fc.array(leaf), fc.array(fc.record({ time: leaf, temperature: leaf }))),
      t: leaf,
    }),
    senml,
    fc.json({ maxDepth: 3 }).map((text): unknown => JSON.parse(text)),
  );
  const payloads = fc.oneof(
    fc.uint8Array({ maxLength: 64 }),
    fc.string({ unit: 'binary' }).map((text) => Buffer.from(text)),
    json.map((value) => Buffer.from(JSON.stringify(value))),
  );

  test('decoding never throws, and every usable value is finite and in range', () => {
    fc.assert(
      fc.property(payloads, points, (payload, point) => {
        const decoded = heard(payload, point);
        if (decoded.kind === 'fault') expect(decoded.fault).toMatch(/\S/);
        if (decoded.kind !== 'readings') return;
        for (const reading of decoded.readings) {
          expect(Math.abs(reading.atMs)).toBeLessThanOrEqual(8.64e15);
          if (reading.unusable !== null) continue;
          expect(reading.value).toBeGreaterThanOrEqual(point.spec.plausible[0]);
          expect(reading.value).toBeLessThanOrEqual(point.spec.plausible[1]);
        }
      }),
      { numRuns: 3000 },
    );
  });

  test('nesting beyond the stack is a fault', () => {
    const deep = `${'['.repeat(200_000)}${']'.repeat(200_000)}`;
    expect(heard(deep, knownPoint('leaving-water', { read: '/0' }))).toMatchObject({ kind: 'fault' });
  });
});

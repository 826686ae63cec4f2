import { describe, expect, test } from 'vitest';
import { resolveSenml, senmlUnit } from '../../src/mqtt/senml.ts';

/** An arbitrary present, in Unix seconds, for relative times. */
const NOW_S = 1_780_000_000;

/** [name, unit, value, time] of each record; times rounded to the microsecond that the vectors carry. */
function resolved(pack: unknown): unknown[][] {
  const result = resolveSenml(pack, NOW_S);
  if (!result.ok) throw new Error(result.fault);
  return result.records.map((record) => [
    record.name,
    record.unit,
    record.value,
    Math.round(record.timeS * 1e6) / 1e6,
  ]);
}

describe('SenML vectors of RFC 8428', () => {
  test('section 5.1.1: one measurement, now', () => {
    expect(resolved([{ n: 'urn:dev:ow:10e2073a01080063', u: 'Cel', v: 23.1 }])).toEqual([
      ['urn:dev:ow:10e2073a01080063', 'Cel', 23.1, NOW_S],
    ]);
  });

  test('section 5.1.2: base values, negative relative times, chronological order', () => {
    const pack = [
      {
        bn: 'urn:dev:ow:10e2073a0108006:',
        bt: 1.276020076001e9,
        bu: 'A',
        bver: 5,
        n: 'voltage',
        u: 'V',
        v: 120.1,
      },
      { n: 'current', t: -5, v: 1.2 },
      { n: 'current', t: -4, v: 1.3 },
      { n: 'current', t: -3, v: 1.4 },
      { n: 'current', t: -2, v: 1.5 },
      { n: 'current', t: -1, v: 1.6 },
      { n: 'current', v: 1.7 },
    ];
    const current = 'urn:dev:ow:10e2073a0108006:current';
    expect(resolved(pack)).toEqual([
      [current, 'A', 1.2, 1276020071.001],
      [current, 'A', 1.3, 1276020072.001],
      [current, 'A', 1.4, 1276020073.001],
      [current, 'A', 1.5, 1276020074.001],
      [current, 'A', 1.6, 1276020075.001],
      ['urn:dev:ow:10e2073a0108006:voltage', 'V', 120.1, 1276020076.001],
      [current, 'A', 1.7, 1276020076.001],
    ]);
  });

  test('sections 5.1.3 and 5.1.4: several units under one name', () => {
    const pack = [
      { bn: 'urn:dev:ow:10e2073a01080063', bt: 1.320067464e9, bu: '%RH', v: 20 },
      { u: 'lon', v: 24.30621 },
      { u: 'lat', v: 60.07965 },
      { t: 60, v: 20.3 },
      { u: 'lon', t: 60, v: 24.30622 },
      { u: 'lat', t: 60, v: 60.07965 },
      { t: 120, v: 20.7 },
      { u: 'lon', t: 120, v: 24.30623 },
      { u: 'lat', t: 120, v: 60.07966 },
      { u: '%EL', t: 150, v: 98 },
      { t: 180, v: 21.2 },
      { u: 'lon', t: 180, v: 24.30628 },
      { u: 'lat', t: 180, v: 60.07967 },
    ];
    const name = 'urn:dev:ow:10e2073a01080063';
    expect(resolved(pack)).toEqual([
      [name, '%RH', 20, 1320067464],
      [name, 'lon', 24.30621, 1320067464],
      [name, 'lat', 60.07965, 1320067464],
      [name, '%RH', 20.3, 1320067524],
      [name, 'lon', 24.30622, 1320067524],
      [name, 'lat', 60.07965, 1320067524],
      [name, '%RH', 20.7, 1320067584],
      [name, 'lon', 24.30623, 1320067584],
      [name, 'lat', 60.07966, 1320067584],
      [name, '%EL', 98, 1320067614],
      [name, '%RH', 21.2, 1320067644],
      [name, 'lon', 24.30628, 1320067644],
      [name, 'lat', 60.07967, 1320067644],
    ]);
  });

  test('section 5.1.5: texts, truth and data', () => {
    const pack = [
      { bn: 'urn:dev:ow:10e2073a01080063:', n: 'temp', u: 'Cel', v: 23.1 },
      { n: 'label', vs: 'Machine Room' },
      { n: 'open', vb: false },
      { n: 'nfv-reader', vd: 'aGkgCg' },
    ];
    const values = resolved(pack).map(([, , value]) => value);
    expect(values).toEqual([23.1, 'Machine Room', false, 'aGkgCg']);
    expect(Buffer.from(String(values[3]), 'base64url').toString()).toBe('hi \n');
  });

  test('section 5.1.6: a base holds until it is given again', () => {
    const pack = [
      { bn: '2001:db8::2/', bt: 1.320078429e9, n: 'temperature', u: 'Cel', v: 25.2 },
      { n: 'humidity', u: '%RH', v: 30 },
      { bn: '2001:db8::1/', n: 'temperature', u: 'Cel', v: 12.3 },
      { n: 'humidity', u: '%RH', v: 67 },
    ];
    expect(resolved(pack)).toEqual([
      ['2001:db8::2/temperature', 'Cel', 25.2, 1320078429],
      ['2001:db8::2/humidity', '%RH', 30, 1320078429],
      ['2001:db8::1/temperature', 'Cel', 12.3, 1320078429],
      ['2001:db8::1/humidity', '%RH', 67, 1320078429],
    ]);
  });

  test('section 5.1.7: a record of base fields alone yields nothing', () => {
    const pack = [
      { bn: 'urn:dev:ow:10e2073a01080063:' },
      { n: 'temp', u: 'Cel', v: 23.1 },
      { n: 'heat', u: '/', v: 1 },
      { n: 'fan', u: '/', v: 0 },
    ];
    expect(resolved(pack)).toHaveLength(3);
  });

  test('section 5.1.7: fractions of a second', () => {
    const pack = [
      { bt: 1.320078429e9, bu: '/', n: '2001:db8::3', v: 0.5 },
      { n: '2001:db8::4', v: 0.5 },
      { n: '2001:db8::3', t: 0.1, v: 0 },
      { n: '2001:db8::4', t: 0.1, v: 0 },
    ];
    expect(resolved(pack)).toEqual([
      ['2001:db8::3', '/', 0.5, 1320078429],
      ['2001:db8::4', '/', 0.5, 1320078429],
      ['2001:db8::3', '/', 0, 1320078429.1],
      ['2001:db8::4', '/', 0, 1320078429.1],
    ]);
  });
});

describe('SenML rules', () => {
  test.each([
    ['a label that must be understood', [{ n: 'a', x_: 1, v: 1 }], /"x_" must be understood/],
    ['a name that begins with an underscore', [{ n: '_a', v: 1 }], /"_a" is no SenML name/],
    ['no name at all', [{ v: 1 }], /"" is no SenML name/],
    ['two values', [{ n: 'a', v: 1, vs: 'b' }], /one value, found v and vs/],
    ['neither value nor sum', [{ n: 'a', t: 3 }], /expected a value/],
    ['a newer version', [{ n: 'a', bver: 11, v: 1 }], /version 11 is newer/],
    ['no array', { n: 'a', v: 1 }, /expected a SenML pack/],
    ['a record that is no object', [3], /record 0: expected an object/],
    ['a number written as text', [{ n: 'a', v: '1' }], /expected a number as "v"/],
    ['a truth value written as number', [{ n: 'a', vb: 1 }], /true or false as "vb"/],
    // judgement, not the standard's word: relative parts that add up to a date in 1978 are a mistake
    ['two relative times that add up to 1978', [{ bt: 268_435_400, n: 'a', t: 100, v: 1 }], /border/],
  ])('refuses %s', (_what, pack, sentence) => {
    const result = resolveSenml(pack, NOW_S);
    expect(result).toMatchObject({ ok: false });
    expect(result.ok ? '' : result.fault).toMatch(sentence);
  });

  test('ignores labels that it does not know', () => {
    expect(resolved([{ n: 'a', x: 1, v: 1 }])).toEqual([['a', null, 1, NOW_S]]);
  });

  test('takes an empty pack and the version with secondary units (RFC 9100)', () => {
    expect(resolved([])).toEqual([]);
    expect(resolved([{ bver: 26, n: 'a', u: 'kW', v: 1.5 }])).toEqual([['a', 'kW', 1.5, NOW_S]]);
  });

  test('adds base value and base sum, and lets a sum stand alone', () => {
    const result = resolveSenml(
      [
        { bv: 20, bs: 100, n: 'a', v: 1.5 },
        { n: 'b', s: 3 },
      ],
      NOW_S,
    );
    expect(result).toMatchObject({
      ok: true,
      records: [
        { name: 'a', value: 21.5, sum: null },
        { name: 'b', value: null, sum: 103 },
      ],
    });
  });

  test('tells own times from relative ones, and the promised update', () => {
    const result = resolveSenml(
      [
        { n: 'a', t: -30, v: 1, ut: 60 },
        { n: 'a', t: NOW_S - 40, v: 2 },
      ],
      NOW_S,
    );
    expect(result).toMatchObject({
      ok: true,
      records: [
        { timeS: NOW_S - 40, ownTime: true, updateS: null },
        { timeS: NOW_S - 30, ownTime: false, updateS: 60 },
      ],
    });
  });

  test('knows that % is a ratio here and /100 a percentage (RFC 8428 section 12.1, RFC 8798)', () => {
    expect([senmlUnit('%'), senmlUnit('/'), senmlUnit('/100'), senmlUnit('Cel')]).toEqual([
      'ratio',
      '/',
      '%',
      'Cel',
    ]);
  });
});

import { readFileSync } from 'node:fs';
import { createRequire } from 'node:module';
import { Ajv, type AnySchema } from 'ajv';
import * as fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import {
  describeDevice,
  deviceTopic,
  nodesOf,
  propertiesOf,
  willOf,
  type Property,
} from '../../src/mqtt/homie.ts';
import { formatNumber, formatValue, isNews, parseSet } from '../../src/mqtt/homie-format.ts';
import {
  cycleValues,
  nightValues,
  orderValues,
  planValues,
  settingValues,
} from '../../src/mqtt/homie-values.ts';
import { cycleRecord, NOW_MS, planRecord, pretendCleared, siteConfig } from './site.ts';

const config = siteConfig();
const version = (of: string): unknown => (JSON.parse(of) as { version: unknown }).version;
const property = (datatype: Property['datatype'], format?: string): Property => ({
  name: '',
  datatype,
  ...(format === undefined ? {} : { format }),
});

describe('the description', () => {
  // the public table of the product: node, property, datatype, unit, settable
  const TABLE: Record<
    string,
    Record<string, [datatype: string, unit?: string | undefined, settable?: true]>
  > = {
    bank: {
      'ice-on-hand': ['float', 'kWh'],
      'ice-on-hand-low': ['float', 'kWh'],
      'ice-on-hand-high': ['float', 'kWh'],
      inventory: ['float', '%'],
      'ice-mass': ['float', 'kg'],
      'lasts-until': ['datetime'],
      phase: ['enum'],
      'heat-leak': ['float', 'W/K'],
      told: ['enum', undefined, true],
    },
    plan: {
      'evening-load': ['float', 'kWh'],
      'evening-load-high': ['float', 'kWh'],
      'next-change': ['datetime'],
      'worth-of-ice': ['float', 'EUR/kWh'],
      schedule: ['json'],
      strategy: ['enum', undefined, true],
    },
    dispatch: {
      command: ['enum'],
      reason: ['string'],
      expires: ['datetime'],
      order: ['json'],
      'held-back-by': ['string'],
      wish: ['enum', undefined, true],
      'wish-for': ['duration', undefined, true],
    },
    comfort: { limit: ['float', '°C', true], 'warm-hours': ['float', 'K·h'], 'feels-like': ['float', '°C'] },
    night: { sheet: ['json'], cost: ['float', 'EUR'], saved: ['float', 'EUR'] },
    health: {
      'points-heard': ['integer'],
      'points-stale': ['string'],
      clock: ['enum'],
      'balance-residual': ['float', '%'],
    },
  };

  test('has exactly the nodes and properties of the public table', () => {
    const described = Object.fromEntries(
      Object.entries(nodesOf(config)).map(([id, node]) => [
        id,
        Object.fromEntries(
          Object.entries(node.properties).map(([key, { datatype, unit, settable }]) => {
            const tail = settable ? [unit, settable] : unit === undefined ? [] : [unit];
            return [key, [datatype, ...tail]];
          }),
        ),
      ]),
    );
    expect(described).toEqual(TABLE);
  });

  test('takes the words of commands, phases, strategies and wishes', () => {
    const properties = propertiesOf(config);
    expect(properties.get('dispatch/command')?.format).toBe('hold,charge-now,discharge,charge-and-discharge');
    expect(properties.get('bank/phase')?.format).toBe('all-water,mixed,full');
    expect(properties.get('plan/strategy')?.format).toBe(
      'planned,storage-priority,chiller-priority,timetable',
    );
    expect(properties.get('bank/told')?.format).toBe('nothing,empty,full,tank-refilled,probe-moved');
    expect(properties.get('dispatch/wish')?.format).toBe('none,cool-now,save-ice,make-ice,stand-down');
  });

  test('passes the JSON schema of an independent implementation (node-homie 5.0.0)', () => {
    const path = createRequire(import.meta.url).resolve('node-homie/package.json');
    const file = path.replace('package.json', 'src/DeviceDescription.Schema.json');
    const schema = JSON.parse(readFileSync(file, 'utf8')) as AnySchema;
    const validate = new Ajv({ strict: false, validateSchema: false, unicodeRegExp: false }).compile(schema);
    expect(validate(JSON.parse(describeDevice(config)))).toBe(true);
    expect(validate.errors).toBeNull();
  });

  test('carries a version that changes with the document and only then', () => {
    const other = siteConfig('announce: {domain: house}');
    expect(version(describeDevice(config))).toBe(version(describeDevice(other)));
    const renamed = { ...config, site: { ...config.site, name: 'Juniper' } };
    expect(version(describeDevice(config))).not.toBe(version(describeDevice(renamed)));
    expect(Number.isSafeInteger(version(describeDevice(config)))).toBe(true);
  });

  test('stands under the domain of the site file, will included', () => {
    const other = siteConfig('announce: {domain: house}');
    expect(deviceTopic(other)).toBe('house/5/juniper');
    expect(willOf(config)).toEqual({ topic: 'homie/5/juniper/$state', payload: 'lost' });
  });
});

describe('payloads', () => {
  test.each([
    [8.4321, 2, '8.43'],
    [-0.001, 2, '0'],
    [1e21, 0, '1e21'],
    [1.5e-9, 2, '0'],
    [-12.5, 1, '-12.5'],
    [100, 1, '100'],
  ])('%d with %i decimals is %s', (value, decimals, payload) => {
    expect(formatNumber(value, decimals)).toBe(payload);
  });

  test('numbers use only the characters of the convention and read back', () => {
    fc.assert(
      fc.property(fc.double({ noNaN: true, noDefaultInfinity: true }), fc.nat(6), (value, decimals) => {
        const payload = formatNumber(value, decimals);
        expect(payload).toMatch(/^-?\d+(\.\d+)?(e-?\d+)?$/);
        expect(Math.abs(Number(payload) - value)).toBeLessThanOrEqual(
          Math.max(0.5000001 * 10 ** -decimals, Math.abs(value) * 1e-15),
        );
      }),
    );
  });

  test.each<[Property['datatype'], string | number | object | null, string]>([
    ['datetime', NOW_MS, '2026-07-14T18:00:00Z'],
    ['duration', 5_400_000, 'PT1H30M'],
    ['duration', 0, 'PT0S'],
    ['string', '', '\0'],
    ['string', 'why', 'why'],
    ['json', { a: 1 }, '{"a":1}'],
    ['float', Number.NaN, ''],
    ['float', null, ''],
  ])('%s %j', (datatype, value, payload) => {
    expect(formatValue({ name: '', datatype }, value)).toBe(payload);
  });

  test('small changes are no news, reached steps and unknown values are', () => {
    const ice: Property = { name: '', datatype: 'float', decimals: 2 };
    expect(isNews(ice, undefined, 8.43)).toBe(true);
    expect(isNews(ice, 8.43, 8.4361)).toBe(false);
    expect(isNews(ice, 8.43, 8.44)).toBe(true);
    expect(isNews(ice, 8.43, null)).toBe(true);
    expect(isNews(ice, null, null)).toBe(false);
    const lasts: Property = { name: '', datatype: 'datetime', bandMs: 300_000 };
    expect(isNews(lasts, NOW_MS, NOW_MS + 299_000)).toBe(false);
    expect(isNews(lasts, NOW_MS, NOW_MS + 300_000)).toBe(true);
  });

  test('noise about a rounding border does not publish in every cycle', () => {
    const ice: Property = { name: '', datatype: 'float', decimals: 2 };
    const noisy = Array.from({ length: 100 }, (_, index) => 8.435 + (index % 2 ? 0.0005 : -0.0005));
    let published: number | undefined;
    let count = 0;
    for (const value of noisy) {
      if (!isNews(ice, published, value)) continue;
      published = value;
      count += 1;
    }
    expect(count).toBe(1);
  });
});

describe('settings by /set', () => {
  // Homie 5.0.0, section "Payload", Float/Integer formats: both vectors stand there
  test.each([
    ['5', '0:10:2', 6],
    ['5', ':10:2', 6],
  ])('rounds %s in %s to %i', (payload, format, value) => {
    expect(parseSet(property('integer', format), payload)).toEqual({ ok: true, value });
    expect(parseSet(property('float', format), payload)).toEqual({ ok: true, value });
  });

  test.each([
    ['float', '18:32:0.1', '25.3', 25.3],
    ['float', '18:32:0.1', '25.04', 25],
    ['float', '18:32:0.1', '32.04', 32],
    ['float', '18:32:0.1', '2.5e1', 25],
    ['float', undefined, '-3.25', -3.25],
    ['float', '::3', '5', 5],
    ['integer', undefined, '-7', -7],
    ['enum', 'a,b c', 'b c', 'b c'],
    ['duration', undefined, 'PT1H2S', 3_602_000],
    ['duration', undefined, 'PT90M', 5_400_000],
    ['string', undefined, '\0', ''],
    ['string', undefined, 'x', 'x'],
  ] as const)('%s %s takes %j', (datatype, format, payload, value) => {
    expect(parseSet(property(datatype, format), payload)).toEqual({ ok: true, value });
  });

  test.each([
    ['float', '18:32:0.1', '32.06'],
    ['float', '18:32:0.1', '17.9'],
    ['float', undefined, '+3'],
    ['float', undefined, 'NaN'],
    ['float', undefined, 'Infinity'],
    ['float', undefined, '3,5'],
    ['float', undefined, ' 3'],
    ['float', undefined, '0x10'],
    ['float', undefined, '1e999'],
    ['float', undefined, ''],
    ['integer', undefined, '3.0'],
    ['integer', undefined, '9223372036854775808'],
    ['integer', '0:10', '11'],
    ['enum', 'a,b', 'A'],
    ['enum', 'a,b', ' a'],
    ['enum', 'a,b', ''],
    ['duration', undefined, 'PT'],
    ['duration', undefined, 'P1D'],
    ['duration', undefined, 'PT0.5S'],
    ['duration', undefined, '90'],
    ['datetime', undefined, '2026-07-14T18:00:00Z'],
    ['json', undefined, '{}'],
  ] as const)('%s %s refuses %j', (datatype, format, payload) => {
    expect(parseSet(property(datatype, format), payload)).toMatchObject({ ok: false });
  });
});

describe('whatever is set', () => {
  test('never throws, and what is accepted is legal', () => {
    const payloads = fc.oneof(
      fc.string(),
      fc.string({ unit: 'binary' }),
      fc.double().map(String),
      fc.bigInt().map(String),
      fc.constantFrom('planned', 'PT1H', 'none', '25', '\0'),
    );
    fc.assert(
      fc.property(fc.constantFrom(...propertiesOf(config).values()), payloads, (of, payload) => {
        const parsed = parseSet(of, payload);
        if (!parsed.ok) {
          expect(parsed.fault).toMatch(/^expected .*, found /s);
          return;
        }
        if (of.datatype === 'enum') expect(of.format?.split(',')).toContain(parsed.value);
        if (typeof parsed.value === 'number') expect(Number.isFinite(parsed.value)).toBe(true);
      }),
      { numRuns: 500 },
    );
  });
});

describe('values of the records', () => {
  const properties = propertiesOf(config);
  const all = {
    ...cycleValues(cycleRecord(), { pointsHeard: 4, warmTonightKh: 0.25 }),
    ...planValues(planRecord()),
    ...orderValues(pretendCleared()),
    ...settingValues({ strategy: 'planned', wish: 'none', wishForMs: 7_200_000, limitC: 26, told: null }),
    ...nightValues({
      sheet: { date: '2026-07-13' },
      costMoney: 0.83,
      savedMoney: 0.4,
      balanceResidualPct: -1.2,
    }),
  };

  test('cover every property of the table, and no other', () => {
    expect(Object.keys(all).toSorted()).toEqual([...properties.keys()].toSorted());
  });

  test('numbers, words and documents', () => {
    const shown = Object.fromEntries(
      [...properties].map(([path, of]) => [path, formatValue(of, all[path] ?? null)]),
    );
    expect(shown).toMatchObject({
      'bank/ice-on-hand': '8.43',
      'bank/lasts-until': '',
      'plan/worth-of-ice': '0.0712',
      'plan/next-change': '2026-07-14T19:00:00Z',
      'dispatch/held-back-by': '\0',
      'dispatch/wish-for': 'PT2H',
      'health/balance-residual': '-1.2',
    });
    expect(JSON.parse(shown['dispatch/order'])).toEqual({
      command: 'charge-now',
      reason: 'Power is at its cheapest until 20:00.',
      issued: '2026-07-14T18:00:00Z',
      expires: '2026-07-14T18:01:30Z',
      heldBackBy: '',
      switches: { chiller: true, pump: false, fan: false },
      numbers: { iceOnHandKwh: 8.43, waitCostMoney: null },
    });
  });
});

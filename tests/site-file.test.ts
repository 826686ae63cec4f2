import { readdirSync, readFileSync } from 'node:fs';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { faultLines, parseSiteFile } from '../src/site-file.ts';

const CONFIG = join(import.meta.dirname, '../config');
const read = (name: string): string => readFileSync(join(CONFIG, name), 'utf8');
const juniper = read('juniper.yaml');

function faultsOf(text: string): Record<string, string> {
  const parsed = parseSiteFile(text);
  return parsed.ok ? {} : Object.fromEntries(parsed.faults.map((fault) => [fault.path, fault.sentence]));
}

const changed = (...pairs: [string, string][]): string =>
  pairs.reduce((text, [from, to]) => {
    expect(text).toContain(from);
    return text.replace(from, to);
  }, juniper);

describe('the sites that ship', () => {
  const names = readdirSync(CONFIG).filter((name) => name !== 'reference.yaml');

  it.each(names)('%s has no fault', (name) => {
    expect(faultsOf(read(name))).toEqual({});
  });

  it('covers tariff and island, SI and IP', () => {
    expect(names.toSorted()).toEqual(['juniper-island.yaml', 'juniper.yaml', 'saltmarsh.yaml']);
  });
});

describe('values with units', () => {
  it('come in as what they are', () => {
    const parsed = parseSiteFile(
      changed(
        ['water: 240 L', 'water: 63.4 gal'],
        ['limit: 26 degC', 'limit: 78 degF'],
        ['max-age: PT5M', 'max-age: PT90S'],
      ),
    );
    expect(parsed.ok && parsed.config.bank.waterL).toBeCloseTo(63.4 * 3.785411784, 9);
    expect(parsed.ok && parsed.config.comfort.limitC).toBeCloseTo(25.5556, 3);
    expect(parsed.ok && parsed.config.points['leaving-water'].maxAgeMs).toBe(90_000);
  });

  it('are refused without one, with the wrong one and out of range', () => {
    const faults = faultsOf(
      changed(
        ['water: 240 L', 'water: 240'],
        ['most-ice: 150 kg', 'most-ice: 150 L'],
        ['power: 0.55 kW', 'power: 550 kW'],
      ),
    );
    expect(faults['bank/water']).toMatch(/expected a number with one of the units L, .*found 240$/);
    expect(faults['bank/most-ice']).toMatch(/units kg.*found "150 L"/);
    expect(faults['chiller/power']).toBe('expected a value between 20 W and 100 kW, found "550 kW"');
  });
});

describe('faults', () => {
  it('are all reported at once, with the nearest key that exists', () => {
    const faults = faultsOf(
      changed(
        ['elevation:', 'elevatoin:'],
        ['entering-water:', 'entring-water:'],
        ['Europe/Madrid', 'Europe/Madird'],
        ["from: '16:30'", "fro: '16:30'"],
        ['form: ice-on-coil-external', 'form: iceberg'],
      ),
    );
    expect(faults).toEqual({
      'site/elevatoin': 'unknown key, the nearest that exists is "elevation"',
      'site/zone': 'expected an IANA time zone such as "Europe/Madrid", found "Europe/Madird"',
      'points/entring-water': 'unknown point, the nearest that exists is "entering-water"',
      'cabin/home/0/fro': 'unknown key, the nearest that exists is "from"',
      'cabin/home/0/from': 'expected a local time as HH:MM, found nothing',
      'bank/form':
        'expected one of ice-on-coil-external, ice-on-coil-internal, sealed-containers, open-tub, found "iceberg"',
    });
  });

  it('tell of missing sections and points', () => {
    const faults = faultsOf('site: {}\n');
    expect(Object.keys(faults)).toEqual(
      expect.arrayContaining(['site/id', 'bank', 'chiller', 'delivery', 'power', 'points']),
    );
    expect(faultsOf(changed(['  leaving-water:', '  bank-top:']))).toHaveProperty(['points/leaving-water']);
  });

  it.each([
    ['nothing at all', ''],
    ['a list', '- 1\n'],
    ['a word', 'hello'],
    ['null sections', 'site:\nbank:\npoints:\n'],
  ])('come from %s as sentences, not exceptions', (_name, text) => {
    expect(Object.keys(faultsOf(text)).length).toBeGreaterThan(0);
  });

  it('name the line when the file is no YAML', () => {
    expect(faultsOf('site: {id: juniper\nbank: [')['']).toMatch(/not readable as YAML.*line \d/);
  });

  it.each([
    ['both tariff and island', ['  tariff:', '  island: { panels: 1 kW }\n  tariff:'], 'power', /found both/],
    [
      'more ice than water',
      ['most-ice: 150 kg', 'most-ice: 300 kg'],
      'bank/most-ice',
      /no more ice than the 240 kg/,
    ],
    [
      'a unit that is no temperature',
      ['leaving, unit: degC', 'leaving, unit: bar'],
      'points/leaving-water/unit',
      /degF.*found "bar"/,
    ],
    [
      'a confirming point that is not there',
      ['confirm-by: pump-power', 'confirm-by: grid-power'],
      'actuators/pump/confirm-by',
      /not under points/,
    ],
    [
      'a season of one day',
      ['{ name: middle, price: 0.16 }', "{ name: middle, price: 0.16, season: ['06-01'] }"],
      'power/tariff/periods/4/season',
      /two days/,
    ],
    [
      'a point that every object has',
      ['points:', 'points:\n  __proto__: { topic: a/b }'],
      'points/__proto__',
      /unknown/,
    ],
    [
      'two passwords',
      ['  # user: rimehold', '  password-env: SECRET\n  password-file: secret'],
      'broker/password-env',
      /one source/,
    ],
  ] as [string, [string, string], string, RegExp][])('see %s', (_name, change, path, sentence) => {
    expect(faultsOf(changed(change))[path]).toMatch(sentence);
  });

  it.each([
    ['0 25 * * *', /hour as 0 to 23.*found "25"/],
    ['0 3 * * SATURDAYS', /weekday as 0 to 7 or SUN to SAT.*"SATURDAYS"/],
    ['0 3 31 2 *', /never comes/],
    ['0 3 * *', /five fields.*found "0 3 \* \*"/],
    ['5/15 3 * * *', /minute/],
    ['0 9-5 * * *', /hour/],
  ])('see the timetable line %s', (line, sentence) => {
    const text = changed([
      'strategy: planned',
      `strategy: planned\n  timetable: [{at: '${line}', command: hold}]`,
    ]);
    expect(faultsOf(text)['planning/timetable/0/at']).toMatch(sentence);
  });

  it('read as lines for a terminal', () => {
    expect(
      faultLines('hut.yaml', [{ path: 'bank/water', sentence: 'expected one thing, found another' }]),
    ).toBe('hut.yaml: 1 fault; nothing was started.\n  bank/water: expected one thing, found another.');
  });
});

/**
 * Local periods to exact instants. The ten cases and the freshness case were each computed twice, with Python zoneinfo
 * (2025b and 2026f) and temporal-polyfill 1.0.8; rule for gaps and folds: RFC 5545 section 3.3.5 with erratum 4271.
 */
import { describe, expect, it } from 'vitest';
import {
  HOUR_MS,
  MINUTE_MS,
  ZONE_DATA_VERSION,
  formatDuration,
  formatInstant,
  fromWall,
  isZone,
  localClock,
  localDate,
  nightAt,
  nightOf,
  noonOf,
  parseDuration,
  parseInstant,
  slotStart,
  toWall,
  utcOffsetMs,
} from '../src/time.ts';

const clock = (text: string): number => Number(text.slice(0, 2)) * 60 + Number(text.slice(3, 5));

function instants(
  zone: string,
  date: string,
  from: string,
  to: string,
  plusDays = 0,
): [string, string, number] {
  const [year, month, day] = date.split('-').map(Number);
  const startMs = fromWall(zone, year, month, day, clock(from));
  const endMs = fromWall(zone, year, month, day + plusDays, clock(to));
  return [formatInstant(startMs), formatInstant(endMs), (endMs - startMs) / HOUR_MS];
}

describe('local periods on daylight-saving days', () => {
  const cases: [string, string, string, string, string, number, string, string, number][] = [
    [
      '1 spring gap',
      'America/New_York',
      '2026-03-08',
      '00:00',
      '06:00',
      0,
      '2026-03-08T05:00',
      '2026-03-08T10:00',
      5,
    ],
    [
      '2 fall fold',
      'America/New_York',
      '2026-11-01',
      '00:00',
      '06:00',
      0,
      '2026-11-01T04:00',
      '2026-11-01T11:00',
      7,
    ],
    [
      '3 start does not exist',
      'America/New_York',
      '2026-03-08',
      '02:30',
      '06:00',
      0,
      '2026-03-08T07:30',
      '2026-03-08T10:00',
      2.5,
    ],
    [
      '4 whole hour repeats',
      'America/New_York',
      '2026-11-01',
      '01:00',
      '02:00',
      0,
      '2026-11-01T05:00',
      '2026-11-01T07:00',
      2,
    ],
    [
      '4b ends in its first occurrence',
      'America/New_York',
      '2026-11-01',
      '00:00',
      '01:30',
      0,
      '2026-11-01T04:00',
      '2026-11-01T05:30',
      1.5,
    ],
    [
      '5 crosses midnight and gap',
      'Europe/Berlin',
      '2026-03-28',
      '22:00',
      '06:00',
      1,
      '2026-03-28T21:00',
      '2026-03-29T04:00',
      7,
    ],
    [
      '6 crosses midnight and fold',
      'Europe/Berlin',
      '2026-10-24',
      '22:00',
      '06:00',
      1,
      '2026-10-24T20:00',
      '2026-10-25T05:00',
      9,
    ],
    [
      '7 half-hour gap',
      'Australia/Lord_Howe',
      '2026-10-04',
      '00:00',
      '06:00',
      0,
      '2026-10-03T13:30',
      '2026-10-03T19:00',
      5.5,
    ],
    [
      '7b half-hour fold',
      'Australia/Lord_Howe',
      '2026-04-05',
      '00:00',
      '06:00',
      0,
      '2026-04-04T13:00',
      '2026-04-04T19:30',
      6.5,
    ],
    [
      '8 midnight does not exist',
      'America/Santiago',
      '2026-09-06',
      '00:00',
      '07:00',
      0,
      '2026-09-06T04:00',
      '2026-09-06T10:00',
      6,
    ],
    [
      '9 second yearly pair',
      'Africa/Casablanca',
      '2026-02-15',
      '00:00',
      '06:00',
      0,
      '2026-02-14T23:00',
      '2026-02-15T06:00',
      7,
    ],
    [
      '9b its return',
      'Africa/Casablanca',
      '2026-03-22',
      '00:00',
      '06:00',
      0,
      '2026-03-22T00:00',
      '2026-03-22T05:00',
      5,
    ],
    [
      '10 no daylight saving',
      'America/Phoenix',
      '2026-03-08',
      '00:00',
      '06:00',
      0,
      '2026-03-08T07:00',
      '2026-03-08T13:00',
      6,
    ],
    [
      '10b beside it',
      'America/Denver',
      '2026-03-08',
      '00:00',
      '06:00',
      0,
      '2026-03-08T07:00',
      '2026-03-08T12:00',
      5,
    ],
    [
      'a whole day is missing',
      'Pacific/Apia',
      '2011-12-29',
      '22:00',
      '06:00',
      2,
      '2011-12-30T08:00',
      '2011-12-30T16:00',
      8,
    ],
    [
      'southern spring',
      'Australia/Sydney',
      '2026-10-04',
      '00:00',
      '07:00',
      0,
      '2026-10-03T14:00',
      '2026-10-03T20:00',
      6,
    ],
  ];
  it.each(cases)('%s: %s %s %s-%s', (_, zone, date, from, to, plusDays, startsAt, endsAt, hours) => {
    expect(instants(zone, date, from, to, plusDays)).toEqual([`${startsAt}:00Z`, `${endsAt}:00Z`, hours]);
  });

  it('has zone rules of 2026b or later: Vancouver keeps daylight time in November 2026', () => {
    expect(instants('America/Vancouver', '2026-11-01', '00:00', '06:00')).toEqual([
      '2026-11-01T07:00:00Z',
      '2026-11-01T13:00:00Z',
      6,
    ]);
    expect(ZONE_DATA_VERSION >= '2026b').toBe(true);
  });

  it.each([
    ['America/Vancouver', -7],
    ['America/Edmonton', -6],
    ['America/Winnipeg', -5],
    ['America/Inuvik', -6],
  ])(
    '%s stands at %d h on 2026-12-01, where the zone data of Node 20.20.2 (2025c) is an hour wrong',
    (zone, hours) => {
      expect(utcOffsetMs(zone, Date.parse('2026-12-01T12:00Z')) / HOUR_MS).toBe(hours);
    },
  );

  it('reads a meter clock that knows no daylight saving: 00:30-07:30 of Etc/GMT is 01:30-08:30 British summer time', () => {
    const [from, to] = instants('Etc/GMT', '2026-07-01', '00:30', '07:30');
    expect(localClock('Europe/London', Date.parse(from))).toBe('01:30');
    expect(localClock('Europe/London', Date.parse(to))).toBe('08:30');
  });
});

describe('wall time', () => {
  it('returns to the same instant from every quarter hour of both change days that is not repeated', () => {
    const zone = 'Europe/Madrid';
    for (const day of ['2026-03-29T00:00Z', '2026-10-25T03:00Z']) {
      for (let at = Date.parse(day); at < Date.parse(day) + 20 * HOUR_MS; at += 15 * MINUTE_MS) {
        const wall = toWall(zone, at);
        expect(fromWall(zone, wall.year, wall.month, wall.day, wall.hour * 60 + wall.minute)).toBe(at);
      }
    }
  });

  it('gives weekday, date and clock in the zone', () => {
    const at = Date.parse('2026-12-01T23:30Z');
    expect(toWall('Europe/Madrid', at)).toMatchObject({
      year: 2026,
      month: 12,
      day: 2,
      hour: 0,
      minute: 30,
      weekday: 3,
    });
    expect(localDate('America/Denver', at)).toBe('2026-12-01');
  });

  it('refuses a zone that does not exist in one sentence', () => {
    expect(isZone('Europe/Atlantis')).toBe(false);
    expect(() => utcOffsetMs('Europe/Atlantis', 0)).toThrow(/found "Europe\/Atlantis"/);
  });
});

describe('nights', () => {
  it('runs from noon to noon and is 23 or 25 hours long on change days', () => {
    const nights = ['2026-07-14', '2026-03-28', '2026-10-24'].map((date) => nightOf('Europe/Madrid', date));
    expect(nights.map((night) => (night.endMs - night.startMs) / HOUR_MS)).toEqual([24, 23, 25]);
  });

  it('belongs to the date of its evening', () => {
    expect(nightAt('Europe/Madrid', Date.parse('2026-07-15T09:59Z')).date).toBe('2026-07-14');
    expect(nightAt('Europe/Madrid', Date.parse('2026-07-15T10:00Z')).date).toBe('2026-07-15');
  });

  it.each(['2026-02-30', '2026-7-1', 'yesterday', ''])('refuses "%s" as a date', (date) => {
    expect(() => noonOf('Europe/Madrid', date)).toThrow(/YYYY-MM-DD/);
  });
});

describe('durations and instants', () => {
  it.each([
    ['PT36H', 36 * HOUR_MS],
    ['P2W', 336 * HOUR_MS],
    ['P1DT12H', 36 * HOUR_MS],
    ['PT1H2S', HOUR_MS + 2000],
    ['PT0.5S', 500],
  ])('reads %s', (text, ms) => expect(parseDuration(text)).toBe(ms));
  it.each(['PT', 'P', '-P1D', 'P1Y', '36H', 'PT-1H', ''])('refuses "%s"', (text) => {
    expect(parseDuration(text)).toBeNull();
  });
  it('writes whole seconds that it reads again', () => {
    expect(formatDuration(0)).toBe('PT0S');
    for (const ms of [1000, 61_000, 3_600_000, 93_784_000])
      expect(parseDuration(formatDuration(ms))).toBe(ms);
  });
  it('takes RFC 3339 and nothing less', () => {
    expect(parseInstant('2026-12-02T08:00:00+01:00')).toBe(Date.parse('2026-12-02T07:00Z'));
    expect(parseInstant('2026-12-02t07:00:00z')).toBe(Date.parse('2026-12-02T07:00Z'));
    for (const bad of ['2026-12-02', '2026-12-02T07:00Z', '2026-13-02T07:00:00Z', '07:00']) {
      expect(parseInstant(bad)).toBeNull();
    }
  });
  it('starts a slot at or before its instant', () => {
    expect(slotStart(Date.parse('2026-12-02T07:14:59Z'), 15 * MINUTE_MS)).toBe(
      Date.parse('2026-12-02T07:00Z'),
    );
  });
});

import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { isLogHeader, parseLogLine } from '../src/reading-log.ts';

const AT = Date.UTC(2026, 6, 14, 18);

describe('reading log', () => {
  it('has one header', () => {
    expect(isLogHeader('time,point,value')).toBe(true);
    expect(isLogHeader('\uFEFF"time","point","value"\r')).toBe(true);
    expect(isLogHeader('timestamp,point,value')).toBe(false);
  });

  it.each([
    ['2026-07-14T18:00:00Z,leaving-water,2.5', { point: 'leaving-water', atMs: AT, value: 2.5 }],
    ['2026-07-14T20:00:00+02:00,leaving-water,2.5\r', { point: 'leaving-water', atMs: AT, value: 2.5 }],
    [
      '2026-07-14T18:00:00.250Z,room-temperature/loft,26',
      { point: 'room-temperature/loft', atMs: AT + 250, value: 26 },
    ],
    ['"2026-07-14T18:00:00Z","drip-tray-wet","true"', { point: 'drip-tray-wet', atMs: AT, value: 1 }],
    ['2026-07-14T18:00:00Z,occupied,0', { point: 'occupied', atMs: AT, value: 0 }],
  ])('reads %s', (line, reading) => {
    expect(parseLogLine(line)).toEqual({ kind: 'reading', reading });
  });

  it.each([
    ['2026-07-14T18:00:00Z,leaving-water,85', 'one-wire-power-on-85'],
    ['2026-07-14T18:00:00Z,leaving-water,-127', 'one-wire-cut'],
    ['2026-07-14T18:00:00Z,leaving-water,60', 'implausible'],
  ])('drops %s by name', (line, why) => {
    expect(parseLogLine(line)).toEqual({ kind: 'dropped', point: 'leaving-water', why });
  });

  it.each([
    ['2026-07-14T18:00:00Z,leaving-water', 'expected 3 fields as time,point,value, found 2'],
    ['yesterday,leaving-water,2', 'expected a time as 2026-07-14T18:00:00Z, found "yesterday"'],
    [
      '1970-01-01T00:10:00Z,leaving-water,2',
      'expected a time between 2000 and 2100, found "1970-01-01T00:10:00Z"',
    ],
    ['2026-07-14T18:00:00Z,leavingwater,2', 'expected a known point, found "leavingwater"'],
    ['2026-07-14T18:00:00Z,leaving-water,cold', 'expected a number, found "cold"'],
    ['2026-07-14T18:00:00Z,leaving-water,', 'expected a number, found ""'],
    ['2026-07-14T18:00:00Z,drip-tray-wet,maybe', 'expected a true or false, found "maybe"'],
    ['2026-07-14T18:00:00Z,prices,1', 'expected a point with single values, found "prices"'],
  ])('finds the fault in %s', (line, sentence) => {
    expect(parseLogLine(line)).toEqual({ kind: 'fault', sentence });
  });

  it('answers any text with a line, never an exception', () => {
    fc.assert(
      fc.property(fc.string({ unit: 'binary' }), (text) => typeof parseLogLine(text).kind === 'string'),
    );
    expect(parseLogLine('  ')).toEqual({ kind: 'empty' });
  });
});

/** Cron lines on the wall clock, through both changes of a year. Instants computed by hand from the zones' offsets. */
import { describe, expect, it } from 'vitest';
import { cronFault } from '../../src/cron-line.ts';
import { firedBetween, lastFired, type TimetableLine } from '../../src/planning/timetable.ts';

const at = (text: string): number => Date.parse(text);
const lines: readonly TimetableLine[] = [
  { at: '0 0 * * *', command: 'charge-now' },
  { at: '0 8 * * *', command: 'hold' },
  { at: '0 17 * * *', command: 'discharge' },
  { at: '0 23 * * *', command: 'hold' },
];
const MADRID = 'Europe/Madrid';

describe('timetable', () => {
  it('gives the line that fired last', () => {
    expect(lastFired(lines, MADRID, at('2026-07-01T15:00:00Z'))).toEqual({
      command: 'discharge',
      atMs: at('2026-07-01T15:00:00Z'),
    });
    expect(lastFired(lines, MADRID, at('2026-07-01T14:59:59Z'))?.command).toBe('hold');
    expect(lastFired(lines, MADRID, at('2026-07-01T22:00:00Z'))?.command).toBe('charge-now');
  });

  it('takes the line written later when two fire at once, and none when there is none', () => {
    const two: TimetableLine[] = [
      { at: '0 12 * * *', command: 'hold' },
      { at: '0 12 * * *', command: 'discharge' },
    ];
    expect(lastFired(two, MADRID, at('2026-07-01T12:00:00Z'))?.command).toBe('discharge');
    expect(lastFired([], MADRID, 0)).toBeNull();
  });

  it('remembers a weekly line through the week', () => {
    const weekly: TimetableLine[] = [{ at: '30 6 * * SAT', command: 'charge-now' }];
    // Saturday 4 July 2026 06:30 CEST is 04:30 UTC.
    expect(lastFired(weekly, MADRID, at('2026-07-09T20:00:00Z'))?.atMs).toBe(at('2026-07-04T04:30:00Z'));
  });

  it.each(['*/15 8-20 * * MON-FRI', '0,30 3 1,15 JUN-SEP *', '0 3 * * 7', '7 0-23/2 * 6 sun'])(
    'fires on %s, which the check of the site file lets pass',
    (line) => {
      expect(cronFault(line)).toBeNull();
      const fired = firedBetween(
        [{ at: line, command: 'hold' }],
        MADRID,
        at('2026-06-01T00:00Z'),
        at('2026-07-01T00:00Z'),
      );
      expect(fired.length).toBeGreaterThan(0);
    },
  );

  it('passes over a line that is no cron line', () => {
    const bad: TimetableLine[] = [{ at: '0 12 * * SATURDAYS', command: 'discharge' }, ...lines];
    expect(cronFault(bad[0].at)).toContain('SATURDAYS');
    expect(cronFault(bad[1].at)).toBeNull();
    expect(lastFired(bad, MADRID, at('2026-07-01T15:00:00Z'))?.command).toBe('discharge');
    expect(firedBetween([bad[0]], MADRID, 0, at('2026-07-01T15:00:00Z'))).toEqual([]);
  });

  it('fires a line of the hour that spring leaves out at the offset before the change', () => {
    // Madrid 2026-03-29: 02:00 CET becomes 03:00 CEST. 02:30 is read as CET: 01:30 UTC = 03:30 CEST.
    const line: TimetableLine[] = [{ at: '30 2 * * *', command: 'charge-now' }];
    const fired = firedBetween(line, MADRID, at('2026-03-28T12:00:00Z'), at('2026-03-30T12:00:00Z'));
    expect(fired.map((one) => one.atMs)).toEqual([at('2026-03-29T01:30:00Z'), at('2026-03-30T00:30:00Z')]);
    expect(lastFired(line, MADRID, at('2026-03-29T01:29:00Z'))?.atMs).toBe(at('2026-03-28T01:30:00Z'));
    expect(lastFired(line, MADRID, at('2026-03-29T01:30:00Z'))?.atMs).toBe(at('2026-03-29T01:30:00Z'));
  });

  it('fires a line of the hour that autumn repeats once, the first time, and keeps it through the second', () => {
    // Madrid 2026-10-25: 03:00 CEST becomes 02:00 CET. 02:30 happens at 00:30 and at 01:30 UTC.
    const two: TimetableLine[] = [
      { at: '0 1 * * *', command: 'hold' },
      { at: '30 2 * * *', command: 'charge-now' },
    ];
    const fired = firedBetween(two, MADRID, at('2026-10-24T12:00:00Z'), at('2026-10-25T12:00:00Z'));
    expect(fired.map((one) => one.atMs)).toEqual([at('2026-10-24T23:00:00Z'), at('2026-10-25T00:30:00Z')]);
    for (const text of ['00:30', '00:59', '01:00', '01:29', '01:30', '01:31', '05:00']) {
      expect(lastFired(two, MADRID, at(`2026-10-25T${text}:00Z`))?.command).toBe('charge-now');
    }
    expect(lastFired(two, MADRID, at('2026-10-25T00:29:00Z'))?.command).toBe('hold');
  });

  it('has four firings on a 23-hour and on a 25-hour day alike', () => {
    const spring = firedBetween(lines, MADRID, at('2026-03-28T23:00:00Z'), at('2026-03-29T22:00:00Z'));
    const autumn = firedBetween(lines, MADRID, at('2026-10-24T22:00:00Z'), at('2026-10-25T23:00:00Z'));
    expect(spring.map((one) => one.command)).toEqual(['charge-now', 'hold', 'discharge', 'hold']);
    expect(autumn.map((one) => one.command)).toEqual(['charge-now', 'hold', 'discharge', 'hold']);
  });
});

import { describe, expect, it } from 'vitest';
import { createFailureBrake, createPassphraseCheck, createSessions } from '../../src/web/access.ts';
import { isOwnHost, isSameOrigin } from '../../src/web/origin.ts';
import { zoneOffsets } from '../../src/web/zone.ts';
import { HOUR_MS, MINUTE_MS, utcOffsetMs } from '../../src/time.ts';

describe('the passphrase and its sessions', () => {
  it('knows the passphrase and nothing near it', () => {
    const isRight = createPassphraseCheck('melt water');
    expect(isRight('melt water')).toBe(true);
    for (const wrong of ['', 'melt', 'melt water ', 'Melt water', 'melt\u0000water'])
      expect(isRight(wrong)).toBe(false);
  });

  it('ends a session after twelve hours and on closing', () => {
    const sessions = createSessions();
    const first = sessions.open(0);
    const second = sessions.open(0);
    expect(first).not.toBe(second);
    expect(sessions.holds(first, 12 * HOUR_MS - 1)).toBe(true);
    expect(sessions.holds(first, 12 * HOUR_MS)).toBe(false);
    sessions.close(second);
    expect(sessions.holds(second, 1)).toBe(false);
    expect(sessions.holds(undefined, 1)).toBe(false);
  });

  it('forgets the oldest of too many sessions', () => {
    const sessions = createSessions();
    const tokens = Array.from({ length: 33 }, () => sessions.open(0));
    expect(sessions.holds(tokens[0], 1)).toBe(false);
    expect(sessions.holds(tokens[1], 1)).toBe(true);
  });

  it('doubles the pause with each failure beyond five, up to a quarter of an hour', () => {
    const brake = createFailureBrake();
    const pauses = Array.from({ length: 12 }, (_, i) => {
      brake.failed('a', i);
      return brake.waitMs('a', i) / 1000;
    });
    expect(pauses).toEqual([0, 0, 0, 0, 30, 60, 120, 240, 480, 900, 900, 900]);
    expect(brake.waitMs('b', 11)).toBe(0);
    expect(brake.waitMs('a', 11 + 900_000)).toBe(0);
    brake.succeeded('a');
    expect(brake.waitMs('a', 12)).toBe(0);
  });
});

describe('where a request comes from', () => {
  it.each([
    ['192.168.1.7:8377', true],
    ['[fd00::7]:8377', true],
    ['localhost:8377', true],
    ['hut.home.arpa', true],
    ['hut.lan:80', true],
    ['cabin.example:8377', true],
    ['evil.example:8377', false],
    ['192.168.1.7.evil.example', false],
    ['', false],
  ])('host %s: %s', (host, own) => {
    expect(isOwnHost(host, ['cabin.example'])).toBe(own);
  });

  it.each([
    [{ origin: 'http://hut:8377', fetchSite: 'same-origin', host: 'hut:8377' }, true, true],
    [{ origin: 'http://hut:8377', fetchSite: undefined, host: 'hut:8377' }, true, true],
    [{ origin: 'http://hut:9000', fetchSite: undefined, host: 'hut:8377' }, true, false],
    [{ origin: 'null', fetchSite: undefined, host: 'hut:8377' }, true, false],
    [{ origin: undefined, fetchSite: undefined, host: 'hut:8377' }, true, false],
    [{ origin: undefined, fetchSite: undefined, host: 'hut:8377' }, false, true],
    [{ origin: 'http://hut:8377', fetchSite: 'same-site', host: 'hut:8377' }, true, false],
    [{ origin: 'http://hut:8377', fetchSite: 'none', host: 'hut:8377' }, true, false],
  ])('origin %o with cookie %s: %s', (from, hasCookie, same) => {
    expect(isSameOrigin(from, hasCookie)).toBe(same);
  });
});

describe('the table of offsets', () => {
  it.each(['Europe/Madrid', 'Australia/Lord_Howe', 'America/Phoenix', 'Africa/Casablanca'])(
    'gives the offset of %s at any minute of the past year',
    (zone) => {
      const nowMs = Date.UTC(2026, 6, 14, 19, 20);
      const table = zoneOffsets(zone, nowMs);
      for (let i = 0; i < 3000; i += 1) {
        const atMs = nowMs - i * (3 * HOUR_MS - MINUTE_MS);
        expect(table.findLast((row) => row.fromMs <= atMs)?.offsetMs).toBe(utcOffsetMs(zone, atMs));
      }
      for (const { fromMs, offsetMs } of table.slice(1)) {
        expect(utcOffsetMs(zone, fromMs)).toBe(offsetMs);
        expect(utcOffsetMs(zone, fromMs - MINUTE_MS)).not.toBe(offsetMs);
      }
    },
  );
});

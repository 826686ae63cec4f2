import { expect, test } from 'vitest';
import { LogVoice } from '../../src/mqtt/log-voice.ts';

const MINUTE = 60_000;

test('speaks from the least level on, and not at all with none', () => {
  const warn = new LogVoice('warn', () => 0);
  expect([warn.mayTell('info', 'a'), warn.mayTell('warn', 'b'), warn.mayTell('error', 'c')]).toEqual([
    false,
    true,
    true,
  ]);
  expect(new LogVoice('none', () => 0).mayTell('error', 'd')).toBe(false);
});

test('the same sentence once in ten minutes', () => {
  let now = 0;
  const voice = new LogVoice('info', () => now);
  const told: number[] = [];
  for (; now < 25 * MINUTE; now += MINUTE) if (voice.mayTell('info', 'again')) told.push(now / MINUTE);
  expect(told).toEqual([0, 10, 20]);
});

test('no more than ten in a minute, and again in the next', () => {
  let now = 0;
  const voice = new LogVoice('info', () => now);
  const count = (): number =>
    Array.from({ length: 30 }, (_, index) => voice.mayTell('info', `${now} ${index}`)).filter(Boolean).length;
  expect(count()).toBe(10);
  now += MINUTE;
  expect(count()).toBe(10);
});

test('a clock that is set back does not silence it', () => {
  let now = 100 * 365 * 24 * 60 * MINUTE;
  const voice = new LogVoice('info', () => now);
  expect(voice.mayTell('info', 'a')).toBe(true);
  now = 0;
  expect(voice.mayTell('info', 'a')).toBe(true);
});

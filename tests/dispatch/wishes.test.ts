import { describe, expect, it } from 'vitest';
import { COMMANDS, WISHES, type Command, type WishName } from '../../src/commands.ts';
import { roomWantsCooling, wishNow, withWish } from '../../src/dispatch/wishes.ts';

const TABLE: Record<WishName, Record<Command, Command>> = {
  none: {
    hold: 'hold',
    'charge-now': 'charge-now',
    discharge: 'discharge',
    'charge-and-discharge': 'charge-and-discharge',
  },
  'cool-now': {
    hold: 'discharge',
    'charge-now': 'charge-and-discharge',
    discharge: 'discharge',
    'charge-and-discharge': 'charge-and-discharge',
  },
  'save-ice': {
    hold: 'hold',
    'charge-now': 'charge-now',
    discharge: 'hold',
    'charge-and-discharge': 'charge-now',
  },
  'make-ice': {
    hold: 'charge-now',
    'charge-now': 'charge-now',
    discharge: 'charge-and-discharge',
    'charge-and-discharge': 'charge-and-discharge',
  },
  'stand-down': { hold: 'hold', 'charge-now': 'hold', discharge: 'hold', 'charge-and-discharge': 'hold' },
};

describe('wishes', () => {
  for (const name of WISHES) {
    it.each(COMMANDS)(`${name} makes of %s`, (asked) => {
      expect(withWish(asked, { name, untilMs: 1 })).toBe(TABLE[name][asked]);
    });
  }

  it('gives itself back when its time is over', () => {
    const wish = { name: 'cool-now', untilMs: 1000 } as const;
    expect(wishNow(wish, 999)).toBe(wish);
    expect(wishNow(wish, 1000)).toBeNull();
  });
});

describe('the room', () => {
  it('is cooled above its band, left below it, and keeps doing what it did inside it', () => {
    expect(roomWantsCooling(25.5, 25.5, false)).toBe(true);
    expect(roomWantsCooling(25.1, 25.5, false)).toBe(false);
    expect(roomWantsCooling(25.1, 25.5, true)).toBe(true);
    expect(roomWantsCooling(24.8, 25.5, true)).toBe(false);
    expect(roomWantsCooling(null, 25.5, false)).toBe(true);
  });
});

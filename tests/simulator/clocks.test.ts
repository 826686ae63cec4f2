import { describe, expect, it } from 'vitest';
import { createLapseClock } from '../../src/simulator/lapse-clock.ts';
import { createSteppedClock } from '../../src/simulator/stepped-clock.ts';

/** A real time that the test moves, with timers that fire when it says so. */
function fakeReal() {
  const stepped = createSteppedClock(1_000_000);
  let asleepMs = 0;
  return {
    nowMs: () => stepped.nowMs() + asleepMs,
    setTimer: (callback: () => void, delayMs: number) => stepped.after(delayMs, callback),
    pass: (ms: number) => stepped.advance(ms),
    /** Time passes while nothing can run: a laptop's lid is shut. */
    sleep: (ms: number) => (asleepMs += ms),
  };
}

describe('a lapse clock', () => {
  it('runs faster by its factor from its epoch', () => {
    const real = fakeReal();
    const clock = createLapseClock({
      epochMs: 5000,
      factor: 60,
      realNowMs: real.nowMs,
      setTimer: real.setTimer,
    });
    expect(clock.nowMs()).toBe(5000);
    real.pass(1000);
    expect(clock.nowMs()).toBe(65_000);
  });

  it('beats at whole periods and does not drift', () => {
    const real = fakeReal();
    const clock = createLapseClock({
      epochMs: 0,
      factor: 100,
      realNowMs: real.nowMs,
      setTimer: real.setTimer,
    });
    const beats: number[] = [];
    clock.every(3000, () => beats.push(clock.nowMs()));
    real.pass(30 * 10);
    expect(beats).toEqual([3000, 6000, 9000, 12_000, 15_000, 18_000, 21_000, 24_000, 27_000, 30_000]);
  });

  it('gives one beat after a long sleep, not a flood, and the next at its old place', () => {
    const real = fakeReal();
    const clock = createLapseClock({
      epochMs: 0,
      factor: 10,
      realNowMs: real.nowMs,
      setTimer: real.setTimer,
    });
    const beats: number[] = [];
    clock.every(1000, () => beats.push(clock.nowMs()));
    real.pass(100);
    real.sleep(5050);
    real.pass(100);
    // The timer set for 2,000 fires at 52,500; fifty beats are skipped and the next stands at a whole period.
    expect(beats).toEqual([1000, 52_500]);
    real.pass(50);
    expect(beats).toEqual([1000, 52_500, 53_000]);
  });

  it('is stopped from outside and from within a beat', () => {
    const real = fakeReal();
    const clock = createLapseClock({
      epochMs: 0,
      factor: 10,
      realNowMs: real.nowMs,
      setTimer: real.setTimer,
    });
    let outside = 0;
    let inside = 0;
    const stop = clock.every(1000, () => outside++);
    const stopInside = clock.every(1000, () => {
      inside++;
      stopInside();
    });
    const never = clock.after(1500, () => (outside += 100));
    real.pass(100);
    stop();
    never();
    real.pass(1000);
    expect([outside, inside]).toEqual([1, 1]);
  });

  it('goes on beating after a callback that throws', () => {
    const real = fakeReal();
    const clock = createLapseClock({ epochMs: 0, factor: 1, realNowMs: real.nowMs, setTimer: real.setTimer });
    let beats = 0;
    clock.every(10, () => {
      beats++;
      if (beats === 1) throw new Error('one bad beat');
    });
    expect(() => real.pass(10)).toThrow('one bad beat');
    real.pass(10);
    expect(beats).toBe(2);
  });

  it('waits longer than a timer can, and works with the timers of Node', async () => {
    const real = fakeReal();
    const clock = createLapseClock({ epochMs: 0, factor: 1, realNowMs: real.nowMs, setTimer: real.setTimer });
    let called = 0;
    clock.after(3_000_000_000, () => called++);
    real.pass(2_147_483_647);
    expect(called).toBe(0);
    real.pass(852_516_353);
    expect(called).toBe(1);
    const own = createLapseClock({ epochMs: 0, factor: 1000, realNowMs: () => performance.now() });
    await new Promise<void>((resolve) => own.after(5000, resolve));
    expect(own.nowMs()).toBeGreaterThanOrEqual(5000);
  });

  it.each([0, -1, Number.NaN])('refuses the factor %s', (factor) => {
    expect(() => createLapseClock({ epochMs: 0, factor, realNowMs: () => 0 })).toThrow(RangeError);
  });
});

describe('a stepped clock', () => {
  it('calls what is due in order of time, then of registration, each at its own instant', () => {
    const clock = createSteppedClock(0);
    const calls: string[] = [];
    clock.every(20, () => calls.push(`every ${clock.nowMs()}`));
    clock.after(40, () => calls.push(`after ${clock.nowMs()}`));
    clock.after(10, () => clock.after(5, () => calls.push(`nested ${clock.nowMs()}`)));
    clock.advance(45);
    expect(calls).toEqual(['nested 15', 'every 20', 'every 40', 'after 40']);
    expect(clock.nowMs()).toBe(45);
  });

  it('stops', () => {
    const clock = createSteppedClock(0);
    let beats = 0;
    const stop = clock.every(10, () => beats++);
    clock.advance(25);
    stop();
    clock.advance(100);
    expect(beats).toBe(2);
  });
});

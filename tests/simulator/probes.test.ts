import { describe, expect, it } from 'vitest';
import type { PointId, Reading } from '../../src/points.ts';
import { PERFECT_PROBE, type ProbeFaults } from '../../src/simulator/probe-faults.ts';
import { DAY_MS, HOUR_MS } from '../../src/time.ts';
import { simulate, siteNamed, START_MS, stillAir } from './site.ts';

const SITE = siteNamed('juniper');
const POINT = 'bank-bottom';

/** One probe with the faults given and all others perfect, on a bank at rest in steady air. */
function readingsOf(
  faults: Partial<ProbeFaults>,
  spanMs = 6 * HOUR_MS,
  point: PointId = POINT,
): { all: Reading[]; truthC: number } {
  const simulator = simulate({
    site: { ...SITE, points: { 'bank-bottom': SITE.points[POINT], 'bank-surround': SITE.points[POINT] } },
    weather: stillAir(24),
    probes: {
      'bank-bottom': { ...PERFECT_PROBE, ...faults },
      'bank-surround': { ...PERFECT_PROBE },
    },
    start: { iceKg: 60, waterC: 0.5, roomC: 24 },
  });
  const all = simulator.advance(START_MS + spanMs).filter((reading) => reading.point === point);
  return { all, truthC: simulator.truth().layersC[6] };
}

describe('a perfect probe', () => {
  it('shows the truth at its own period', () => {
    const { all, truthC } = readingsOf({ periodMs: 30_000 });
    expect(all.length).toBe((6 * HOUR_MS) / 30_000);
    expect(all.at(-1)?.value).toBeCloseTo(truthC, 2);
  });
});

describe('faults', () => {
  it('are steps, offset and noise', () => {
    const { all, truthC } = readingsOf({ stepC: 0.0625, offsetK: 0.31, noise: 0.05 });
    const values = all.map((reading) => reading.value);
    for (const value of values) expect((value / 0.0625) % 1).toBeCloseTo(0, 6);
    const tail = values.slice(-200);
    // 200 readings of 0.05 K noise and steps of a sixteenth: the mean is within 0.02 K, the truth drifts less.
    expect(tail.reduce((a, b) => a + b, 0) / tail.length - truthC - 0.31).toBeCloseTo(0, 1);
    expect(new Set(values).size).toBeGreaterThan(2);
  });

  it('are glitches of 85 and −127 at about the rate asked for', () => {
    const { all } = readingsOf({ glitchPerDay: 60 }, 2 * DAY_MS);
    const glitches = all.filter(({ value }) => value === 85 || value === -127);
    // Poisson of mean 120: 75 … 165 is four standard deviations.
    expect(glitches.length).toBeGreaterThan(75);
    expect(glitches.length).toBeLessThan(165);
    expect(new Set(glitches.map(({ value }) => value)).size).toBe(2);
  });

  it('are silences', () => {
    const { all } = readingsOf({ dropoutPerDay: 12, dropoutS: 900 }, 2 * DAY_MS);
    const gaps = all.slice(1).map((reading, i) => reading.atMs - all[i].atMs);
    expect(Math.max(...gaps)).toBeGreaterThan(5 * 60_000);
    expect(all.length).toBeLessThan((2 * DAY_MS) / 30_000 - 100);
  });

  it('are a probe that sticks, one that hangs in the air, and one in another place', () => {
    const stuck = readingsOf({ stuckFromMs: START_MS + HOUR_MS, noise: 0.1 }).all;
    const late = stuck.filter(({ atMs }) => atMs > START_MS + HOUR_MS).map(({ value }) => value);
    expect(new Set(late).size).toBe(1);
    const fallen = readingsOf({ fallenOutAtMs: START_MS + HOUR_MS, lagS: 60 }).all;
    expect(fallen.at(-1)?.value).toBeGreaterThan(20);
    expect(fallen[10].value).toBeLessThan(3);
    const swapped = readingsOf({ swappedWith: 'bank-surround' }).all;
    expect(swapped[10].value).toBeGreaterThan(20);
  });

  it('are lag: a step is followed by 63 % after one time constant', () => {
    const { all } = readingsOf({ fallenOutAtMs: START_MS + HOUR_MS, lagS: 600, periodMs: 10_000 });
    const at = (ms: number): number => all.find(({ atMs }) => atMs >= ms)?.value ?? Number.NaN;
    const before = at(START_MS + HOUR_MS - 10_000);
    const after = at(START_MS + HOUR_MS + 600_000 - 10_000);
    expect((after - before) / (24 - before)).toBeCloseTo(1 - Math.exp(-1), 1);
  });

  it('are readings late, out of order and twice, in order of arrival with their own time', () => {
    const straggling = readingsOf({ straggles: 0.2 }).all;
    const backwards = straggling.slice(1).filter((reading, i) => reading.atMs < straggling[i].atMs);
    expect(backwards.length).toBeGreaterThan(20);
    const twice = readingsOf({ duplicate: 0.3 }).all;
    expect(twice.length - new Set(twice.map(({ atMs }) => atMs)).size).toBeGreaterThan(100);
    const late = readingsOf({ lateS: 900 }).all;
    expect(late.at(-1)?.atMs).toBeLessThanOrEqual(START_MS + 6 * HOUR_MS - 900_000);
  });

  it('are reports only on change, and at least now and then', () => {
    const { all } = readingsOf({ onChangeOnly: 5, atLeastMs: 600_000 });
    expect(all.length).toBeLessThanOrEqual(37);
    expect(all.length).toBeGreaterThanOrEqual(35);
  });
});

describe('ordinary probes', () => {
  it('report at the pace of their kind and for the configured points alone', () => {
    const simulator = simulate({ site: SITE });
    const all = simulator.advance(START_MS + DAY_MS);
    const count = (point: PointId): number => all.filter((reading) => reading.point === point).length;
    expect(new Set(all.map(({ point }) => point))).toEqual(new Set(Object.keys(SITE.points)));
    expect(count('leaving-water')).toBeGreaterThan(DAY_MS / 30_000 - 300);
    expect(count('leaving-water')).toBeLessThanOrEqual(DAY_MS / 30_000);
    expect(count('room-temperature')).toBeLessThanOrEqual(1.1 * (DAY_MS / 60_000));
    expect(count('room-temperature')).toBeGreaterThan(DAY_MS / 600_000);
  });

  it('tell of a switched machine at once', () => {
    const simulator = simulate({ site: SITE, start: { iceKg: 60 } });
    simulator.advance(START_MS + HOUR_MS);
    simulator.switch('pump', true);
    const soon = simulator.advance(START_MS + HOUR_MS + 10_000);
    const power = soon.find(({ point }) => point === 'pump-power');
    expect(power?.value).toBeGreaterThan(30);
  });
});

import { describe, expect, it } from 'vitest';
import { createRandom, xoshiro128StarStar, type Random } from '../../src/numerics/random.ts';

const draw = (count: number, next: () => number): number[] => Array.from({ length: count }, next);
const mean = (values: readonly number[]): number => values.reduce((sum, v) => sum + v, 0) / values.length;

function correlation(a: Random, b: Random, count: number): number {
  const pairs = Array.from({ length: count }, () => [a.normal(), b.normal()] as const);
  return mean(pairs.map(([x, y]) => x * y));
}

describe('xoshiro128**', () => {
  it('gives the outputs of its authors’ reference code from the state 1, 2, 3, 4', () => {
    // xoshiro128starstar.c v1.1 (Blackman & Vigna), as quoted in the tests of rand_xoshiro.
    const expected = [
      11520, 0, 5927040, 70819200, 2031721883, 1637235492, 1287239034, 3734860849, 3729100597, 4258142804,
    ];
    expect(draw(10, xoshiro128StarStar([1, 2, 3, 4]))).toEqual(expected);
  });
});

describe('a seeded stream', () => {
  it('repeats for the same seed and differs for others', () => {
    expect(draw(5, createRandom(7).next)).toEqual(draw(5, createRandom(7).next));
    const firsts = Array.from({ length: 1000 }, (_, seed) => createRandom(seed).next());
    expect(new Set(firsts).size).toBe(1000);
    // Neighbouring seeds give firsts spread evenly: mean within 4 standard errors of a half.
    expect(Math.abs(mean(firsts) - 0.5)).toBeLessThan(4 / Math.sqrt(12 * 1000));
  });

  it('is uniform in [0, 1): chi-square over 100 bins', () => {
    const { next } = createRandom(20_260_301);
    const counts = Array.from({ length: 100 }, () => 0);
    const values = draw(100_000, next);
    expect(values.every((value) => value >= 0 && value < 1)).toBe(true);
    for (const value of values) counts[Math.floor(value * 100)] += 1;
    const chiSquare = counts.reduce((sum, n) => sum + (n - 1000) ** 2 / 1000, 0);
    // 99 degrees of freedom: the 0.01 % and 99.99 % points are 54 and 160.
    expect(chiSquare).toBeGreaterThan(54);
    expect(chiSquare).toBeLessThan(160);
  });

  it.each([1, 99, 123_456_789])('has standard normal moments (seed %i)', (seed) => {
    const { normal } = createRandom(seed);
    const values = draw(100_000, normal);
    const moment = (power: number): number => mean(values.map((v) => v ** power));
    // Four standard errors of each moment of 100,000 normals.
    expect(Math.abs(moment(1))).toBeLessThan(4 * Math.sqrt(1 / 1e5));
    expect(Math.abs(moment(2) - 1)).toBeLessThan(4 * Math.sqrt(2 / 1e5));
    expect(Math.abs(moment(3))).toBeLessThan(4 * Math.sqrt(15 / 1e5));
    expect(Math.abs(moment(4) - 3)).toBeLessThan(4 * Math.sqrt(96 / 1e5));
    const beyond = values.filter((v) => Math.abs(v) > 1.959964).length / 1e5;
    expect(Math.abs(beyond - 0.05)).toBeLessThan(4 * Math.sqrt((0.05 * 0.95) / 1e5));
  });

  it('forks streams that depend on seed and label only', () => {
    const used = createRandom(3);
    draw(10, used.normal);
    expect(draw(5, used.fork('weather').next)).toEqual(draw(5, createRandom(3).fork('weather').next));
    const names = ['weather', 'probes', '', 'a', 'b', 'weather '];
    const seeds = [3, 4, 0, -1, 0.5];
    const firsts = seeds.flatMap((seed) => names.map((name) => createRandom(seed).fork(name).next()));
    expect(new Set(firsts).size).toBe(seeds.length * names.length);
  });

  it('is not correlated with its forks, nor they with each other', () => {
    const limit = 4 / Math.sqrt(20_000);
    const parent = createRandom(11);
    expect(Math.abs(correlation(createRandom(11), parent.fork('a'), 20_000))).toBeLessThan(limit);
    expect(Math.abs(correlation(parent.fork('a'), parent.fork('b'), 20_000))).toBeLessThan(limit);
    expect(Math.abs(correlation(parent.fork('a'), createRandom(12).fork('a'), 20_000))).toBeLessThan(limit);
  });

  it.each([Number.NaN, Infinity])('refuses the seed %d', (seed) => {
    expect(() => createRandom(seed)).toThrow(RangeError);
  });
});

/**
 * The recursive filter against an independent batch estimate of the same data: an all-liquid bank that warms at rest.
 * The batch fits T(t) = surround − (surround − T₀)·exp(−UA·t/C) to all readings at once by least squares.
 */
import { describe, expect, it } from 'vitest';
import { createEstimator } from '../../src/estimation/estimator.ts';
import { siteOf } from '../plant/site.ts';
import { T0, Twin } from './twin.ts';

const SURROUND_C = 22;
const HEAT_CAPACITY_J_PER_K = 240 * 4200;

/** Sum of squares at a conductance, with the best start temperature for it (linear in it). */
function misfit(times: readonly number[], temperatures: readonly number[], wPerK: number): number {
  let above = 0;
  let below = 0;
  const decay = times.map((s) => Math.exp((-wPerK * s) / HEAT_CAPACITY_J_PER_K));
  decay.forEach((d, i) => {
    above += d * (SURROUND_C - temperatures[i]);
    below += d * d;
  });
  const gapK = above / below;
  return decay.reduce((sum, d, i) => sum + (SURROUND_C - gapK * d - temperatures[i]) ** 2, 0);
}

function batchWPerK(times: readonly number[], temperatures: readonly number[]): number {
  let low = 0.2;
  let high = 8;
  for (let i = 0; i < 60; i++) {
    const left = low + 0.382 * (high - low);
    const right = low + 0.618 * (high - low);
    if (misfit(times, temperatures, left) < misfit(times, temperatures, right)) high = right;
    else low = left;
  }
  return 0.5 * (low + high);
}

describe('filter against batch', () => {
  it.each([
    [1, '1.5 W/K'],
    [2, '2.9 W/K'],
  ])('agree on the heat leak of a bank that warms at rest (seed %i, site file says %s)', (seed, written) => {
    const site = siteOf(
      'ice-on-coil-external',
      { 'heat-leak': written },
      {
        points: ['bank-middle', 'bank-surround', 'pump-power'],
      },
    );
    const points = [
      'bank-middle',
      'bank-surround',
      'chiller-power',
      'pump-power',
      'room-temperature',
    ] as const;
    const twin = new Twin({ iceKg: 0, seed, points });
    twin.waterC = 7;
    const estimator = createEstimator(site, { seed: 1, startMs: T0 });
    estimator.anchor('empty');
    const prior = estimator.estimate();
    const readings = twin.run(30 * 60);
    estimator.advance(twin.atMs, readings, null);
    const water = readings.filter(({ point }) => point === 'bank-middle');
    const batch = batchWPerK(
      water.map(({ atMs }) => (atMs - T0) / 1000),
      water.map(({ value }) => value),
    );
    // The twin's leak is 2.2 W/K; thirty hours of clean readings leave the batch next to nothing to err by.
    expect(Math.abs(batch - 2.2)).toBeLessThan(0.05);
    const { heatLeakWPerK, heatLeakSd } = estimator.estimate();
    // A leak is known as a factor: its relative deviation is what narrows.
    expect(heatLeakSd / heatLeakWPerK).toBeLessThan((0.8 * prior.heatLeakSd) / prior.heatLeakWPerK);
    expect(Math.abs(heatLeakWPerK - batch)).toBeLessThan(2 * heatLeakSd);
    expect(Math.abs(heatLeakWPerK - batch)).toBeLessThan(0.75 * Math.abs(prior.heatLeakWPerK - batch));
  });
});

describe('innovations', () => {
  it('are no larger than the filter expects, over a night of making and melting ice', () => {
    const site = siteOf(
      'ice-on-coil-external',
      {},
      { points: ['entering-water', 'pump-power', 'loop-flow'] },
    );
    const twin = new Twin({ iceKg: 70 });
    const estimator = createEstimator(site, { seed: 1, startMs: T0 });
    for (const [chiller, pump, hours] of [
      [true, false, 5],
      [false, true, 3],
      [true, false, 5],
      [false, true, 3],
    ] as const) {
      twin.chiller = chiller;
      twin.pump = pump;
      const readings = twin.run(hours * 60);
      estimator.advance(twin.atMs, readings, null);
    }
    // Noise stands for errors that last, so single innovations are far smaller than it: an upper bound is the test.
    for (const nis of Object.values(estimator.estimate().innovation)) expect(nis).toBeLessThan(1.5);
  });
});

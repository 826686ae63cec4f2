/** Instruments that know the ice outright for a moment: what they do to the estimate, and that they never make it leap. */
import { describe, expect, it } from 'vitest';
import { createEstimator, type Estimator } from '../../src/estimation/estimator.ts';
import type { PointId, Reading } from '../../src/points.ts';
import { siteOf } from '../plant/site.ts';
import { T0, Twin } from './twin.ts';

const HEARD: readonly PointId[] = [
  'leaving-water',
  'entering-water',
  'chiller-power',
  'pump-power',
  'loop-flow',
];
const CAPACITY_KWH = 16.7;

interface Played {
  readonly estimator: Estimator;
  readonly twin: Twin;
  /** Largest change in a minute, as a part of the interval's width just before. */
  readonly worstLeap: number;
}

/** Charges a bank of 40 kg, of which nobody has told the estimator, to `untilKg`. */
function charge(
  bank: Readonly<Record<string, string>>,
  untilKg: number,
  extra: (twin: Twin) => Omit<Reading, 'atMs'>[],
): Played {
  const names = extra(new Twin({ iceKg: 40 })).map(({ point }) => point);
  const site = siteOf('ice-on-coil-external', bank, { points: [...HEARD, ...names].slice(1) });
  const twin = new Twin({ iceKg: 40, points: HEARD });
  const estimator = createEstimator(site, { seed: 1, startMs: T0 });
  let worstLeap = 0;
  twin.chiller = true;
  let before = estimator.estimate();
  while (twin.iceKg < untilKg) {
    const readings = twin.run(1);
    const said = extra(twin).map((one): Reading => ({ ...one, atMs: twin.atMs }));
    estimator.advance(twin.atMs, [...readings, ...said], null);
    const now = estimator.estimate();
    const width = before.highKwh - before.lowKwh;
    worstLeap = Math.max(worstLeap, Math.abs(now.iceOnHandKwh - before.iceOnHandKwh) / width);
    before = now;
  }
  return { estimator, twin, worstLeap };
}

const errorKwh = ({ estimator, twin }: Played): number =>
  Math.abs(estimator.estimate().iceOnHandKwh - twin.onHandKwh());
const widthKwh = ({ estimator }: Played): number => {
  const { lowKwh, highKwh } = estimator.estimate();
  return highKwh - lowKwh;
};

describe('a thickness electrode', () => {
  const bank = { 'electrode-ice': '75 kg' };
  const electrode = (twin: Twin): Omit<Reading, 'atMs'>[] => [
    { point: 'ice-at-electrode', value: twin.iceKg >= 75 ? 1 : 0 },
  ];

  it('ties the estimate down as ice reaches it, without a leap beyond the interval', () => {
    const blind = charge(bank, 90, () => []);
    const told = charge(bank, 90, electrode);
    // The electrode is taken for right within 5 % of a full bank; a tenth of it is twice that.
    expect(errorKwh(told)).toBeLessThan(0.1 * CAPACITY_KWH);
    expect(widthKwh(told)).toBeLessThan(0.6 * widthKwh(blind));
    expect(told.worstLeap).toBeLessThan(1);
  });
});

describe('a full bank', () => {
  // 42.5 mm of rise for 150 kg of held ice on 0.32 m² (IAPWS densities): 792.5 mm is full.
  const bank = { 'empty-level': '750 mm', 'full-level': '792 mm' };

  it('is known by its level', () => {
    const blind = charge(bank, 150, () => []);
    const told = charge(bank, 150, (twin) => [
      { point: 'bank-level', value: 750 + (1000 * twin.iceKg * (1 / 916.72 - 1 / 999.84)) / 0.32 },
    ]);
    expect(errorKwh(told)).toBeLessThan(0.1 * CAPACITY_KWH);
    expect(widthKwh(told)).toBeLessThan(0.6 * widthKwh(blind));
    expect(told.worstLeap).toBeLessThan(1);
  });

  it('is known by its coolant', () => {
    const cold = { 'full-coolant': '-12 °C' };
    const blind = charge(cold, 150, () => []);
    const told = charge(cold, 150, (twin) => [
      { point: 'coolant-supply', value: twin.iceKg > 148 ? -12.5 : -5 - twin.iceKg / 25 },
    ]);
    expect(errorKwh(told)).toBeLessThan(0.1 * CAPACITY_KWH);
    expect(widthKwh(told)).toBeLessThan(0.6 * widthKwh(blind));
    expect(told.worstLeap).toBeLessThan(1);
  });
});

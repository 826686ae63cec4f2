import { describe, expect, it } from 'vitest';
import type { PublishedValue } from './published-value.ts';
import { comfort } from './tables/comfort.ts';
import { freezingFront } from './tables/freezing.ts';
import { heatExchangers } from './tables/heat-exchanger.ts';
import { moistAir } from './tables/moist-air.ts';
import { refrigeration } from './tables/refrigeration.ts';
import { sun } from './tables/sun.ts';
import { tankCurves } from './tables/tank-curve.ts';
import { waterAndIce } from './tables/water.ts';

const TABLES: Readonly<Record<string, readonly PublishedValue[]>> = {
  'water and ice': waterAndIce,
  'moist air': moistAir,
  'heat exchangers': heatExchangers,
  refrigeration,
  sun,
  comfort,
  'freezing front': freezingFront,
  'tank curves': tankCurves,
};

const isWithin = (found: number | null, row: PublishedValue): boolean =>
  found !== null && Math.abs(found - row.expected) <= row.tolerance;

describe.each(Object.entries(TABLES))('%s agrees with what is published', (_topic, rows) => {
  it.each(rows)('$what = $expected ($source)', (row) => {
    const found = row.value();
    expect(
      isWithin(found, row),
      `found ${found}, expected ${row.expected} ± ${row.tolerance}: ${row.why}`,
    ).toBe(true);
  });
});

describe('the published values', () => {
  const all = Object.values(TABLES).flat();

  it('are at least 60, each checked once and each with source, reason and standing', () => {
    console.info(`${all.length} published values checked`);
    expect(all.length).toBeGreaterThanOrEqual(60);
    expect(new Set(all.map((row) => `${row.source}: ${row.what}`)).size).toBe(all.length);
    for (const row of all) {
      expect(row.source.length, row.what).toBeGreaterThan(10);
      expect(row.why.length, row.what).toBeGreaterThan(3);
      expect(Number.isFinite(row.expected) && row.tolerance >= 0, row.what).toBe(true);
    }
  });

  it('number at least 60 without the remembered ones', () => {
    expect(all.filter((row) => row.standing !== 'from memory').length).toBeGreaterThanOrEqual(60);
  });

  it('fail when a figure moves by more than its tolerance', () => {
    const missing = all.filter((row) => {
      const moved = { ...row, expected: row.expected + 2.001 * row.tolerance + 1e-9 };
      return isWithin(row.value(), moved);
    });
    expect(missing.map((row) => row.what)).toEqual([]);
  });
});

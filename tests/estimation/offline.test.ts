import { expect, it } from 'vitest';
import { estimateLog } from '../../src/estimation/offline.ts';
import type { Reading } from '../../src/points.ts';
import { HOUR_MS, MINUTE_MS } from '../../src/time.ts';
import { siteOf } from '../plant/site.ts';

const site = siteOf('ice-on-coil-external');
const START_MS = Date.UTC(2026, 6, 14, 12);
const water = (atMs: number): Reading => ({ point: 'leaving-water', atMs, value: 12 });

it('gives a row a minute, also over an hour of silence', () => {
  const rows = estimateLog(site, [water(START_MS), water(START_MS + HOUR_MS)]);
  expect(rows.length).toBe(61);
  expect(rows[1].atMs - rows[0].atMs).toBe(MINUTE_MS);
});

it('passes over years of silence, so that one absurd date does not keep it for ever', () => {
  const log = [water(Date.UTC(2001, 0, 1)), water(START_MS), water(START_MS + HOUR_MS)];
  const rows = estimateLog(site, log);
  expect(rows.length).toBe(62);
  expect(rows.every((row) => Number.isFinite(row.iceOnHandKwh) && row.lowKwh <= row.highKwh)).toBe(true);
});

it('gives nothing for an empty log', () => {
  expect(estimateLog(site, [])).toEqual([]);
});

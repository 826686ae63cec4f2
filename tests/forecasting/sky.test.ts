import { describe, expect, it } from 'vitest';
import type { HourLine } from '../../src/forecasting/hour-line.ts';
import { clearOnPanels, filePlane, learnPanels, panelClearness } from '../../src/forecasting/panels.ts';
import { clearSkyOf, rangeClearness, sunHourOf, SunTable } from '../../src/forecasting/sky.ts';
import { skyScores } from '../../src/forecasting/sky-score.ts';
import { normalQuantile } from '../../src/numerics/normal.ts';
import { createRandom } from '../../src/numerics/random.ts';
import { HOUR_MS } from '../../src/time.ts';
import { cabinSite, MIDSUMMER_MS } from './site.ts';

const FIRST = MIDSUMMER_MS / HOUR_MS;

const clear = (day: number): number => (day % 3 === 0 ? 1 : 0.5);

const range = (day: number): number => (day % 2 === 0 ? 14 : 4);

describe('clearness', () => {
  const config = cabinSite({ power: { island: { panels: '2 kW' } } });
  const lineAt = (hour: number, panelW: number | null, outdoorC: number): HourLine => ({
    hour,
    outdoorC,
    dewC: null,
    roomC: null,
    roomEndC: null,
    roomW: null,
    panelW,
    clearWPerM2: clearSkyOf(config, hour),
    machineHeatW: null,
    sensibleW: 0,
    latentW: null,
    home: 0,
  });

  it('comes from panel power, and shade at one hour of the day is learned', () => {
    const plane = filePlane(config);
    const lines = Array.from({ length: 30 * 24 }, (_, i) => {
      const hour = FIRST + i;
      const shade = hour % 24 === 9 ? 0.3 : 1;
      const clearW = clearOnPanels(plane, sunHourOf(config, hour), 25);
      return lineAt(hour, 1.7 * shade * clear(Math.floor(i / 24)) * clearW, 25);
    });
    const table = new SunTable(config);
    const panels = learnPanels(config, lines, table);
    expect(panels?.scale[9]).toBeCloseTo(1.7 * 0.3, 2);
    const clearness = panels ? panelClearness(panels, lines, table) : [];
    for (const i of [9, 12, 15]) {
      expect(clearness[29 * 24 + i]).toBeCloseTo(0.5, 2);
      expect(clearness[27 * 24 + i]).toBeCloseTo(1, 2);
    }
    expect(clearness[0]).toBeNull();
  });

  it('finds the plane that panels face where the file tells another, and keeps the file where it fits', () => {
    const random = createRandom(3);
    const skies = Array.from({ length: 30 }, () => Math.min(1, 0.4 + 0.9 * random.next()));
    const facing = (tiltDeg: number, azimuthDeg: number) =>
      Array.from({ length: 30 * 24 }, (_, i) => {
        const airC = 24 + 8 * Math.sin(((i - 9) * Math.PI) / 12);
        const clearW = clearOnPanels({ tiltDeg, azimuthDeg }, sunHourOf(config, FIRST + i), airC);
        return lineAt(FIRST + i, 1.5 * skies[Math.floor(i / 24)] * clearW, airC);
      });
    const learned = (tiltDeg: number, azimuthDeg: number) =>
      learnPanels(config, facing(tiltDeg, azimuthDeg), new SunTable(config))?.plane;
    const east = learned(50, 110);
    expect(Math.abs((east?.tiltDeg ?? 0) - 50)).toBeLessThanOrEqual(5);
    expect(Math.abs((east?.azimuthDeg ?? 0) - 110)).toBeLessThanOrEqual(5);
    expect(learned(30, 180)).toEqual(filePlane(config));
  });

  it('reads a day by the scale that was known on it, not by the day itself', () => {
    const plane = filePlane(config);
    const growing = Array.from({ length: 40 * 24 }, (_, i) =>
      lineAt(FIRST + i, (1 + i / 2400) * clearOnPanels(plane, sunHourOf(config, FIRST + i), 25), 25),
    );
    const table = new SunTable(config);
    const panels = learnPanels(config, growing, table);
    const clearness = panels ? panelClearness(panels, growing, table) : [];
    // panels that gain 1 % a day stay a little above what was known of them, by as much on each day
    for (const day of [25, 30, 38]) expect(clearness[day * 24 + 12]).toBeGreaterThan(1.005);
    expect(Math.abs((clearness[25 * 24 + 12] ?? 0) - (clearness[38 * 24 + 12] ?? 0))).toBeLessThan(0.02);
  });

  it('comes from the daily range of temperature where there are no panels: wide is clear', () => {
    const grid = cabinSite({
      site: { id: 's', name: 's', zone: 'UTC', latitude: '38 deg', longitude: '0 deg' },
    });
    const lines = Array.from({ length: 10 * 24 }, (_, i) =>
      lineAt(FIRST + i, null, 22 + (range(Math.floor(i / 24)) / 2) * Math.sin(((i - 9) * Math.PI) / 12)),
    );
    const clearness = rangeClearness(lines, grid.site.longitudeDeg);
    expect(clearness[4 * 24 + 12]).toBeGreaterThan(0.9);
    expect(clearness[5 * 24 + 12]).toBeLessThan(0.4);
  });
});

describe('scores of the sky', () => {
  it('stand on normal deviates', () => {
    // Abramowitz & Stegun 1964, table 26.1
    for (const [p, z] of [
      [0.5, 0],
      [0.9, 1.28155],
      [0.025, -1.95996],
      [0.999, 3.09023],
    ])
      expect(Math.abs(normalQuantile(p) - z)).toBeLessThan(4.5e-4);
  });

  it('come back as the clearness that they stand for, and promise none that was never seen', () => {
    const random = createRandom(21);
    const values = Array.from({ length: 40 * 24 }, (_, i) =>
      i % 24 > 5 && i % 24 < 20 ? (random.next() < 0.6 ? 0.98 + 0.02 * random.next() : random.next()) : null,
    );
    const scores = skyScores({ firstHour: FIRST, values });
    for (const clearness of [0.1, 0.4, 0.8, 0.985, 0.995]) {
      expect(scores.clearnessOf(FIRST + 12, scores.scoreOf(FIRST + 12, clearness))).toBeCloseTo(clearness, 6);
    }
    expect(scores.clearnessOf(FIRST + 12, 9)).toBeLessThan(1.04);
    expect(scores.clearnessOf(FIRST + 12, -9)).toBeGreaterThanOrEqual(0);
    // 60 % of these skies are clear: the median is
    expect(scores.clearnessOf(FIRST + 12, 0)).toBeGreaterThan(0.97);
  });

  it('are those of a usual summer sky before anything was seen', () => {
    const scores = skyScores({ firstHour: FIRST, values: [] });
    expect(scores.clearnessOf(FIRST + 12, 0)).toBeCloseTo(0.85, 2);
  });
});

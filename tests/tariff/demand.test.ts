import { describe, expect, it } from 'vitest';
import { MINUTE_MS } from '../../src/time.ts';
import { demandSoFar, monthAt } from '../../src/tariff/demand.ts';
import { siteWith, utc } from './site.ts';

const config = siteWith({
  tariff: { default: 0.2, demand: { price: 7.5, over: 'PT15M', from: '16:00', to: '20:00' } },
});
const slot = (at: string, importKwh: number, ms = 15 * MINUTE_MS) => ({
  startMs: utc(at),
  endMs: utc(at) + ms,
  importKwh,
  exportKwh: 0,
  heardMs: ms,
});

describe('demand', () => {
  it('is the highest mean power of the month so far in the measured hours', () => {
    const energy = [
      slot('2026-06-30T16:00Z', 9), // last month
      slot('2026-07-01T12:00Z', 5), // 14:00, not measured
      slot('2026-07-01T14:00Z', 0.2),
      slot('2026-07-02T17:45Z', 0.3), // 19:45: 1.2 kW
      slot('2026-07-02T18:00Z', 5), // 20:00, not measured any more
      slot('2026-07-09T15:00Z', 4), // after now
    ];
    const state = demandSoFar(config, energy, utc('2026-07-08T00:00Z'));
    expect(state).toMatchObject({
      price: 7.5,
      peakAtMs: utc('2026-07-02T17:45Z'),
      untilMs: utc('2026-07-31T22:00Z'),
    });
    expect(state?.peakKw).toBeCloseTo(1.2, 12);
  });

  it('gathers shorter slots into one averaging step', () => {
    const energy = [0, 5, 10].map((minute) =>
      slot(`2026-07-02T15:${String(minute).padStart(2, '0')}Z`, minute / 100, 5 * MINUTE_MS),
    );
    expect(demandSoFar(config, energy, utc('2026-07-08T00:00Z'))?.peakKw).toBeCloseTo(0.15 * 4, 12);
  });

  it('is absent without a demand charge and empty at the start of a month', () => {
    expect(demandSoFar(siteWith({ tariff: { default: 0.2 } }), [], utc('2026-07-08T00:00Z'))).toBeNull();
    expect(demandSoFar(config, [], utc('2026-07-08T00:00Z'))).toMatchObject({ peakKw: 0, peakAtMs: null });
  });

  it("takes the month from the meter's clock", () => {
    const month = monthAt('Europe/Madrid', utc('2026-12-31T23:30Z'));
    expect([month.startMs, month.endMs]).toEqual([utc('2026-12-31T23:00Z'), utc('2027-01-31T23:00Z')]);
  });
});

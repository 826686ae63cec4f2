/** The sentences as people read them: every figure in them is checked against the problem it was made from. */
import { describe, expect, it } from 'vitest';
import { asides, explain, explainSimple } from '../../src/planning/explain.ts';
import { timetablePlan } from '../../src/planning/fallback.ts';
import { solvePlan, type Plan } from '../../src/planning/plan.ts';
import type { PlanProblem } from '../../src/planning/problem.ts';
import { clockText, energyText, moneyText, priceText, temperatureText } from '../../src/planning/words.ts';
import { fromWall } from '../../src/time.ts';
import { every, grid, HOUR_MS, plant, problem, scenario } from './problems.ts';

const SLOTS = 144;
const bank = plant({
  capacityKwh: 14,
  inventoryPct: (ice) => Math.max(0, (100 * (ice - 2.5)) / 11.5),
  leakW: (ice, surroundC) => 2 * surroundC * Math.min(1, ice / 2),
  operate: (c) => ({ iceMakingW: 1000 - 12 * (c - 25), powerW: 500 + 8 * (c - 25) }),
});

/** A summer day from a local hour on: 11 ct from 0 to 6, 24 ct from 17 to 22, 16 ct else; a warm evening. */
function summer(clock: number, parts: Partial<PlanProblem> = {}, peakW = 1200): PlanProblem {
  const hourOf = (t: number): number => (clock + t / 4) % 24;
  const load = (h: number, k: number): number => {
    const after = (h + 24 - 15) % 24;
    return after < 12 ? (peakW + 100 * k) * Math.sin((Math.PI * after) / 12) : 0;
  };
  return problem(SLOTS, {
    nowMs: fromWall('Europe/Madrid', 2026, 7, 1, clock * 60),
    plant: bank,
    chiller: { minOnMs: HOUR_MS / 3, minOffMs: HOUR_MS / 6, startMoney: 0.02 },
    power: grid(SLOTS, (t) => (hourOf(t) < 6 ? 0.11 : hourOf(t) >= 17 && hourOf(t) < 22 ? 0.24 : 0.16)),
    scenarios: Array.from({ length: 12 }, (_, k) =>
      scenario(SLOTS, {
        loadW: every(SLOTS, (t) => load(hourOf(t), k - 6)),
        outdoorC: every(SLOTS, (t) => 25 + 8 * Math.cos(((hourOf(t) - 16) / 12) * Math.PI)),
      }),
    ),
    ...(parts as object),
  });
}

function planOf(p: PlanProblem): Plan {
  return solvePlan(p, {
    fallBack: (note) => {
      throw new Error(note);
    },
  });
}

const ice = (iceKwh: number) => ({ iceKwh, iceLowKwh: iceKwh - 0.4, iceHighKwh: iceKwh + 0.4 });
const said = (p: PlanProblem): string => explain(planOf(p), p);

describe('words', () => {
  const eur = { zone: 'Europe/Madrid', currency: 'EUR', units: 'SI' } as const;
  const usd = { ...eur, currency: 'USD', units: 'IP' } as const;
  it('writes money, energy and temperature as the site does', () => {
    expect(priceText(eur, 0.112)).toBe('11 ct');
    expect(priceText(eur, 0.072)).toBe('7.2 ct');
    expect(priceText(eur, 0.07)).toBe('7 ct');
    expect(priceText({ ...eur, currency: 'CHF' }, 0.112)).toBe('0.11 CHF');
    expect(moneyText(eur, 0.08)).toBe('8 ct');
    expect(moneyText(usd, 1.234)).toBe('1.23 USD');
    expect(energyText(eur, 6.12)).toBe('6.1 kWh');
    // 1 kWh = 3,412.14 BTU (International Table).
    expect(energyText(usd, 6.12)).toBe('20.9 kBTU');
    expect(temperatureText(usd, 25)).toBe('77 °F');
  });

  it('names a time by its day when it is far', () => {
    const now = fromWall('Europe/Madrid', 2026, 7, 1, 20 * 60);
    expect(clockText(eur, now, now + 5 * HOUR_MS)).toBe('01:00');
    expect(clockText(eur, now, now + 21 * HOUR_MS)).toBe('17:00 tomorrow');
    expect(clockText(eur, now, now + 45 * HOUR_MS)).toBe('17:00 on Friday');
  });
});

describe('reasons', () => {
  it('says since when, for what price and for what need ice is made', () => {
    const p = summer(4, {
      ...ice(4.1),
      chillerOn: true,
      chillerSinceMs: fromWall('Europe/Madrid', 2026, 7, 1, 195),
    });
    expect(said(p)).toMatchInlineSnapshot(
      `"Making ice since 03:15: power costs 11 ct until 06:00, then 16 ct, and the evening may need 12.4 kWh; 4.1 are in the bank."`,
    );
  });

  it('says from when on it rests, waits, cools and saves', () => {
    const sentences = {
      start: said(summer(3, ice(3))),
      evening: said(summer(20, ice(7))),
      short: said(summer(20, ice(3.2))),
      late: said(summer(22, ice(4))),
      waits: said(summer(22.5, ice(2.8), 400)),
      rests: said(summer(9, ice(11))),
      full: said(summer(9, ice(14))),
      cool: said(summer(9, ice(0.6), 0)),
      island: said(island(11)),
      dark: said(island(4)),
      mild: said(summer(9, ice(6), 100)),
      none: said(summer(9, { ...ice(0.6), scenarios: Array.from({ length: 12 }, () => scenario(SLOTS)) })),
      melts: said(summer(20, { iceKwh: 3.4, iceLowKwh: 1.4, iceHighKwh: 5.4 }, 150)),
    };
    expect(sentences).toMatchInlineSnapshot(`
      {
        "cool": "Resting: 0.6 kWh are in the bank, and the evening may need 3.3 kWh at most; more is made from 02:00 tomorrow if it comes to that.",
        "dark": "Waiting to make ice until 07:30, when the sun has more to spare; 3.0 kWh are in the bank, and the evening may need 12.4.",
        "evening": "Cooling with ice: the rest of the night may need 8.0 kWh; 7.0 are in the bank, which lasts until about 00:00, and more is made from 00:00.",
        "full": "Resting: the bank is full with 14.0 kWh.",
        "island": "Making ice from now until about 18:15: the panels give 1.5 kW more than the house needs, and the evening may need 12.4 kWh; 3.0 are in the bank.",
        "late": "Cooling with ice: the rest of the night may need 4.8 kWh; 4.0 are in the bank, which lasts until about 00:30, and more is made from 00:00.",
        "melts": "Cooling with ice: the rest of the night may need 2.9 kWh; 3.4 are in the bank, of which 1.4 are sure and last until about 22:15, and more is made from 00:45.",
        "mild": "Resting: 6.0 kWh are in the bank, and the evening may need 4.0 kWh at most.",
        "none": "Resting: 0.6 kWh are in the bank, and no cooling is expected.",
        "rests": "Resting: 11.0 kWh are in the bank, and the evening may need 12.4 kWh at most; more is made from 00:00 tomorrow if it comes to that.",
        "short": "Cooling with ice: the rest of the night may need 8.0 kWh; 3.2 are in the bank, which lasts until about 21:30, and more is made from 22:30.",
        "start": "Making ice from now until about 09:15: power costs 11 ct until 06:00, then 16 ct, and the evening may need 12.4 kWh; 3.0 are in the bank.",
        "waits": "Cooling with ice: the rest of the night may need 2.1 kWh; 2.8 are in the bank, which lasts until about 16:00 tomorrow, and more is made from 00:30.",
      }
    `);
  });

  it('speaks inch-pound and dollars where the site does', () => {
    const p = summer(20, { ...ice(7), units: 'IP', currency: 'USD' });
    expect(said(p)).toMatchInlineSnapshot(
      `"Cooling with ice: the rest of the night may need 27.4 kBTU; 23.9 are in the bank, which lasts until about 00:00, and more is made from 00:00."`,
    );
  });

  it('says what waiting would cost, what ice is worth and what would change its mind', () => {
    const p = summer(4, ice(4.1));
    const plan = planOf(p);
    expect(asides(plan, p)).toMatchInlineSnapshot(`
      [
        "Waiting an hour would cost 4 ct.",
        "One more kWh of ice would be worth 7.6 ct.",
        "It would stop making ice with power above 19 ct for the coming hour, or more than 12.6 kWh in the bank.",
      ]
    `);
    const later = summer(9, ice(11));
    const rests = planOf(later);
    expect(asides(rests, later)).toMatchInlineSnapshot(`
      [
        "Making ice this hour instead would cost 3 ct more.",
        "One more kWh of ice would be worth 6.7 ct.",
        "It would start making ice with power below 9.5 ct for the coming hour, or less than 6.3 kWh in the bank.",
      ]
    `);
  });

  it('says so when it lets the bank melt out', () => {
    const p = summer(20, { iceKwh: 3.4, iceLowKwh: 1.4, iceHighKwh: 5.4 });
    expect(explain({ ...planOf(p), command: 'discharge', meltsOut: true }, p)).toBe(
      'Letting the bank melt out on a mild evening: it may hold anything from 1.4 to 5.4 kWh, and an empty bank settles that.',
    );
  });

  it('says when and why it is not a fresh plan', () => {
    const p = summer(4, ice(4.1));
    const timetable = [
      { at: '0 0 * * *', command: 'charge-now' },
      { at: '0 8 * * *', command: 'hold' },
    ] as const;
    const fallen = timetablePlan(
      { ...p, timetable },
      'No fresh plan: there is no forecast. The timetable decides.',
    );
    expect(explain(fallen, p)).toBe(
      'No fresh plan: there is no forecast. The timetable decides. Making ice until 08:00; 4.1 kWh are in the bank.',
    );
    expect(asides(fallen, p)).toEqual([]);
  });

  it('explains the simple strategies', () => {
    const p = summer(20, ice(7));
    expect([
      explainSimple('storage-priority', 'discharge', p),
      explainSimple('chiller-priority', 'charge-and-discharge', p),
      explainSimple('timetable', 'hold', p),
    ]).toMatchInlineSnapshot(`
      [
        "Cooling with ice: ice first, and the bank is filled in the cheap hours; power costs 24 ct until 22:00, then 16 ct; 7.0 kWh are in the bank.",
        "Cooling and making ice at once: the machine first, and ice only helps; power costs 24 ct until 22:00, then 16 ct; 7.0 kWh are in the bank.",
        "Resting, as the timetable says; 7.0 kWh are in the bank.",
      ]
    `);
  });
});

function island(clock: number): PlanProblem {
  const base = summer(clock, ice(3));
  const hourOf = (t: number): number => (clock + t / 4) % 24;
  return {
    ...base,
    scenarios: base.scenarios.map((s) => ({
      ...s,
      panelW: every(SLOTS, (t) => {
        const h = hourOf(t);
        return h > 7 && h < 19 ? 1900 * Math.sin((Math.PI * (h - 7)) / 12) : 0;
      }),
    })),
    power: {
      kind: 'island',
      houseW: every(SLOTS, () => 150),
      battery: {
        capacityKwh: 5,
        floorKwh: 1.5,
        nowKwh: 4,
        wearMoneyPerKwh: 0.06,
        roundTrip: 1,
        mostChargeW: 2000,
        mostDischargeW: 2000,
      },
      generator: null,
      inverterW: 3000,
    },
  };
}

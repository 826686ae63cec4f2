import * as fc from 'fast-check';
import { Ajv2020 } from 'ajv/dist/2020.js';
import { describe, expect, it } from 'vitest';
import { nextRevision, nightSheet } from '../../src/reports/night.ts';
import { nightSheetJsonSchema, nightSheetSchema, readSheet } from '../../src/reports/night-schema.ts';
import { thin } from '../../src/store/thin.ts';
import { HOUR_MS, nightOf } from '../../src/time.ts';
import { juniper, JULY, toldSheet, ZONE } from './juniper.ts';
import { tellNight } from './night-story.ts';

describe('the energy account', () => {
  it('adds up fluxes and leaves no residual where there is none', () => {
    const sheet = toldSheet();
    const { balance, ice } = sheet;
    // 44 W all night are 24 h × 44 W.
    expect(balance.leakKwh).toBeCloseTo(1.056, 3);
    // Discharging 17:30–23:20 at 1350 W on the mean of a sine that nearly closes: within its amplitude's share.
    expect(balance.outKwh).toBeGreaterThan(5.83 * 1.3);
    expect(balance.outKwh).toBeLessThan(5.84 * 1.45);
    expect(Math.abs(balance.residualKwh)).toBeLessThan(0.002);
    expect(balance.verdict).toBe('closes');
    expect(balance.culprit).toBe('');
    expect(ice.startKwh).toBeCloseTo(10.5, 2);
    expect(ice.startKwh + balance.changeKwh).toBeCloseTo(ice.endKwh, 2);
    expect(sheet.made.kg).toBeCloseTo(sheet.made.kwh * 10.797, 1);
  });

  it.each([
    [{ charging: 300 }, 'charging', /ice machine, which makes less/],
    [{ charging: -300 }, 'charging', /ice machine, which makes more/],
    [{ idle: 90 }, 'resting', /leak, larger than learned/],
    [{ idle: -90 }, 'resting', /leak, smaller/],
    [{ discharging: 300 }, 'discharging', /loop, which brought more/],
    [{ discharging: -300 }, 'discharging', /loop, which brought less/],
  ] as const)('finds the residual of %o where it arose, in size and side', (lostW, side, culprit) => {
    const sheet = toldSheet({ lostW });
    const hours = { charging: 6.5, resting: 24 - 6.5 - 5 - 5 / 6, discharging: 5 + 5 / 6 }[side];
    const [watts] = Object.values(lostW);
    expect(sheet.balance.residualKwh).toBeCloseTo((watts * hours) / 1000, 1);
    expect(sheet.balance.whileKwh[side] / sheet.balance.residualKwh).toBeGreaterThan(0.99);
    expect(sheet.balance.verdict).toBe('open');
    expect(sheet.balance.culprit).toMatch(culprit);
    expect(sheet.balance.sentence).toContain(sheet.balance.culprit);
  });

  it('closes exactly in its own parts for any loss: in − out − leak − change = residual, and the parts add up', () => {
    const watts = fc.integer({ min: -400, max: 400 });
    fc.assert(
      fc.property(fc.record({ charging: watts, discharging: watts, idle: watts }), (lostW) => {
        const { balance } = toldSheet({ lostW, stepMs: 600_000 });
        const { inKwh, outKwh, leakKwh, changeKwh, residualKwh, whileKwh } = balance;
        expect(inKwh - outKwh - leakKwh - changeKwh).toBeCloseTo(residualKwh, 2);
        const { charging, discharging, resting, gaps } = whileKwh;
        expect(charging + discharging + resting + gaps).toBeCloseTo(residualKwh, 2);
      }),
      { numRuns: 20 },
    );
  });

  it('names a gap, a set-aside probe and a doubtful clock before the plant', () => {
    const records = tellNight({ zone: ZONE, night: JULY, stepMs: 60_000 });
    const cut = records.filter(
      ({ atMs }) => atMs < JULY.startMs + 14 * HOUR_MS || atMs > JULY.startMs + 18 * HOUR_MS,
    );
    const gap = toldSheet({}, { records: cut });
    expect(gap.whole).toBe(false);
    expect(gap.gaps).toHaveLength(1);
    expect(gap.gaps[0].minutes).toBeCloseTo(240, -1);
    expect(gap.partialBecause).toMatch(/240 min|241 min|239 min/);
    expect(gap.balance.culprit).toMatch(/without records/);

    const aside = toldSheet(
      { lostW: { idle: 90 } },
      {
        probes: [
          { point: 'bank-bottom', errorAtIcePointK: null, sd: null, atMs: null, setAside: 'frozen reading' },
        ],
      },
    );
    expect(aside.balance.culprit).toMatch(/bank-bottom.*frozen reading/);

    const doubtful = records.map((record, i) =>
      i < 60 ? { ...record, clock: 'doubtful' as const } : record,
    );
    const lost = doubtful.map((record, i) => ({ ...record, iceOnHandKwh: record.iceOnHandKwh - i * 0.002 }));
    const clock = toldSheet({}, { records: lost });
    expect(clock.clockDoubtfulMinutes).toBeCloseTo(60, 0);
    expect(clock.balance.culprit).toMatch(/clock/);
  });

  it('says that nothing single stands out when the estimate was put right at once, and what is open', () => {
    const at = JULY.startMs + 9 * HOUR_MS;
    const records = tellNight({ zone: ZONE, night: JULY, stepMs: 60_000 }).map((record) =>
      record.atMs < at ? record : { ...record, iceOnHandKwh: record.iceOnHandKwh - 1.8 },
    );
    const { balance } = toldSheet({}, { records, probes: [] });
    expect(balance.residualKwh).toBeCloseTo(1.8, 2);
    // all of it came while the loop ran, and yet the loop is not accused
    expect(balance.whileKwh.discharging / balance.residualKwh).toBeGreaterThan(0.9);
    expect(balance.sentence).toMatch(
      /nothing single stands out: the estimate was put right by 1\.80 kWh by 21:/,
    );
    expect(balance.sentence).toMatch(/the heat of the loop by [\d.]+.*kWh either way/);
    const ip = toldSheet({}, { records, probes: [], site: juniper('IP', 'USD') });
    expect(ip.balance.sentence).toMatch(/put right by 6\.1 kBTU/);
    expect(ip.balance.sentence).not.toMatch(/kWh/);
  });

  it('splits the heat delivered by what was heard of the moisture, when that was most of the time', () => {
    const records = tellNight({ zone: ZONE, night: JULY, stepMs: 60_000 });
    const without = (part: number): number | null => {
      const cooling = records.filter((record) => (record.deliveredW ?? 0) > 0).length;
      let seen = 0;
      const seldom = records.map((record) =>
        (record.deliveredW ?? 0) > 0 && ++seen <= part * cooling ? { ...record, latentW: null } : record,
      );
      return toldSheet({}, { records: seldom }).delivered.latentKwh;
    };
    const all = without(0) ?? Number.NaN;
    expect(all).toBeGreaterThan(1);
    // the story's moist share is the same all evening
    expect(without(0.1)).toBeCloseTo(all, 2);
    expect(without(0.5)).toBeNull();
  });

  it('does not accuse a probe whose error it knows and takes out', () => {
    const probe = { point: 'leaving-water' as const, sd: 0.03, atMs: JULY.startMs, setAside: null };
    const known = toldSheet({ lostW: { charging: 300 } }, { probes: [{ ...probe, errorAtIcePointK: 0.8 }] });
    expect(known.balance.culprit).toMatch(/ice machine/);
  });

  it('goes on below zero where the water gets too warm to use, so that an emptied bank is no residual', () => {
    const told = tellNight({ zone: ZONE, night: JULY, stepMs: 60_000, startKwh: 7.5 });
    // 240 L of water warm by 1 K for each 0.2803 kWh (4.205 kJ/(L K)), from 10 degC where ice on hand is zero.
    const records = told.map((record) => ({
      ...record,
      iceOnHandKwh: Math.max(0, record.iceOnHandKwh),
      waterC: record.iceOnHandKwh < 0 ? 10 - record.iceOnHandKwh / ((240 * 4.205) / 3600) : 2,
    }));
    const evening = records.slice(0, 780);
    expect(evening.at(-1)?.iceOnHandKwh).toBe(0);
    const whole = toldSheet({}, { records });
    expect(Math.abs(whole.balance.residualKwh)).toBeLessThan(0.005);
    expect(Math.abs(whole.balance.whileKwh.discharging)).toBeLessThan(0.005);
    const cut = toldSheet({}, { records: evening, issuedMs: JULY.startMs + 13 * HOUR_MS });
    expect(cut.balance.warmedPastUseKwh).toBeGreaterThan(0.5);
    expect(Math.abs(cut.balance.residualKwh)).toBeLessThan(0.005);
    const { ice, made, melted, leaked, balance } = cut;
    const end =
      ice.startKwh + made.kwh - melted.kwh - leaked.kwh - balance.residualKwh + balance.warmedPastUseKwh;
    expect(end).toBeCloseTo(ice.endKwh, 2);
  });

  it('says what the estimate leaves open when that explains the residual', () => {
    const { balance } = toldSheet({ lostW: { charging: 90 } });
    expect(balance.verdict).toBe('within-estimate');
    expect(Math.abs(balance.residualKwh)).toBeLessThan(balance.uncertaintyKwh);
  });

  it('reads the same from thinned records', () => {
    const records = tellNight({ zone: ZONE, night: JULY, stepMs: 30_000, lostW: { charging: 100 } });
    const full = toldSheet({}, { records });
    const thinned = toldSheet({}, { records: thin(records) });
    for (const key of ['inKwh', 'outKwh', 'leakKwh', 'residualKwh'] as const) {
      expect(thinned.balance[key], key).toBeCloseTo(full.balance[key], 2);
    }
    expect(thinned.electricity.money).toBeCloseTo(full.electricity.money, 3);
    expect(thinned.comfort.warmKh).toBeCloseTo(full.comfort.warmKh, 2);
    expect(thinned.commands.map((one) => one.command)).toEqual(full.commands.map((one) => one.command));
  });
});

describe('electricity and money', () => {
  it('adds up over periods to the whole', () => {
    const { electricity } = toldSheet();
    const sum = (key: 'machineKwh' | 'pumpKwh' | 'fanKwh' | 'money'): number =>
      electricity.byPeriod.reduce((total, one) => total + one[key], 0);
    for (const key of ['machineKwh', 'pumpKwh', 'fanKwh', 'money'] as const) {
      expect(sum(key), key).toBeCloseTo(electricity[key], 2);
    }
    expect(electricity.byPeriod.map((one) => one.period).toSorted()).toEqual(['flat', 'peak', 'valley']);
    // Charging falls into the valley alone: its money is its energy at 0.11.
    const valley = electricity.byPeriod.find((one) => one.period === 'valley');
    expect(valley?.money).toBeCloseTo(
      ((valley?.machineKwh ?? 0) + (valley?.pumpKwh ?? 0) + (valley?.fanKwh ?? 0)) * 0.11,
      3,
    );
  });

  it('counts energy without a price apart, and pumps without a plug at their nominal power', () => {
    const site = juniper();
    const { 'pump-power': _pump, ...points } = site.points;
    const records = tellNight({ zone: ZONE, night: JULY, stepMs: 60_000 }).map((record) => ({
      ...record,
      pumpPowerW: null,
      priceMoneyPerKwh: record.pricePeriod === 'peak' ? null : record.priceMoneyPerKwh,
    }));
    const { electricity } = toldSheet({}, { site: { ...site, points }, records });
    expect(electricity.nominal).toEqual(['pump']);
    expect(electricity.pumpKwh).toBeCloseTo((45 * (5 + 5 / 6)) / 1000, 2);
    expect(electricity.unpricedKwh).toBeGreaterThan(0.2);
  });

  it('values ice like for like: a way that ends with less ice must buy it back', () => {
    const sheet = toldSheet();
    for (const one of sheet.comparisons) {
      const owed = (sheet.ice.endKwh - one.endKwh) * (sheet.iceWorthMoneyPerKwh ?? 0);
      expect(one.likeForLikeMoney, one.strategy).toBeCloseTo(one.money + owed, 3);
      expect(one.savedMoney, one.strategy).toBeCloseTo(one.likeForLikeMoney - sheet.electricity.money, 3);
    }
    expect(sheet.comparisons.map((one) => one.strategy)).toEqual([
      'no-storage',
      'storage-priority',
      'chiller-priority',
    ]);
  });

  it('gives the COP of each hour that the machine ran', () => {
    const { cop } = toldSheet();
    expect(cop.byHour.map((hour) => hour.at.slice(11, 13))).toEqual([
      '23',
      '00',
      '01',
      '02',
      '03',
      '04',
      '05',
    ]);
    const made = cop.byHour.reduce((sum, hour) => sum + hour.madeKwh, 0);
    const used = cop.byHour.reduce((sum, hour) => sum + hour.machineKwh, 0);
    expect(made / used).toBeCloseTo(cop.machine ?? 0, 1);
    expect(cop.withPumpAndFan).toBeLessThan(cop.machine ?? 0);
  });
});

describe('nights that are not plain', () => {
  it.each([
    ['2026-03-28', 23],
    ['2026-10-24', 25],
  ])('%s has %i hours', (date, hours) => {
    const night = nightOf(ZONE, date);
    const sheet = toldSheet({ night });
    expect(sheet.night.hours).toBe(hours);
    expect(sheet.whole).toBe(true);
    expect(sheet.trace.mode).toHaveLength(hours * 4);
    expect(sheet.balance.leakKwh).toBeCloseTo(hours * 0.044, 3);
    expect(Math.abs(sheet.balance.residualKwh)).toBeLessThan(0.002);
  });

  it('a running night is partial and says so', () => {
    const records = tellNight({ zone: ZONE, night: JULY, stepMs: 60_000 }).slice(0, 600);
    const sheet = toldSheet({}, { records, issuedMs: JULY.startMs + 10 * HOUR_MS });
    expect(sheet.whole).toBe(false);
    expect(sheet.partialBecause).toBe('issued at 22:00, before the night was over');
    expect(sheet.coveredPct).toBeCloseTo((600 / 1440) * 100, 0);
    expect(Math.abs(sheet.balance.residualKwh)).toBeLessThan(0.002);
  });

  it('a night without records is refused in one sentence', () => {
    expect(() => toldSheet({}, { records: [] })).toThrow(/2026-07-14/);
  });

  it('a single record makes a sheet', () => {
    const records = tellNight({ zone: ZONE, night: JULY, stepMs: 60_000 }).slice(0, 1);
    const sheet = nightSheet({
      site: juniper(),
      night: JULY,
      records,
      plans: [],
      revision: 1,
      issuedMs: JULY.endMs,
    });
    expect(nightSheetSchema.parse(sheet)).toEqual(sheet);
    expect(sheet.balance.verdict).toBe('unknown');
  });

  it('unheard points are absent, never zero and never NaN', () => {
    const records = tellNight({ zone: ZONE, night: JULY, stepMs: 60_000 }).map((record) => ({
      ...record,
      deliveredW: null,
      latentW: null,
      outdoorC: null,
      roomC: null,
      chillerPowerW: null,
      pointsStale: 'outdoor-temperature, chiller-power',
    }));
    const sheet = toldSheet({}, { records });
    expect(sheet.delivered.kwh).toBeNull();
    expect(sheet.weather.outdoorMaxC).toBeNull();
    expect(sheet.cop.machine).toBeNull();
    expect(sheet.forecast?.outdoor).toBeNull();
    expect(sheet.forecast?.load?.cameFrom).toBe('melted');
    expect(sheet.probes.find((one) => one.point === 'chiller-power')?.staleMinutes).toBeCloseTo(1440, 0);
    expect(JSON.stringify(sheet)).not.toContain('NaN');
    expect(nightSheetSchema.parse(sheet)).toEqual(sheet);
  });
});

describe('forecast, orders, wishes', () => {
  it('scores the noon plan: a forecast 0.8 K too warm with a band of ±1.5 K', () => {
    const { forecast } = toldSheet();
    expect(forecast?.outdoor?.meanErrorK).toBeCloseTo(0.8, 1);
    expect(forecast?.outdoor?.insidePct).toBe(100);
    // Pinball of 0.8 K over three percentiles: (2/3)(0.1·0.7 + 0.5·0.8 + 0.1·2.3) K.
    expect(forecast?.outdoor?.crpsK).toBeCloseTo((2 / 3) * (0.07 + 0.4 + 0.23), 1);
    expect(forecast?.load?.inside).toBe(true);
    expect(forecast?.load?.errorPct).toBeGreaterThan(0);
    expect(forecast?.outdoor?.yesterdayMeanAbsK).toBeNull();
  });

  it('holds yesterday beside it when yesterday is known', () => {
    const yesterday = nightOf(ZONE, '2026-07-13');
    const records = [
      ...tellNight({ zone: ZONE, night: yesterday, stepMs: 60_000 }).map((one) => ({
        ...one,
        outdoorC: (one.outdoorC ?? 0) - 3,
      })),
      ...tellNight({ zone: ZONE, night: JULY, stepMs: 60_000 }),
    ];
    const { forecast } = toldSheet({}, { records });
    expect(forecast?.outdoor?.yesterdayMeanAbsK).toBeCloseTo(3, 1);
    expect(forecast?.load?.yesterdayKwh).toBeCloseTo(forecast?.load?.cameKwh ?? 0, 1);
  });

  it('lists commands by change, wishes by stretch and interlocks by their words', () => {
    const records = tellNight({ zone: ZONE, night: JULY, stepMs: 60_000 }).map((record, i) => ({
      ...record,
      wish: i >= 300 && i < 360 ? ('cool-now' as const) : record.wish,
      heldBackBy: (i >= 100 && i < 110) || (i >= 200 && i < 205) ? `Minimum off: ${210 - i} min to go.` : '',
    }));
    const sheet = toldSheet({}, { records });
    expect(sheet.wishes).toHaveLength(1);
    expect(sheet.wishes[0].wish).toBe('cool-now');
    expect(sheet.interlocks).toHaveLength(1);
    expect(sheet.interlocks[0]).toMatchObject({ times: 2, minutes: 15 });
    expect(sheet.commands.map((one) => one.command)).toEqual([
      'hold',
      'hold',
      'hold',
      'hold',
      'hold',
      'discharge',
      'hold',
      'charge-now',
      'hold',
    ]);
  });
});

describe('form', () => {
  it('validates against its own published JSON Schema, and is read back as it was', () => {
    const ajv = new Ajv2020({ strict: false, validateFormats: false });
    const validate = ajv.compile(nightSheetJsonSchema());
    const sheet = toldSheet();
    expect(validate(JSON.parse(JSON.stringify(sheet))), JSON.stringify(validate.errors)).toBe(true);
    expect(validate({ ...sheet, revision: 0 })).toBe(false);
    expect(readSheet(JSON.stringify(sheet))).toEqual(sheet);
    expect(readSheet('{')).toBeNull();
    expect(readSheet(JSON.stringify({ ...sheet, schema: 'other' }))).toBeNull();
  });

  it('is revised only for a reason', () => {
    const first = toldSheet();
    expect(nextRevision(first, toldSheet({}, { issuedMs: JULY.endMs + 9e6 }), 'why')).toBeNull();
    const late = nextRevision(first, toldSheet({ startKwh: 10.6 }), 'why');
    expect(late).toMatchObject({ revision: 2, revisedBecause: 'why' });
    // Made again from the store alone, without what the learners knew at noon: no reason for a revision.
    expect(nextRevision(first, toldSheet({}, { learned: [], probes: [] }), 'why')).toBeNull();
    const forgetful = nextRevision(first, toldSheet({ startKwh: 10.6 }, { learned: [], probes: [] }), 'why');
    expect(forgetful?.learned).toEqual(first.learned);
    expect(forgetful?.probes).toEqual(first.probes);
    expect(first.revision).toBe(1);
  });
});

/** The figures that drift is read from, held against the simulator's own parts and against what is known beforehand. */
import { describe, expect, it } from 'vitest';
import { createRandom } from '../../src/numerics/random.ts';
import { coilDryK, coilTransferUnits } from '../../src/reports/coil-figure.ts';
import { closuresOf } from '../../src/reports/leak-closure.ts';
import { seriesOf } from '../../src/reports/drift-series.ts';
import { longestAt, steadyOf, type Sample } from '../../src/reports/steady.ts';
import { watchOf } from '../../src/reports/watch.ts';
import { standardPressurePa } from '../../src/physics/moist-air.ts';
import { FanCoil } from '../../src/simulator/fan-coil.ts';
import { SaturationTable } from '../../src/simulator/saturation.ts';
import { MINUTE_MS } from '../../src/time.ts';
import { sheetsThrough, simulatedRecords } from '../bench/drift-plant.ts';
import { driftingSheets } from './drift-story.ts';
import { juniper } from './juniper.ts';
import { baseRecord } from './night-story.ts';

const minutes = (count: number, value: (minute: number) => number): Sample[] =>
  Array.from({ length: count }, (_, i) => ({ atMs: i * MINUTE_MS, value: value(i) }));

describe('a steady reading', () => {
  it('has the standard error that many of its kind show', () => {
    const random = createRandom(8);
    const many = Array.from({ length: 300 }, () => steadyOf(minutes(240, () => 5 + random.normal())));
    const values = many.map((one) => one?.value ?? Number.NaN);
    const mean = values.reduce((sum, value) => sum + value, 0) / values.length;
    const sd = Math.sqrt(values.reduce((sum, value) => sum + (value - mean) ** 2, 0) / values.length);
    const said = many.reduce((sum, one) => sum + (one?.error ?? Number.NaN), 0) / many.length;
    expect(mean).toBeCloseTo(5, 1);
    expect(said / sd).toBeGreaterThan(0.8);
    expect(said / sd).toBeLessThan(1.3);
  });

  it('needs half an hour, and is found where a quantity stays longest', () => {
    expect(steadyOf(minutes(20, () => 1))).toBeNull();
    const charge = minutes(480, (minute) =>
      minute < 60 ? minute / 6 : minute < 360 ? 12 : 12 + (minute - 360) / 40,
    );
    expect(longestAt(charge)?.value).toBeCloseTo(12, 6);
    expect(steadyOf(charge)?.value).toBeCloseTo(12, 6);
    const late = charge.map(({ atMs, value }) => ({
      atMs,
      value: atMs < 120 * MINUTE_MS ? 3 + atMs / 1e6 : value,
    }));
    expect(longestAt(late)?.value).toBeCloseTo(12, 6);
  });
});

describe('the transfer units of the coil', () => {
  const site = juniper();
  const pressurePa = standardPressurePa(site.site.elevationM);
  const saturation = new SaturationTable(pressurePa);

  /** What three thermometers and a hygrometer would say of the simulator's coil. */
  function units(humidityPct: number, leavingC: number, dryWPerK: number): number {
    const [roomC, airKgPerS, waterKgPerS] = [25.5, 0.22, 0.2];
    const coil = new FanCoil(saturation);
    const ratio = saturation.ratioAt(roomC, humidityPct);
    for (let turn = 0; turn < 5; turn++) coil.run(roomC, ratio, leavingC, airKgPerS, waterKgPerS, dryWPerK);
    const enteringWaterC = leavingC + (coil.sensibleW + coil.latentW) / (waterKgPerS * 4200);
    const record = {
      ...baseRecord(0, 60_000),
      leavingWaterC: leavingC,
      enteringWaterC,
      roomC,
      roomHumidityPct: humidityPct,
    };
    return coilTransferUnits(site, record) ?? Number.NaN;
  }

  it('stay the same however damp the room: within 1.5 % wet, and exactly dry', () => {
    // colder water lies on a flatter piece of the saturation curve, which leaves some per cent
    for (const leaving of [1.5, 3, 5]) {
      const wet = [40, 45, 50, 60, 70].map((rh) => units(rh, leaving, 180));
      expect(Math.max(...wet) / Math.min(...wet)).toBeLessThan(1.015);
    }
    expect(units(50, 1.5, 180) / units(50, 5, 180)).toBeLessThan(1.05);
    expect(units(18, 2, 180)).toBeCloseTo(units(20, 5, 180), 6);
  });

  it('come with how dry the coil was', () => {
    const record = { ...baseRecord(0, 60_000), leavingWaterC: 2, enteringWaterC: 6, roomC: 25 };
    // dew point of air at 25 °C: 13.9 °C at 50 %, 0.5 °C at 20 % (psychrometric chart; WMO formula)
    expect(coilDryK({ ...record, roomHumidityPct: 50 })).toBe(0);
    expect(coilDryK({ ...record, roomHumidityPct: 20 })).toBeCloseTo(3.5, 1);
    expect(coilDryK({ ...record, roomHumidityPct: null })).toBeNull();
  });

  it('tell a coil that takes 15 % less', () => {
    for (const rh of [35, 50, 65]) {
      const ratio = units(rh, 3, 153) / units(rh, 3, 180);
      expect(ratio).toBeGreaterThan(0.83);
      expect(ratio).toBeLessThan(0.92);
    }
  });
});

describe('the leak between charges', () => {
  it('is what it was told to be, where flow and catalogue are right', () => {
    const sheets = driftingSheets({
      nights: 12,
      seed: 1,
      noise: { leak: { sd: 1e-9, rho: 0 } },
      wildPart: 0,
    });
    const closures = closuresOf(sheets, () => true);
    expect(closures).toHaveLength(11);
    for (const { leakWPerK } of closures) expect(leakWPerK).toBeCloseTo(2, 6);
    expect(closuresOf(sheets, () => false)).toEqual([]);
  });

  it('takes a charge that went further, or not as far, for what it is', () => {
    const sheets = driftingSheets({ nights: 3, seed: 1, noise: { leak: { sd: 1e-9, rho: 0 } }, wildPart: 0 });
    const [first, second, third] = sheets;
    if (second.refill === null || first.refill === null) throw new Error('the story tells refills');
    // the second charge stopped 0.4 kWh short, on the point of the curve that the first one had passed
    const short = {
      ...second,
      refill: {
        ...second.refill,
        until: { ...second.refill.until, madeKwh: second.refill.until.madeKwh - 0.4 },
        curve: first.refill.curve.slice(1).map((point) => ({ ...point, madeKwh: point.madeKwh - 0.4 })),
      },
    };
    expect(closuresOf([first, short], () => true)[0]?.leakWPerK).toBeCloseTo(2, 6);
    if (third.refill === null) throw new Error('the story tells refills');
    const on = {
      ...third,
      refill: {
        ...third.refill,
        until: { ...third.refill.until, madeKwh: third.refill.until.madeKwh + 0.4 },
      },
    };
    expect(closuresOf([short, on], () => true)[0]?.leakWPerK).toBeCloseTo(2, 6);
  });

  it('follows the simulated bank: twice the leak reads as twice the leak', () => {
    const fault = { atNight: 10, factors: { leakFactor: 2 } };
    const sheets = [...sheetsThrough(simulatedRecords({ seed: 7001, nights: 20, fault }), null)];
    const leak = seriesOf(sheets).find((one) => one.name === 'leak');
    const date = sheets[10].night.date;
    const mean = (values: readonly number[]): number =>
      values.reduce((sum, value) => sum + value, 0) / values.length;
    const before = mean((leak?.nights ?? []).filter((one) => one.date < date).map((one) => one.value));
    const after = mean((leak?.nights ?? []).filter((one) => one.date > date).map((one) => one.value));
    expect(after / before).toBeGreaterThan(1.6);
    expect(after / before).toBeLessThan(2.4);
  }, 30_000);
});

describe('what cannot be seen', () => {
  it('is said with its reason, and what only needs time is not called that', () => {
    const noise = { coil: { sd: 0.01, rho: 0 }, airing: { sd: 0.01, rho: 0 } };
    const watch = watchOf(driftingSheets({ nights: 20, seed: 2, noise }));
    const sight = Object.fromEntries(watch.map((one) => [one.signature, one.sight]));
    expect(sight).toMatchObject({
      'fouled-coil': 'watched',
      'open-door-habit': 'watched',
      'wet-insulation': 'out-of-sight',
    });
    expect(watch.find((one) => one.signature === 'low-refrigerant')?.because).toMatch(/coolant-supply/);
    const early = watchOf(driftingSheets({ nights: 5, seed: 2, noise }));
    expect(early.every((one) => one.sight === 'not-yet')).toBe(true);
  });
});

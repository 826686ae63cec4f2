import { describe, expect, it } from 'vitest';
import { cabinOfConfig, lossWPerK } from '../../src/forecasting/cabin.ts';
import { coilOf } from '../../src/forecasting/coil.ts';
import { dryAirOf } from '../../src/forecasting/dry-air.ts';
import { latentScale } from '../../src/forecasting/latent.ts';
import { holdLimit, warmKhPerKwh, type LoadFrame, type LoadWeather } from '../../src/forecasting/load.ts';
import { saturationAt } from '../../src/forecasting/saturation.ts';
import { saturationHumidityRatio, standardPressurePa } from '../../src/physics/moist-air.ts';
import { cabinSite } from './site.ts';

const site = cabinSite();
const saturation = saturationAt(0);
const cabin = { ...cabinOfConfig(site), homeW: 0, gainsW: Array.from({ length: 24 }, () => 0) };
const DRY = 0.004;

const frame = (count: number, more: Partial<LoadFrame> = {}): LoadFrame => ({
  slotMs: 900_000,
  cabin,
  coil: coilOf(site, saturation),
  dryAir: null,
  limitC: Array.from({ length: count }, () => 26),
  gainsW: Array.from({ length: count }, () => 500),
  floorM2: 52,
  people: 2,
  latentScale: 1,
  ...more,
});
const weather = (count: number, outdoorC: number, ratio = DRY): LoadWeather => ({
  outdoorC: new Float64Array(count).fill(outdoorC),
  sunWPerM2: new Float64Array(count),
  outdoorRatio: new Float64Array(count).fill(ratio),
  disturbanceW: new Float64Array(count),
});
const sum = (values: ArrayLike<number>): number => Array.from(values).reduce((a, b) => a + b, 0);
const start = { airC: 26, fabricC: 26, ratio: DRY };

describe('the load', () => {
  it('settles at loss × difference + gains, plus the fans in proportion', () => {
    const held = holdLimit(frame(400), start, weather(400, 31));
    const neededW = 5 * lossWPerK(cabin) + 500;
    expect(held.sensibleW[399]).toBeCloseTo(neededW, 3);
    expect(held.loadW[399] - held.sensibleW[399]).toBeCloseTo(
      (neededW / coilOf(site, saturation).sensibleMostW(26)) * site.delivery.fanW,
      6,
    );
    expect(held.warmKh).toBe(0);
    expect(sum(held.latentW)).toBe(0);
  });

  it('is nothing while nobody is home or the cabin stays below the limit', () => {
    expect(
      sum(
        holdLimit(frame(96, { limitC: Array.from({ length: 96 }, () => null) }), start, weather(96, 40))
          .loadW,
      ),
    ).toBe(0);
    expect(
      sum(
        holdLimit(
          frame(96, { gainsW: new Float64Array(96) }),
          { ...start, airC: 22, fabricC: 22 },
          weather(96, 24),
        ).loadW,
      ),
    ).toBe(0);
  });

  it('takes no more than the coil can, and then the hours are warm', () => {
    const hot = holdLimit(frame(40), { airC: 36, fabricC: 36, ratio: DRY }, weather(40, 40));
    const most = coilOf(site, saturation).sensibleMostW(36);
    for (const watts of hot.sensibleW) expect(watts).toBeLessThanOrEqual(most + 1e-9);
    expect(hot.warmKh).toBeGreaterThan(10);
  });

  it('counts moisture: more of it in moist air, and the room dries', () => {
    const dry = holdLimit(frame(40), start, weather(40, 31));
    const moist = holdLimit(frame(40), { ...start, ratio: 0.014 }, weather(40, 31, 0.014));
    expect(sum(dry.latentW)).toBe(0);
    expect(sum(moist.latentW)).toBeGreaterThan(0.1 * sum(moist.sensibleW));
    expect(moist.latentW[39]).toBeLessThan(moist.latentW[0]);
  });

  it('says how warm each kWh not delivered makes it, as one store of the same size would be', () => {
    const setting = frame(144);
    const days = weather(144, 33);
    const full = holdLimit(setting, start, days);
    const kh = warmKhPerKwh(setting, start, days, full);
    // one store of both: withheld heat q warms by q/U (1 − e^(−t/τ)), τ = C/U; its mean over the horizon T per kWh is
    // 1000/U (1 − τ/T (1 − e^(−T/τ))). Air runs a little ahead of the fabric, and a part of the load is fans.
    const lossW = lossWPerK(cabin);
    const tauH = (cabin.airJPerK + cabin.fabricJPerK) / lossW / 3600;
    const oneStore = (1000 / lossW) * (1 - (tauH / 36) * (1 - Math.exp(-36 / tauH)));
    expect(kh / oneStore).toBeGreaterThan(0.85);
    expect(kh / oneStore).toBeLessThan(1.25);
    expect(warmKhPerKwh(setting, start, weather(144, 10), holdLimit(setting, start, weather(144, 10)))).toBe(
      0,
    );
  });

  it('leaves to dry air what dry air can do', () => {
    const nightAir = dryAirOf(cabinSite({ cabin: { floor: '52 m2', 'dry-air': 'night-air' } }));
    const cool = { ...weather(40, 20), sunWPerM2: new Float64Array(40).fill(400) };
    const hot = { airC: 28, fabricC: 29, ratio: DRY };
    const closed = holdLimit(frame(40), hot, cool);
    const opened = holdLimit(frame(40, { dryAir: nightAir }), hot, cool);
    expect(sum(closed.loadW)).toBeGreaterThan(5000);
    expect(sum(opened.loadW)).toBeLessThan(0.5 * sum(closed.loadW));
  });
});

describe('dry air', () => {
  const night = dryAirOf(cabinSite({ cabin: { floor: '52 m2', 'dry-air': 'night-air' } }));
  const pad = dryAirOf(cabinSite({ cabin: { floor: '52 m2', 'dry-air': 'evaporative-pad' } }));

  it('is not there unless configured', () => expect(dryAirOf(site)).toBeNull());
  it('night air cools by what it is cooler, and not when it is warm or sticky', () => {
    expect(night?.(26, 20, 0.006)).toBeCloseTo((5 * 52 * 2.5 * 1.2 * 1006 * 6) / 3600, 6);
    expect(night?.(26, 25.5, 0.006)).toBe(0);
    expect(night?.(26, 22, 0.018)).toBe(0);
  });
  it('a pad cools dry hot air and gives up on moist air', () => {
    // 38 °C at 12 % has its wet bulb near 18 °C: supply near 22 °C, 4 K below the room
    const watts = pad?.(26, 38, 0.0055) ?? 0;
    expect(watts / ((12 * 52 * 2.5 * 1.2 * 1006) / 3600)).toBeGreaterThan(2);
    expect(pad?.(26, 32, 0.018)).toBe(0);
  });
});

describe('the coil', () => {
  const coil = coilOf(site, saturation);
  it('gives more the warmer the room and nothing below its water', () => {
    expect(coil.sensibleMostW(28)).toBeGreaterThan(coil.sensibleMostW(24));
    expect(coil.sensibleMostW(3)).toBe(0);
  });
  it('condenses only above its surface', () => {
    expect(coil.latentMostW(26, DRY)).toBe(0);
    expect(coil.latentMostW(26, 0.012)).toBeGreaterThan(100);
  });
  it('learns how much moisture it takes in truth', () => {
    const line = (factor: number) => ({
      hour: 0,
      outdoorC: 30,
      dewC: 18,
      roomC: 26,
      roomEndC: 26,
      roomW: 0.012,
      panelW: null,
      clearWPerM2: 0,
      machineHeatW: -1000,
      sensibleW: 1000,
      latentW: (factor * 1000 * coil.latentMostW(26, 0.012)) / (coil.sensibleMostW(26) + coil.fanW),
      home: 1,
    });
    const scale = latentScale(
      coil,
      Array.from({ length: 200 }, () => line(1.5)),
    );
    expect(scale).toBeGreaterThan(1.4);
    expect(scale).toBeLessThan(1.5);
    expect(latentScale(coil, [])).toBe(1);
  });
});

it('reads saturation from its table as the library gives it', () => {
  for (const airC of [-10, 0.2, 9.9, 26.3, 38]) {
    expect(saturation(airC) / saturationHumidityRatio(airC, standardPressurePa(0))).toBeCloseTo(1, 3);
  }
});

/**
 * The truth that forecasts are held against: a cabin of three heat stores (air, furniture, envelope) with windows to
 * three sides, leakage by wind, people who come and go a little otherwise every day, and a coil of its own. It shares
 * no formula with src/forecasting. It is held at the comfort limit as far as its coil can; what that takes is the load.
 */
import { expectedHome, limitAt } from '../../src/comfort-hours.ts';
import type { SiteConfig } from '../../src/config.ts';
import type { Random } from '../../src/numerics/random.ts';
import { saturationPressurePa } from '../../src/physics/moist-air.ts';
import { planeOfArray, sunPosition, type Irradiance } from '../../src/physics/sun.ts';

/** Weather at an instant. */
export interface TruthWeather {
  readonly outdoorC: number;
  readonly dewC: number;
  readonly windMPerS: number;
  readonly sky: Irradiance;
}

export interface TruthQuarter {
  readonly startMs: number;
  readonly roomC: number;
  readonly roomHumidityPct: number;
  /** What the coil took from the room, its fans' heat included, W. */
  readonly deliveredW: number;
  readonly latentW: number;
  readonly fanW: number;
}

export const QUARTER_MS = 900_000;
const STEP_S = 60;
const HEAT_OF_VAPOUR = 2.45e6;
const SIDES = [
  { areaM2: 1.7, plane: { tiltDeg: 90, azimuthDeg: 180 } },
  { areaM2: 1.3, plane: { tiltDeg: 90, azimuthDeg: 270 } },
  { areaM2: 0.8, plane: { tiltDeg: 90, azimuthDeg: 90 } },
] as const;
const TRANSMISSION = 0.6;

const ratioOf = (dewC: number): number => {
  const pressurePa = saturationPressurePa(dewC);
  return (0.622 * pressurePa) / (101_325 - pressurePa);
};

/** Every cabin is a little another one. */
function cabinLike(random: Random) {
  const about = (value: number): number => value * Math.exp(0.15 * random.normal());
  return {
    airJPerK: about(1.1e6),
    massJPerK: about(5.5e6),
    shellJPerK: about(7.5e6),
    airMassWPerK: about(340),
    airShellWPerK: about(120),
    shellOutWPerK: about(170),
    glassWPerK: about(33),
    stillLeakWPerK: about(10),
    windLeakWPerK: about(2.5),
    windows: about(1),
    shellApertureM2: about(1.1),
    coilWPerK: about(112),
  };
}

/** Runs the truth from one instant to another in quarter hours. */
export function runTruth(
  config: SiteConfig,
  weatherAt: (atMs: number) => TruthWeather,
  fromMs: number,
  toMs: number,
  random: Random,
): TruthQuarter[] {
  const cabin = cabinLike(random.fork('cabin'));
  const people = random.fork('people');
  const { zone, latitudeDeg, longitudeDeg } = config.site;
  let [air, mass, shell, ratio] = [24, 24, 24, 0.01];
  let day = dayOf(people);
  const quarters: TruthQuarter[] = [];
  for (let startMs = fromMs; startMs < toMs; startMs += QUARTER_MS) {
    if ((startMs / QUARTER_MS) % 96 === 0) day = dayOf(people);
    const weather = weatherAt(startMs + QUARTER_MS / 2);
    const sun = sunPosition(startMs + QUARTER_MS / 2, latitudeDeg, longitudeDeg);
    const glassW =
      cabin.windows *
      TRANSMISSION *
      SIDES.reduce((sum, side) => sum + side.areaM2 * planeOfArray(sun, weather.sky, side.plane), 0);
    const home = expectedHome(config.cabin, zone, startMs - day.lateMs);
    const limitC = expectedHome(config.cabin, zone, startMs) ? limitAt(config.comfort, zone, startMs) : null;
    const gainW = insideW(startMs, home, config, day.lively);
    const leak = cabin.stillLeakWPerK + cabin.windLeakWPerK * weather.windMPerS + cabin.glassWPerK;
    const sums = { room: 0, delivered: 0, latent: 0, fan: 0 };
    for (let step = 0; step < QUARTER_MS / 1000 / STEP_S; step += 1) {
      const inflow =
        cabin.airMassWPerK * (mass - air) +
        cabin.airShellWPerK * (shell - air) +
        leak * (weather.outdoorC - air) +
        0.25 * glassW +
        gainW;
      const most = cabin.coilWPerK * (air - 4);
      const wanted = limitC === null ? 0 : inflow + ((air - limitC) * cabin.airJPerK) / STEP_S;
      const net = Math.min(most, Math.max(0, wanted));
      const duty = net / most;
      const fan = config.delivery.fanW * duty;
      const latent = duty * 0.11 * Math.max(0, ratio - ratioOf(9.5)) * HEAT_OF_VAPOUR;
      const outdoorRatio = ratioOf(weather.dewC);
      shell +=
        ((cabin.airShellWPerK * (air - shell) +
          cabin.shellOutWPerK * (weather.outdoorC - shell) +
          cabin.shellApertureM2 * weather.sky.globalHorizontalWPerM2) *
          STEP_S) /
        cabin.shellJPerK;
      mass += ((cabin.airMassWPerK * (air - mass) + 0.75 * glassW) * STEP_S) / cabin.massJPerK;
      air += ((inflow - net) * STEP_S) / cabin.airJPerK;
      const vapour =
        (home ? config.cabin.occupants * 1.4e-5 : 0) +
        0.025 * (outdoorRatio - ratio) -
        latent / HEAT_OF_VAPOUR;
      ratio += (vapour * STEP_S) / 900;
      sums.room += air;
      sums.delivered += net + fan + latent;
      sums.latent += latent;
      sums.fan += fan;
    }
    const count = QUARTER_MS / 1000 / STEP_S;
    const vapourPa = (101_325 * ratio) / (0.622 + ratio);
    quarters.push({
      startMs,
      roomC: sums.room / count,
      roomHumidityPct: Math.min(100, (100 * vapourPa) / saturationPressurePa(air)),
      deliveredW: sums.delivered / count,
      latentW: sums.latent / count,
      fanW: sums.fan / count,
    });
  }
  return quarters;
}

/** How late they come that day, and how much they cook, iron and light. */
const dayOf = (random: Random) => ({
  lateMs: Math.round(random.normal() * 2) * QUARTER_MS,
  lively: Math.exp(0.25 * random.normal()),
});

function insideW(atMs: number, home: boolean, config: SiteConfig, lively: number): number {
  if (!home) return 90;
  const hour = (atMs / 3_600_000 + config.site.longitudeDeg / 15 + 48) % 24;
  const busy = hour >= 17 && hour < 22.5 ? 260 : hour >= 5.5 && hour < 8 ? 160 : 60;
  return 90 + 75 * config.cabin.occupants + busy * lively;
}

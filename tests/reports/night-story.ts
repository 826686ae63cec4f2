/**
 * An invented night of Juniper as records whose energy account is known: charging, discharging and leak are chosen, ice on
 * hand is their sum plus a residual that the caller asks for. For tests of the store and the sheets only.
 */
import { createRandom } from '../../src/numerics/random.ts';
import type { CycleRecord, PlanRecord, PlanStep } from '../../src/record.ts';
import type { Command, Mode } from '../../src/commands.ts';
import { HOUR_MS, MINUTE_MS, localMinuteOfDay, type Night } from '../../src/time.ts';

export interface StoryOptions {
  readonly zone: string;
  readonly night: Night;
  readonly seed?: number;
  readonly stepMs?: number;
  readonly startKwh?: number;
  /** Cold that vanishes without a flux, by the mode it vanishes in, W. */
  readonly lostW?: { readonly charging?: number; readonly discharging?: number; readonly idle?: number };
  readonly cop?: number;
}

const KWH_PER_W_MS = 1 / 3.6e9;

export function baseRecord(atMs: number, spanMs: number): CycleRecord {
  return {
    atMs,
    spanMs,
    clock: 'set',
    leavingWaterC: 2.125,
    enteringWaterC: null,
    bankTopC: null,
    bankMiddleC: 0.438,
    bankBottomC: null,
    bankLevelMm: 612.4,
    bankSurroundC: 22.312,
    coolantSupplyC: -6.25,
    coolantReturnC: null,
    loopFlowLPerMin: 0,
    chillerPowerW: 0,
    pumpPowerW: 0,
    fanPowerW: 0,
    roomC: 24.5,
    roomHumidityPct: 48.2,
    outdoorC: 27.5,
    outdoorHumidityPct: 38.4,
    panelPowerW: null,
    batteryPct: null,
    generatorPowerW: null,
    housePowerW: 212.3,
    gridPowerW: null,
    pointsStale: '',
    iceOnHandKwh: 8.123,
    iceOnHandLowKwh: 7.5,
    iceOnHandHighKwh: 8.8,
    iceKg: 61.52,
    inventoryPct: 41.01,
    phase: 'mixed',
    waterC: 0.21,
    heatLeakWPerK: 2.0312,
    chargingW: 0,
    dischargingW: 0,
    leakW: 44.7,
    deliveredW: 0,
    latentW: 0,
    priceMoneyPerKwh: 0.21,
    pricePeriod: 'shoulder',
    strategy: 'planned',
    planMadeMs: atMs - 300_000,
    planOutcome: 'solved',
    eveningLoadKwh: 7.9,
    eveningLoadHighKwh: 9.3,
    worthOfIceMoneyPerKwh: 0.081,
    waitCostMoney: 0.0123,
    nextChangeMs: atMs + HOUR_MS,
    lastsUntilMs: atMs + 6 * HOUR_MS,
    requested: 'hold',
    command: 'hold',
    reason: 'Holding: 21 ct now, 11 ct from 00:00, and 8.1 kWh are enough until 22:40.',
    heldBackBy: '',
    wish: 'none',
    wishUntilMs: null,
    mode: 'idle',
    limitC: 26,
    home: true,
    warmKh: 0,
    feelsLikeC: 24.9,
  };
}

/** Cheap from midnight to eight, dear from ten to two and six to ten, as three-period tariffs go. */
function priceAt(minute: number): [number, string] {
  if (minute < 480) return [0.11, 'valley'];
  const dear = (minute >= 600 && minute < 840) || (minute >= 1080 && minute < 1320);
  return dear ? [0.28, 'peak'] : [0.17, 'flat'];
}

function commandAt(minute: number): Command {
  if (minute >= 1050 && minute < 1400) return 'discharge';
  return minute >= 60 && minute < 450 ? 'charge-now' : 'hold';
}

const MODE: Readonly<Record<Command, Mode>> = {
  hold: 'idle',
  'charge-now': 'charging',
  discharge: 'discharging',
  'charge-and-discharge': 'charging-while-discharging',
};

export function outdoorAt(minute: number): number {
  return 24 + 9 * Math.cos(((minute - 960) / 1440) * 2 * Math.PI);
}

/** Records from noon to noon, one each `stepMs`. */
export function tellNight(options: StoryOptions): CycleRecord[] {
  const { zone, night, stepMs = 30_000, cop = 2.1 } = options;
  const random = createRandom(options.seed ?? 1);
  const records: CycleRecord[] = [];
  let ice = options.startKwh ?? 10.5;
  for (let atMs = night.startMs + stepMs; atMs <= night.endMs; atMs += stepMs) {
    const minute = localMinuteOfDay(zone, atMs - 1);
    const command = commandAt(minute);
    const mode = MODE[command];
    const outdoorC = outdoorAt(minute);
    const chargingW = mode === 'charging' ? 1050 - 9 * (outdoorC - 25) : 0;
    const dischargingW = mode === 'discharging' ? 1350 + 150 * Math.sin(minute / 40) : 0;
    const leakW = 44;
    const lostW =
      options.lostW?.[mode === 'charging' ? 'charging' : mode === 'discharging' ? 'discharging' : 'idle'] ??
      0;
    ice += (chargingW - dischargingW - leakW - lostW) * stepMs * KWH_PER_W_MS;
    const [price, period] = priceAt(minute);
    const warm = mode === 'discharging' ? 26.3 + 0.2 * Math.sin(minute / 30) : 24.6;
    const flow = dischargingW > 0 ? 12 : 0;
    const enteringWaterC = flow > 0 ? 2.1 + dischargingW / ((flow / 60) * 4190) : null;
    records.push({
      ...baseRecord(atMs, stepMs),
      leavingWaterC: flow > 0 ? 2.1 : 0.4,
      enteringWaterC,
      loopFlowLPerMin: flow,
      chillerPowerW: chargingW > 0 ? chargingW / (cop - 0.03 * (outdoorC - 20)) : 1.2,
      pumpPowerW: flow > 0 ? 45 + random.normal() : 0.4,
      fanPowerW: flow > 0 ? 38 : 0.3,
      outdoorC: outdoorC + 0.1 * random.normal(),
      roomC: warm,
      iceOnHandKwh: ice,
      iceOnHandLowKwh: ice - 0.7,
      iceOnHandHighKwh: ice + 0.6,
      iceKg: Math.max(0, (ice - 2) * 10.797),
      inventoryPct: Math.max(0, ((ice - 2) * 10.797) / 1.5),
      chargingW,
      dischargingW,
      leakW,
      deliveredW: dischargingW > 0 ? dischargingW - 60 : 0,
      latentW: dischargingW > 0 ? 0.22 * (dischargingW - 60) : 0,
      priceMoneyPerKwh: price,
      pricePeriod: period,
      requested: command,
      command,
      mode,
      reason: reasonOf(command, price, ice),
      warmKh: Math.max(0, warm - 26) * (stepMs / HOUR_MS),
      planMadeMs: Math.floor(atMs / (15 * MINUTE_MS)) * 15 * MINUTE_MS,
    });
  }
  return records;
}

function reasonOf(command: Command, price: number, ice: number): string {
  const cents = Math.round(price * 100);
  if (command === 'charge-now')
    return `Making ice: ${cents} ct until 08:00, and the evening may need 9.3 kWh.`;
  if (command === 'discharge') return `Cooling from ice: ${cents} ct now, ${ice.toFixed(1)} kWh on hand.`;
  return `Holding: ${cents} ct now, 11 ct from 00:00.`;
}

/** A plan made at an instant whose forecast misses what `tellNight` tells by the given amounts. */
export function tellPlan(zone: string, madeMs: number, missK = 0.8, missFactor = 1.1): PlanRecord {
  const slotMs = 15 * MINUTE_MS;
  const steps = Array.from({ length: 144 }, (_, index): PlanStep => {
    const startMs = Math.floor(madeMs / slotMs) * slotMs + index * slotMs;
    const minute = localMinuteOfDay(zone, startMs + slotMs / 2);
    const command = commandAt(minute);
    const outdoorC = outdoorAt(minute) + missK;
    const loadW = command === 'discharge' ? 1290 * missFactor : 0;
    return {
      startMs,
      command,
      iceKwh: 6 + 3 * Math.sin(index / 20),
      iceLowKwh: 5 + 3 * Math.sin(index / 20),
      iceHighKwh: 7 + 3 * Math.sin(index / 20),
      priceMoneyPerKwh: priceAt(minute)[0],
      outdoorC,
      outdoorLowC: outdoorC - 1.5,
      outdoorHighC: outdoorC + 1.5,
      loadW,
      loadLowW: loadW * 0.75,
      loadHighW: loadW * 1.3,
    };
  });
  return {
    madeMs,
    outcome: 'solved',
    strategy: 'planned',
    slotMs,
    steps,
    expectedCostMoney: 0.6123,
    worthOfIceMoneyPerKwh: 0.081,
    waitCostMoney: 0.012,
    reason: 'Ice is cheapest between 01:00 and 07:30.',
    forecastKnows: 'It rests on 34 own days.',
  };
}

/**
 * A made-up evening at Juniper hut, 14 July 2026: the night's curves as knots over hours since noon. The figures are
 * invented to look like the plant in the site file; they prove nothing about physics and stand for no measurement.
 */
import type { Command, Mode } from '../../src/commands.ts';
import type { CycleRecord, PlanRecord, PlanStep } from '../../src/record.ts';
import { fromWall, HOUR_MS, MINUTE_MS, nightAt, toWall } from '../../src/time.ts';

export const ZONE = 'Europe/Madrid';
export const EVENING = nightAt(ZONE, fromWall(ZONE, 2026, 7, 14, 13 * 60));
/** 21:20 local: half way through the melt. */
export const NOW_MS = fromWall(ZONE, 2026, 7, 14, 21 * 60 + 20);
export const CAPACITY_KWH = 16.7;
const SPAN_MS = MINUTE_MS;
const SLOT_MS = 15 * MINUTE_MS;

type Knots = readonly (readonly [hour: number, value: number])[];

const ICE: Knots = [
  [0, 6.1],
  [2, 6.0],
  [6, 9.7],
  [7.2, 9.65],
  [9.33, 6.1],
  [12.3, 2.2],
  [15.25, 2.05],
  [19.5, 6.3],
  [24, 6.1],
];
const OUTDOOR: Knots = [
  [0, 30.2],
  [3, 34.1],
  [5, 35.2],
  [7, 32.9],
  [9, 28.8],
  [12, 24.1],
  [15, 20.6],
  [18, 18.2],
  [20, 20.9],
  [22, 26],
  [24, 30.2],
];
const ROOM: Knots = [
  [0, 24.4],
  [3, 25.3],
  [6, 26.4],
  [7.3, 26.7],
  [8.2, 25.6],
  [10, 25.3],
  [12, 24.9],
  [15, 24.4],
  [18, 23.6],
  [21, 23.9],
  [24, 24.4],
];
const LEAVING: Knots = [
  [0, 1.9],
  [2, 2.3],
  [3, 0.6],
  [6, 0.3],
  [7.1, 1.3],
  [7.4, 3.1],
  [9.33, 3.9],
  [12.3, 6.4],
  [15, 4.8],
  [19, 0.4],
  [24, 1.9],
];
const LOAD: Knots = [
  [0, 0],
  [6.9, 0],
  [7.3, 1900],
  [9.3, 1700],
  [11.5, 1150],
  [12.3, 800],
  [12.6, 0],
  [24, 0],
];

function at(knots: Knots, hour: number): number {
  const i = knots.findIndex(([h]) => h >= hour);
  if (i === 0) return knots[0][1];
  if (i < 0) return knots[knots.length - 1][1];
  const [h0, v0] = knots[i - 1];
  const [h1, v1] = knots[i];
  return v0 + ((v1 - v0) * (hour - h0)) / (h1 - h0);
}

const round = (value: number, digits = 2): number => Number(value.toFixed(digits));

/** Hours since the noon of the night that an instant is in; every night of the fake repeats the evening. */
const hourOf = (atMs: number): number => (atMs - nightAt(ZONE, atMs).startMs) / HOUR_MS;

function modeAt(hour: number): Mode {
  if (hour >= 7.2 && hour < 12.3) return hour < 7.5 ? 'charging-while-discharging' : 'discharging';
  return (hour >= 2 && hour < 6) || (hour >= 7 && hour < 7.2) || (hour >= 15.25 && hour < 19.5)
    ? 'charging'
    : 'idle';
}

const COMMAND: Readonly<Record<Mode, Command>> = {
  idle: 'hold',
  charging: 'charge-now',
  discharging: 'discharge',
  'charging-while-discharging': 'charge-and-discharge',
  'direct-cooling': 'discharge',
};

const PERIODS: readonly (readonly [name: string, price: number, fromHour: number, toHour: number])[] = [
  ['valley', 0.11, 0, 8],
  ['flat', 0.17, 8, 10],
  ['peak', 0.28, 10, 14],
  ['flat', 0.17, 14, 18],
  ['peak', 0.28, 18, 22],
  ['flat', 0.17, 22, 24],
];

function periodAt(atMs: number): { name: string; price: number } {
  const { hour } = toWall(ZONE, atMs);
  const period = PERIODS.find(([, , from, to]) => hour >= from && hour < to) ?? PERIODS[0];
  return { name: period[0], price: period[1] };
}

const REASONS: Readonly<Record<Command, string>> = {
  hold: 'Power is at 0.17 EUR/kWh and ice can be made for 0.11 after midnight; the bank holds what the evening needs.',
  'charge-now':
    'The evening may need 9.3 kWh and 6.0 are in the bank; at 0.17 EUR/kWh ice now is cheaper than at the peak from 18:00.',
  discharge:
    'The room was at 26.6 °C against a limit of 26.0, power is at its peak of 0.28 EUR/kWh, and ice on hand covers the evening.',
  'charge-and-discharge': 'The room needs cooling now and the machine must end its shortest run.',
};

export function recordAt(atMs: number): CycleRecord {
  const hour = hourOf(atMs);
  const mode = modeAt(hour);
  const command = COMMAND[mode];
  const charging = mode.startsWith('charging');
  const melting = mode.endsWith('discharging');
  const ice = at(ICE, hour);
  const spread = 0.45 + 0.05 * Math.min(hour, 12);
  const period = periodAt(atMs);
  return {
    atMs,
    spanMs: SPAN_MS,
    clock: 'set',
    leavingWaterC: round(at(LEAVING, hour)),
    enteringWaterC: null,
    bankTopC: round(at(LEAVING, hour) + 0.8),
    bankMiddleC: null,
    bankBottomC: round(at(LEAVING, hour) + 0.4),
    bankLevelMm: null,
    bankSurroundC: 22.4,
    coolantSupplyC: charging ? -8.4 : null,
    coolantReturnC: null,
    loopFlowLPerMin: null,
    chillerPowerW: charging ? 548 : 1,
    pumpPowerW: melting ? 44 : 0,
    fanPowerW: melting ? 39 : 0,
    roomC: round(at(ROOM, hour)),
    roomHumidityPct: 44,
    outdoorC: round(at(OUTDOOR, hour)),
    outdoorHumidityPct: 31,
    panelPowerW: null,
    batteryPct: null,
    generatorPowerW: null,
    housePowerW: null,
    gridPowerW: null,
    pointsStale: '',
    iceOnHandKwh: round(ice),
    iceOnHandLowKwh: round(ice - spread),
    iceOnHandHighKwh: round(ice + spread),
    iceKg: round(ice * 9.1, 1),
    inventoryPct: round((ice / CAPACITY_KWH) * 100, 1),
    phase: 'mixed',
    waterC: round(at(LEAVING, hour) * 0.6),
    heatLeakWPerK: 2.1,
    chargingW: charging ? 930 : 0,
    dischargingW: melting ? round(at(LOAD, hour), 0) : 0,
    leakW: 46,
    deliveredW: melting ? round(at(LOAD, hour) * 0.96, 0) : null,
    latentW: melting ? 120 : null,
    priceMoneyPerKwh: period.price,
    pricePeriod: period.name,
    strategy: 'planned',
    planMadeMs: atMs - (atMs % SLOT_MS),
    planOutcome: 'solved',
    eveningLoadKwh: 7.9,
    eveningLoadHighKwh: 9.3,
    worthOfIceMoneyPerKwh: 0.094,
    waitCostMoney: 0.03,
    nextChangeMs: EVENING.startMs + 12.3 * HOUR_MS,
    lastsUntilMs: EVENING.startMs + (13 + 2 / 3) * HOUR_MS,
    requested: command,
    command,
    reason: REASONS[command],
    heldBackBy: '',
    wish: 'none',
    wishUntilMs: null,
    mode,
    limitC: 26,
    home: hour >= 5,
    warmKh: at(ROOM, hour) > 26 && hour >= 5 ? round(((at(ROOM, hour) - 26) * SPAN_MS) / HOUR_MS, 4) : 0,
    feelsLikeC: round(at(ROOM, hour) + 0.2, 1),
  };
}

export function recordsBetween(fromMs: number, toMs: number): CycleRecord[] {
  const firstMs = (Math.floor(fromMs / SPAN_MS) + 1) * SPAN_MS;
  const count = Math.max(0, Math.floor((toMs - firstMs) / SPAN_MS) + 1);
  return Array.from({ length: count }, (_, i) => recordAt(firstMs + i * SPAN_MS));
}

/** A plan for 36 h; `shiftKwh` and `shiftK` make an earlier plan that thought otherwise. */
export function planAt(madeMs: number, shiftKwh = 0, shiftK = 0): PlanRecord {
  const startMs = Math.floor(madeMs / SLOT_MS) * SLOT_MS;
  const steps = Array.from({ length: 144 }, (_, i) => planStep(startMs + i * SLOT_MS, i, shiftKwh, shiftK));
  return {
    madeMs,
    outcome: 'solved',
    strategy: 'planned',
    slotMs: SLOT_MS,
    steps,
    expectedCostMoney: 0.42,
    worthOfIceMoneyPerKwh: 0.094,
    waitCostMoney: 0.03,
    reason: REASONS.discharge,
    forecastKnows: 'Forecast from 31 of its own evenings and the outdoor sensor.',
  };
}

function planStep(startMs: number, index: number, shiftKwh: number, shiftK: number): PlanStep {
  const hour = hourOf(startMs);
  const grow = 0.5 + Math.min(2.2, index * 0.06);
  const ice = Math.max(0.3, at(ICE, hour) + shiftKwh * Math.min(1, index / 24));
  const load = at(LOAD, hour);
  const outdoor = at(OUTDOOR, hour) + shiftK * Math.min(1, index / 12);
  return {
    startMs,
    command: COMMAND[modeAt(hour)],
    iceKwh: round(ice),
    iceLowKwh: round(Math.max(0, ice - grow)),
    iceHighKwh: round(Math.min(CAPACITY_KWH, ice + grow)),
    priceMoneyPerKwh: periodAt(startMs).price,
    outdoorC: round(outdoor),
    outdoorLowC: round(outdoor - 0.3 - index * 0.02),
    outdoorHighC: round(outdoor + 0.3 + index * 0.02),
    loadW: round(load, 0),
    loadLowW: round(load * 0.7, 0),
    loadHighW: round(load * 1.35, 0),
  };
}

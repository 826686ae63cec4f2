/** A small site and records for tests of what is published. */
import type { SiteConfig } from '../../src/config.ts';
import type { ClearedCommand } from '../../src/order.ts';
import type { CycleRecord, PlanRecord } from '../../src/record.ts';
import { parseSiteFile } from '../../src/site-file.ts';

export function siteConfig(more = ''): SiteConfig {
  const parsed = parseSiteFile(`
site: {id: juniper, name: Juniper hut, zone: Europe/Madrid, latitude: 38.4 deg, longitude: -2.9 deg}
points:
  leaving-water: {topic: shed/out}
  chiller-power: {topic: plug7/power}
  room-temperature: {topic: home/room}
  outdoor-temperature: {topic: hut/outdoor}
bank: {form: ice-on-coil-external, water: 240 L, most-ice: 150 kg}
chiller: {ice-making: 1.05 kW, power: 0.55 kW}
delivery: {flow: 12 L/min}
power: {tariff: {default: 0.2}}
${more}`);
  if (!parsed.ok) throw new Error(JSON.stringify(parsed.faults));
  return parsed.config;
}

export const NOW_MS = Date.UTC(2026, 6, 14, 18, 0);

export function cycleRecord(changes: Partial<CycleRecord> = {}): CycleRecord {
  return {
    atMs: NOW_MS,
    spanMs: 30_000,
    clock: 'set',
    leavingWaterC: 3.2,
    enteringWaterC: null,
    bankTopC: null,
    bankMiddleC: null,
    bankBottomC: null,
    bankLevelMm: null,
    bankSurroundC: null,
    coolantSupplyC: null,
    coolantReturnC: null,
    loopFlowLPerMin: null,
    chillerPowerW: 552,
    pumpPowerW: null,
    fanPowerW: null,
    roomC: 25.4,
    roomHumidityPct: null,
    outdoorC: 31,
    outdoorHumidityPct: null,
    panelPowerW: null,
    batteryPct: null,
    generatorPowerW: null,
    housePowerW: null,
    gridPowerW: null,
    pointsStale: '',
    iceOnHandKwh: 8.4321,
    iceOnHandLowKwh: 7.9,
    iceOnHandHighKwh: 9.1,
    iceKg: 86.53,
    inventoryPct: 57.7,
    phase: 'mixed',
    waterC: 0.4,
    heatLeakWPerK: 2.131,
    chargingW: 950,
    dischargingW: 0,
    leakW: 45,
    deliveredW: null,
    latentW: null,
    priceMoneyPerKwh: 0.2,
    pricePeriod: 'default',
    strategy: 'planned',
    planMadeMs: NOW_MS - 60_000,
    planOutcome: 'solved',
    eveningLoadKwh: 6.2,
    eveningLoadHighKwh: 8.1,
    worthOfIceMoneyPerKwh: 0.0712,
    waitCostMoney: 0.03,
    nextChangeMs: NOW_MS + 3_600_000,
    lastsUntilMs: null,
    requested: 'charge-now',
    command: 'charge-now',
    reason: 'Power is at its cheapest until 20:00.',
    heldBackBy: '',
    wish: 'none',
    wishUntilMs: null,
    mode: 'charging',
    limitC: 26,
    home: true,
    warmKh: 0,
    feelsLikeC: null,
    ...changes,
  };
}

export function planRecord(changes: Partial<PlanRecord> = {}): PlanRecord {
  return {
    madeMs: NOW_MS,
    outcome: 'solved',
    strategy: 'planned',
    slotMs: 900_000,
    steps: [
      {
        startMs: NOW_MS,
        command: 'charge-now',
        iceKwh: 8.43,
        iceLowKwh: 7.9,
        iceHighKwh: 9.1,
        priceMoneyPerKwh: 0.2,
        outdoorC: 31,
        outdoorLowC: 30,
        outdoorHighC: 32,
        loadW: 0,
        loadLowW: 0,
        loadHighW: 0,
      },
    ],
    expectedCostMoney: 0.6,
    worthOfIceMoneyPerKwh: 0.0712,
    waitCostMoney: 0.03,
    reason: 'Power is at its cheapest until 20:00.',
    forecastKnows: 'fourteen days of this site',
    ...changes,
  };
}

/** Only the interlocks can make one; a test may pretend, and says so here once. */
export function pretendCleared(changes: Partial<ClearedCommand> = {}): ClearedCommand {
  const order = {
    command: 'charge-now',
    reason: 'Power is at its cheapest until 20:00.',
    issuedMs: NOW_MS,
    expiresMs: NOW_MS + 90_000,
    heldBackBy: '',
    switches: { chiller: true, pump: false, fan: false },
    numbers: { iceOnHandKwh: 8.43, waitCostMoney: null },
    ...changes,
  };
  return order as unknown as ClearedCommand;
}

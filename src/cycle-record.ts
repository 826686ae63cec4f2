/** The record of a cycle: everything behind its decision, flat, from what the stages said. */
import { limitAt } from './comfort-hours.ts';
import type { SiteConfig } from './config.ts';
import type { Mode, Strategy, Wish } from './commands.ts';
import { isHome, priceAt, type Moment, type Planned } from './cycle-values.ts';
import type { Limits, Request } from './dispatch/types.ts';
import type { IceEstimate } from './estimation/types.ts';
import type { ClearedCommand } from './order.ts';
import { heatIndexC } from './physics/comfort.ts';
import { humidityRatio, standardPressurePa } from './physics/moist-air.ts';
import { wetFactor } from './plant/delivery.ts';
import { meanOverRooms, valueOf, type LivePoints } from './points.ts';
import type { CycleRecord } from './record.ts';
import { HOUR_MS } from './time.ts';

export interface RecordParts {
  readonly config: SiteConfig;
  readonly limits: Limits;
  readonly moment: Moment;
  readonly estimate: IceEstimate;
  readonly planned: Planned | null;
  readonly request: Request;
  readonly order: ClearedCommand;
  readonly wish: Wish | null;
  readonly strategy: Strategy;
  readonly spanMs: number;
}

export function recordOf(parts: RecordParts): CycleRecord {
  const { moment, spanMs } = parts;
  return {
    atMs: moment.nowMs,
    spanMs,
    clock: moment.clock.state,
    ...heard(moment.live),
    ...estimated(parts),
    ...delivered(parts),
    ...pricedAndPlanned(parts),
    ...decided(parts),
    ...comfort(parts),
  };
}

function heard(live: LivePoints) {
  return {
    leavingWaterC: valueOf(live, 'leaving-water'),
    enteringWaterC: valueOf(live, 'entering-water'),
    bankTopC: valueOf(live, 'bank-top'),
    bankMiddleC: valueOf(live, 'bank-middle'),
    bankBottomC: valueOf(live, 'bank-bottom'),
    bankLevelMm: valueOf(live, 'bank-level'),
    bankSurroundC: valueOf(live, 'bank-surround'),
    coolantSupplyC: valueOf(live, 'coolant-supply'),
    coolantReturnC: valueOf(live, 'coolant-return'),
    loopFlowLPerMin: valueOf(live, 'loop-flow'),
    chillerPowerW: valueOf(live, 'chiller-power'),
    pumpPowerW: valueOf(live, 'pump-power'),
    fanPowerW: valueOf(live, 'fan-power'),
    roomC: meanOverRooms(live, 'room-temperature'),
    roomHumidityPct: meanOverRooms(live, 'room-humidity'),
    outdoorC: valueOf(live, 'outdoor-temperature'),
    outdoorHumidityPct: valueOf(live, 'outdoor-humidity'),
    panelPowerW: valueOf(live, 'panel-power'),
    batteryPct: valueOf(live, 'battery-charge'),
    generatorPowerW: valueOf(live, 'generator-power'),
    housePowerW: valueOf(live, 'house-power'),
    gridPowerW: valueOf(live, 'grid-power'),
    pointsStale: Object.entries(live)
      .filter(([, point]) => point?.value === null)
      .map(([id]) => id)
      .join(','),
  };
}

function estimated({ estimate }: RecordParts) {
  return {
    iceOnHandKwh: estimate.iceOnHandKwh,
    iceOnHandLowKwh: estimate.lowKwh,
    iceOnHandHighKwh: estimate.highKwh,
    iceKg: estimate.iceKg,
    inventoryPct: estimate.inventoryPct,
    phase: estimate.phase,
    waterC: estimate.waterC,
    heatLeakWPerK: estimate.heatLeakWPerK,
    chargingW: estimate.chargingW,
    dischargingW: estimate.dischargingW,
    leakW: estimate.leakW,
  };
}

/** What the coil took from the rooms: what came into the bank less the pump's own heat; null when no water flows. */
function delivered({
  config,
  moment,
  estimate,
  order,
}: RecordParts): Pick<CycleRecord, 'deliveredW' | 'latentW'> {
  const { live } = moment;
  if (!pumpRuns(config, live, order)) return { deliveredW: null, latentW: null };
  const pumpW = valueOf(live, 'pump-power') ?? config.delivery.pumpW;
  const deliveredW = Math.max(0, estimate.dischargingW - pumpW);
  const share = latentShare(config, live);
  return { deliveredW, latentW: share === null ? null : deliveredW * share };
}

function pumpRuns(config: SiteConfig, live: LivePoints, order: ClearedCommand): boolean {
  const power = valueOf(live, 'pump-power');
  return power === null ? order.switches.pump : power > config.delivery.runningAboveW;
}

/** Share of the delivered heat that is moisture, by the wet-coil factor at the mean water temperature; null without room humidity. */
function latentShare(config: SiteConfig, live: LivePoints): number | null {
  const roomC = meanOverRooms(live, 'room-temperature');
  const humidity = meanOverRooms(live, 'room-humidity');
  const leaving = valueOf(live, 'leaving-water');
  if (roomC === null || humidity === null || leaving === null) return null;
  const surfaceC = (leaving + (valueOf(live, 'entering-water') ?? leaving)) / 2;
  const pressurePa = standardPressurePa(config.site.elevationM);
  const roomRatio = humidityRatio(roomC, humidity, pressurePa);
  const surfaceRatio = humidityRatio(surfaceC, 100, pressurePa);
  return 1 - 1 / wetFactor(roomC, roomRatio, surfaceC, surfaceRatio);
}

function pricedAndPlanned({ planned, moment, strategy }: RecordParts) {
  const price = priceAt(planned?.prices ?? [], moment.nowMs);
  const plan = planned?.plan ?? null;
  return {
    priceMoneyPerKwh: price?.buy ?? null,
    pricePeriod: price?.period ?? '',
    strategy,
    planMadeMs: plan?.madeMs ?? null,
    planOutcome: plan?.outcome ?? ('none' as const),
    eveningLoadKwh: planned?.forecast.eveningLoadKwh ?? null,
    eveningLoadHighKwh: planned?.forecast.eveningLoadHighKwh ?? null,
    worthOfIceMoneyPerKwh: plan?.worthOfIceMoneyPerKwh ?? null,
    waitCostMoney: plan?.waitCostMoney ?? null,
    nextChangeMs: plan?.nextChangeMs ?? null,
    lastsUntilMs: plan?.lastsUntilMs ?? null,
  };
}

function decided({ config, limits, moment, request, order, wish }: RecordParts) {
  const chillerW = valueOf(moment.live, 'chiller-power');
  const charging = chillerW === null ? order.switches.chiller : chillerW > limits.chillerRunningAboveW;
  return {
    requested: request.command,
    command: order.command,
    reason: order.reason,
    heldBackBy: order.heldBackBy,
    wish: wish?.name ?? ('none' as const),
    wishUntilMs: wish?.untilMs ?? null,
    mode: modeOf(charging, pumpRuns(config, moment.live, order)),
  };
}

function modeOf(charging: boolean, discharging: boolean): Mode {
  if (charging) return discharging ? 'charging-while-discharging' : 'charging';
  return discharging ? 'discharging' : 'idle';
}

function comfort({ config, moment, spanMs }: RecordParts) {
  const { nowMs, live } = moment;
  const roomC = meanOverRooms(live, 'room-temperature');
  const humidity = meanOverRooms(live, 'room-humidity');
  const limitC = limitAt(config.comfort, config.site.zone, nowMs);
  const home = isHome(config, live, nowMs);
  const overK = roomC === null ? 0 : Math.max(0, roomC - limitC);
  return {
    limitC,
    home,
    warmKh: home ? (overK * spanMs) / HOUR_MS : 0,
    feelsLikeC: roomC === null || humidity === null ? null : heatIndexC(roomC, humidity),
  };
}

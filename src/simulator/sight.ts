/** What each point would show of the true plant if its probe were perfect. */
import { LAYERS } from './bank-shape.ts';
import { upperRoomNames, type Plant } from './plant.ts';
import { roomRhPct } from './truth.ts';

/** Share of the pipe's water in what a probe at the bank's outlet shows at rest; the bank conducts the remainder. */
const PIPE_AT_REST = 0.5;
/** Current of a resting machine's electronics, W. No source. */
const STANDBY_W = 1.5;

export type View = () => number;

/** One view for each point that the plant can show; points that come from elsewhere (forecast, prices) have none. */
export function viewsOf(plant: Plant): Map<string, View> {
  return new Map([...bankViews(plant), ...powerViews(plant), ...airViews(plant)]);
}

function bankViews(plant: Plant): [string, View][] {
  const { bank, loop } = plant;
  const layer = (part: number) => (): number =>
    bank.layers.temperatureC(Math.min(LAYERS - 1, Math.floor(part * LAYERS)));
  const electrodeKg = plant.site.bank.electrodeIceKg;
  const emptyMm = plant.site.bank.emptyLevelMm;
  const startMm = bank.totalKg() / plant.site.bank.waterAreaM2;
  const leaving = (): number =>
    plant.flowKgPerS > 0
      ? bank.leavingC
      : PIPE_AT_REST * loop.supplyC + (1 - PIPE_AT_REST) * bank.layers.temperatureC(LAYERS - 1);
  return [
    ['leaving-water', leaving],
    ['entering-water', () => loop.returnC],
    ['bank-top', layer(1 / 6)],
    ['bank-middle', layer(1 / 2)],
    ['bank-bottom', layer(5 / 6)],
    ['bank-level', () => bank.levelMm() + (emptyMm === null ? 0 : emptyMm - startMm)],
    ['bank-surround', () => plant.surroundC],
    ['coolant-supply', () => plant.coolantSupplyC],
    ['coolant-return', () => plant.coolantReturnC],
    ['loop-flow', () => plant.flowKgPerS * 60],
    ['ice-at-electrode', () => (electrodeKg !== null && middleIceKg(plant) >= electrodeKg ? 1 : 0)],
  ];
}

/** Ice in the bank if every layer held what the middle one holds: what an electrode at half height can tell. */
function middleIceKg(plant: Plant): number {
  return LAYERS * plant.bank.shells.iceKg(LAYERS >> 1);
}

function powerViews(plant: Plant): [string, View][] {
  const startW = plant.site.chiller.startW;
  const chiller = (): number => {
    const { machine } = plant;
    if (!machine.running) return STANDBY_W;
    return startW > 0 && machine.runningS() <= plant.stepS ? startW : machine.powerW;
  };
  return [
    ['chiller-power', chiller],
    ['pump-power', () => (plant.pumpW > 0 ? plant.pumpW : STANDBY_W / 3)],
    ['fan-power', () => (plant.fanW > 0 ? plant.fanW : STANDBY_W / 3)],
    ['house-power', () => plant.houseW],
    ['grid-power', () => (plant.island ? 0 : plant.houseW + plant.plantW())],
    ['panel-power', () => plant.island?.panelW ?? 0],
    ['battery-charge', () => plant.island?.chargePct() ?? 0],
    ['generator-power', () => plant.island?.generatorW ?? 0],
    ['high-pressure-trip', () => (plant.machine.tripped ? 1 : 0)],
    ['drip-tray-wet', () => (plant.trayWet ? 1 : 0)],
  ];
}

function airViews(plant: Plant): [string, View][] {
  const rooms = ['', ...upperRoomNames(plant.site).map((name) => `/${name}`)];
  return [
    ['outdoor-temperature', () => plant.sky.outdoorC],
    ['outdoor-humidity', () => plant.sky.outdoorRhPct],
    ['occupied', () => (plant.home ? 1 : 0)],
    ...rooms.map((name, r): [string, View] => [`room-temperature${name}`, () => plant.cabin.airC[r]]),
    ...rooms.map((name, r): [string, View] => [`room-humidity${name}`, () => roomRhPct(plant, r)]),
  ];
}

/** What is really so in the plant at an instant; for scoring, never for control. */
import type { Plant } from './plant.ts';

export interface Truth {
  readonly atMs: number;
  readonly iceKg: number;
  /** Latent and sensible of all water up to the site's useful leaving temperature. */
  readonly iceOnHandKwh: number;
  readonly inventoryPct: number;
  /** Water at the bank's outlet and coming back to it. */
  readonly leavingC: number;
  readonly enteringC: number;
  /** Free water from top to bottom. */
  readonly layersC: readonly number[];
  readonly levelMm: number;
  readonly roomC: number;
  readonly roomRhPct: number;
  readonly roomsC: readonly number[];
  readonly outdoorC: number;
  readonly outdoorRhPct: number;
  readonly ghiWPerM2: number;
  readonly home: boolean;
  readonly surroundC: number;
  readonly chillerW: number;
  readonly pumpW: number;
  readonly fanW: number;
  readonly houseW: number;
  /** Heat that the machine takes from the bank, and at which evaporating and condensing temperature. */
  readonly iceMakingW: number;
  readonly evaporatingC: number;
  readonly condensingC: number;
  /** Heat taken from the rooms by the coil, and the part of it that is moisture. */
  readonly deliveredW: number;
  readonly latentW: number;
  /** Heat brought into the bank by the loop, and leaking into it. */
  readonly loopW: number;
  readonly leakW: number;
  readonly flowLPerMin: number;
  readonly condensateKg: number;
  readonly evaporatedKg: number;
  readonly panelW: number;
  readonly batteryPct: number;
  readonly generatorW: number;
  readonly powered: boolean;
  /** Since the start. */
  readonly totals: {
    readonly iceMadeKwh: number;
    readonly loopHeatKwh: number;
    readonly leakKwh: number;
    readonly deliveredKwh: number;
    readonly latentKwh: number;
    readonly chillerKwh: number;
    readonly pumpKwh: number;
    readonly fanKwh: number;
    readonly houseKwh: number;
  };
}

const KWH_J = 3.6e6;

/** Relative humidity of a room, %. */
export function roomRhPct(plant: Plant, room: number): number {
  return plant.saturation.humidityPct(plant.cabin.airC[room], plant.cabin.ratio[room]);
}

export function truthOf(plant: Plant, atMs: number, stepS: number): Truth {
  const { bank, machine, loop, cabin, island, sky } = plant;
  const iceKg = bank.iceKg();
  return {
    atMs,
    iceKg,
    iceOnHandKwh: bank.iceOnHandKwh(plant.site.bank.usefulLeavingC),
    inventoryPct: (100 * iceKg) / plant.site.bank.mostIceKg,
    leavingC: bank.leavingC,
    enteringC: loop.returnC,
    layersC: Array.from(bank.layers.waterKg, (_, i) => bank.layers.temperatureC(i)),
    levelMm: bank.levelMm(),
    roomC: cabin.airC[0],
    roomRhPct: roomRhPct(plant, 0),
    roomsC: Array.from(cabin.airC),
    outdoorC: sky.outdoorC,
    outdoorRhPct: sky.outdoorRhPct,
    ghiWPerM2: sky.ghiWPerM2,
    home: plant.home,
    surroundC: plant.surroundC,
    chillerW: machine.powerW,
    pumpW: plant.pumpW,
    fanW: plant.fanW,
    houseW: plant.houseW,
    iceMakingW: bank.coilJ / stepS,
    evaporatingC: machine.evaporatingC,
    condensingC: machine.condensingC,
    deliveredW: loop.deliveredW,
    latentW: loop.latentW,
    loopW: bank.loopJ / stepS,
    leakW: bank.leakJ / stepS,
    flowLPerMin: plant.flowKgPerS * 60,
    condensateKg: plant.ledger.condensateKg,
    evaporatedKg: plant.ledger.evaporatedKg,
    panelW: island?.panelW ?? 0,
    batteryPct: island?.chargePct() ?? 0,
    generatorW: island?.generatorW ?? 0,
    powered: island?.powered ?? true,
    totals: totalsOf(plant),
  };
}

function totalsOf(plant: Plant): Truth['totals'] {
  const { ledger, electricJ } = plant;
  return {
    iceMadeKwh: ledger.iceMakingJ / KWH_J,
    loopHeatKwh: ledger.loopJ / KWH_J,
    leakKwh: ledger.leakJ / KWH_J,
    deliveredKwh: ledger.deliveredJ / KWH_J,
    latentKwh: ledger.latentJ / KWH_J,
    chillerKwh: electricJ.chiller / KWH_J,
    pumpKwh: electricJ.pump / KWH_J,
    fanKwh: electricJ.fan / KWH_J,
    houseKwh: electricJ.house / KWH_J,
  };
}

/** The whole true plant: bank, ice machine, loop, rooms, household, island, and the weather on them; stepped as one. */
import type { SiteConfig } from '../config.ts';
import { createRandom, type Random } from '../numerics/random.ts';
import { airDensityKgPerM3, standardPressurePa } from '../physics/moist-air.ts';
import {
  extraterrestrialWPerM2,
  planeOfArray,
  splitGlobal,
  sunPosition,
  type Plane,
} from '../physics/sun.ts';
import { WATER_CP_J_PER_KG_K } from '../physics/water.ts';
import { DAY_MS } from '../time.ts';
import { IceBank, VAPOUR_J_PER_KG, type BankStep } from './bank.ts';
import { Cabin, type CabinAir } from './cabin.ts';
import { CondensingUnit } from './condensing-unit.ts';
import { Household } from './household.ts';
import { Island } from './island.ts';
import { Ledger } from './ledger.ts';
import { LoadLoop } from './load-loop.ts';
import { drawParameters, driftedFactors, type TruthOverrides, type TruthParameters } from './parameters.ts';
import { SaturationTable } from './saturation.ts';
import type { WeatherSample, WeatherSource } from './weather.ts';

/** A person at rest or light work: sensible and moisture. ASHRAE's seated person: 70 W and 45 W; common practice. */
const PERSON_W = 70;
const PERSON_KG_PER_S = 45 / VAPOUR_J_PER_KG;
/** Windows of the aperture by the way they face. */
const WINDOWS: readonly (readonly [part: number, plane: Plane])[] = [
  [0.4, { tiltDeg: 90, azimuthDeg: 180 }],
  [0.3, { tiltDeg: 90, azimuthDeg: 270 }],
  [0.2, { tiltDeg: 90, azimuthDeg: 90 }],
  [0.1, { tiltDeg: 90, azimuthDeg: 0 }],
];
/** Mean electric load of a house on the grid, W, and the part of it that warms the rooms. No source. */
const GRID_HOUSE_W = 220;
const HOUSE_TO_ROOM = 0.7;
/** Part of its power that a pump still takes when it runs dry; common practice, no source. */
const DRY_PUMP_PART = 0.35;
const OPEN_WINDOW_PER_H = 6;
/** Coolant pipes at rest come to the bank's temperature with this time constant, s. */
const COOLANT_REST_S = 900;

export interface PlantStart {
  readonly iceKg?: number;
  readonly waterC?: number;
  readonly roomC?: number;
}

export interface PlantOptions {
  readonly site: SiteConfig;
  readonly seed: number;
  readonly startMs: number;
  readonly weather: WeatherSource;
  readonly truth?: TruthOverrides;
  readonly start?: PlantStart;
}

export class Plant {
  readonly site: SiteConfig;
  readonly parameters: TruthParameters;
  readonly bank: IceBank;
  readonly machine: CondensingUnit;
  readonly loop: LoadLoop;
  readonly cabin: Cabin;
  readonly island: Island | null;
  readonly ledger: Ledger;
  readonly saturation: SaturationTable;
  readonly on = { chiller: false, pump: false, fan: false };
  sky: WeatherSample;
  surroundC = 0;
  pumpW = 0;
  fanW = 0;
  houseW = 0;
  home = false;
  flowKgPerS = 0;
  coolantSupplyC: number;
  coolantReturnC: number;
  /** Sum of electric energies, J. */
  readonly electricJ = { chiller: 0, pump: 0, fan: 0, house: 0 };
  /** Set by a caller: somebody is (not) home whatever the habits say; a window stands open. */
  occupied: boolean | null = null;
  windowOpen = false;
  private readonly weather: WeatherSource;
  private readonly household: Household;
  private readonly startMs: number;
  private readonly pressurePa: number;
  private readonly bankBy: BankStep;
  private readonly cabinBy: CabinAir;
  private sunW = 0;

  /** Set by a caller: water stands in the drip tray. */
  trayWet = false;
  /** Set by a caller: the pump draws air. */
  pumpDry = false;
  readonly stepS: number;

  constructor(o: PlantOptions, stepS: number) {
    this.stepS = stepS;
    const random = createRandom(o.seed);
    this.site = o.site;
    this.weather = o.weather;
    this.startMs = o.startMs;
    this.parameters = drawParameters(random.fork('plant'), o.truth ?? {});
    this.pressurePa = standardPressurePa(o.site.site.elevationM);
    this.saturation = new SaturationTable(this.pressurePa);
    this.sky = o.weather.at(o.startMs);
    const start = { iceKg: 0.35 * o.site.bank.mostIceKg, roomC: 24.5, ...o.start };
    const waterC = start.waterC ?? (start.iceKg > 0 ? 0.6 : 12);
    this.bank = new IceBank(o.site, { iceKg: start.iceKg, waterC }, this.supercooling(random.fork('frost')));
    this.machine = new CondensingUnit(o.site.chiller, this.parameters.mostCondensingC);
    this.cabin = this.buildCabin(start.roomC);
    this.loop = new LoadLoop(o.site, this.cabin.rooms, this.saturation, start.roomC);
    const island = o.site.power.island;
    this.island = island ? new Island(island, o.site.site.zone) : null;
    this.household = new Household(o.site, random.fork('household'), this.parameters.awayChance);
    this.coolantSupplyC = waterC;
    this.coolantReturnC = waterC;
    this.bankBy = {
      coilOn: false,
      coolantC: 0,
      flowKgPerS: 0,
      enteringC: 0,
      surroundC: 0,
      airRatio: 0,
      surfaceRatio: 0,
    };
    this.cabinBy = { outdoorC: 0, outdoorRatio: 0, ghiWPerM2: 0, changesPerH: 0 };
    this.look(o.startMs);
    this.surroundC = this.surround();
    this.ledger = new Ledger(this.bank, this.cabin);
  }

  private supercooling(random: Random): () => number {
    const set = this.parameters.supercoolingK;
    return () => (set === null ? 0.8 + 2.2 * Math.min(2, Math.abs(random.normal())) : Math.max(1e-3, set));
  }

  private buildCabin(roomC: number): Cabin {
    const outdoorRatio = this.outdoorRatio();
    const density = airDensityKgPerM3(roomC, outdoorRatio, this.pressurePa);
    const upperRooms = upperRoomNames(this.site).length;
    return new Cabin(this.site, upperRooms, this.parameters, density, this.saturation, {
      roomC,
      ratio: Math.min(outdoorRatio, 0.9 * this.saturation.ratio(roomC)),
    });
  }

  private outdoorRatio(): number {
    return this.saturation.ratioAt(this.sky.outdoorC, this.sky.outdoorRhPct);
  }

  /** Every two minutes: weather, sun through the windows, people, ageing. */
  look(atMs: number): void {
    this.sky = this.weather.at(atMs);
    this.age((atMs - this.startMs) / DAY_MS);
    const { latitudeDeg, longitudeDeg } = this.site.site;
    const sun = sunPosition(atMs, latitudeDeg, longitudeDeg);
    const light = splitGlobal(this.sky.ghiWPerM2, sun.elevationDeg, extraterrestrialWPerM2(atMs));
    this.sunW = 0;
    if (this.sky.ghiWPerM2 > 0) {
      for (const [part, plane] of WINDOWS) this.sunW += part * planeOfArray(sun, light, plane);
    }
    this.sunW *= this.site.cabin.apertureM2 * this.parameters.apertureFactor;
    this.home = this.occupied ?? this.household.isHome(atMs);
    const meanW = this.site.power.island?.houseW ?? GRID_HOUSE_W;
    this.houseW = meanW * this.household.loadShape(atMs, this.home);
    this.cabinBy.outdoorC = this.sky.outdoorC;
    this.cabinBy.outdoorRatio = this.outdoorRatio();
    this.cabinBy.ghiWPerM2 = this.sky.ghiWPerM2;
    const windy = 0.4 + 0.2 * this.sky.windMPerS;
    this.cabinBy.changesPerH = this.windowOpen ? OPEN_WINDOW_PER_H : this.parameters.infiltrationPerH * windy;
    this.lookAtPanels(atMs, sun, light);
  }

  private lookAtPanels(
    atMs: number,
    sun: ReturnType<typeof sunPosition>,
    light: ReturnType<typeof splitGlobal>,
  ): void {
    if (!this.island) return;
    const { panelTiltDeg, panelAzimuthDeg } = this.island.config;
    const plane = { tiltDeg: panelTiltDeg, azimuthDeg: panelAzimuthDeg };
    const planeW = light.globalHorizontalWPerM2 > 0 ? planeOfArray(sun, light, plane) : 0;
    this.island.look(atMs, planeW, this.sky.outdoorC);
  }

  private age(days: number): void {
    if (days > 0 && Object.keys(this.parameters.driftPerDay).length === 0) return;
    const factors = driftedFactors(this.parameters, days);
    this.bank.leakFactor = factors.leakFactor;
    this.bank.coil.meltFactor = factors.meltFactor;
    this.bank.freezeFactor = factors.freezeFactor;
    this.machine.copFactor = factors.copFactor;
    this.machine.capacityFactor = factors.capacityFactor;
    this.loop.coilFactor = factors.coilFactor;
    this.flowFactor = factors.flowFactor;
    this.pumpPowerFactor = factors.pumpPowerFactor;
  }

  private flowFactor = 1;
  private pumpPowerFactor = 1;

  private surround(): number {
    const { stands, surroundC } = this.site.bank;
    if (stands === 'indoors') return this.cabin.airC[0];
    return stands === 'outdoors' ? this.sky.outdoorC : surroundC;
  }

  step(dtS: number): void {
    const powered = this.island?.powered ?? true;
    const { delivery } = this.site;
    const pumping = this.on.pump && powered;
    const open = pumping && !this.pumpDry ? this.bank.openPart() : 0;
    this.flowKgPerS = (delivery.flowLPerMin / 60) * this.flowFactor * open;
    this.pumpW = pumping ? delivery.pumpW * this.pumpPowerFactor * (this.pumpDry ? DRY_PUMP_PART : 1) : 0;
    const blowing = this.on.fan && powered;
    this.fanW = blowing ? delivery.fanW : 0;
    this.surroundC = this.surround();
    this.stepMachine(dtS, powered);
    this.stepBank(dtS);
    this.loop.step(dtS, this.flowKgPerS, this.bank.leavingC, this.pumpW, blowing, this.cabin);
    this.stepCabin(dtS);
    this.account(dtS);
    this.island?.step(dtS, this.houseW + this.plantW());
  }

  plantW(): number {
    return this.machine.powerW + this.pumpW + this.fanW;
  }

  private stepMachine(dtS: number, powered: boolean): void {
    const { rejects } = this.site.chiller;
    const inside = rejects === 'cooled-room' ? this.cabin.airC[0] : this.site.bank.surroundC;
    this.machine.on = this.on.chiller;
    this.machine.prepare(dtS, rejects === 'outdoors' ? this.sky.outdoorC : inside, powered);
    if (this.machine.running && !this.canStart()) this.machine.stall();
    if (!this.machine.running) return;
    if (this.bank.shape.throughTube && this.flowKgPerS > 0) {
      const rate = this.flowKgPerS * WATER_CP_J_PER_KG_K;
      const conductance = rate * this.bank.brineEffectiveness(rate);
      this.machine.meet(conductance, conductance * this.loop.returnC);
    } else {
      this.bank.faceCoil(dtS);
      this.machine.solve(this.bank.coilWPerK, this.bank.coilFaceC);
    }
  }

  /** A small inverter must carry the surge of a start beside all other load. */
  private canStart(): boolean {
    const { startW } = this.site.chiller;
    if (!this.island || this.machine.runningS() > this.stepS) return true;
    return startW + this.houseW + this.pumpW + this.fanW <= this.island.config.inverterW;
  }

  private stepBank(dtS: number): void {
    const by = this.bankBy;
    by.coilOn = this.machine.running;
    by.coolantC = this.machine.coolantC;
    by.flowKgPerS = this.flowKgPerS;
    by.enteringC = this.loop.returnC;
    by.surroundC = this.surroundC;
    by.airRatio = this.site.bank.stands === 'outdoors' ? this.cabinBy.outdoorRatio : this.cabin.ratio[0];
    by.surfaceRatio = this.saturation.ratio(this.bank.layers.temperatureC(0));
    this.bank.step(dtS, by);
    this.machine.tookW(this.bank.coilJ / dtS);
    this.stepCoolant(dtS);
  }

  private stepCoolant(dtS: number): void {
    if (this.machine.running) {
      this.coolantSupplyC = this.machine.coolantC;
      this.coolantReturnC = this.machine.coolantC + this.machine.superheatK;
      return;
    }
    const follows = dtS / COOLANT_REST_S;
    const bankC = this.bank.iceKg() > 0 ? 0 : this.bank.layers.meanC();
    this.coolantSupplyC += follows * (bankC - this.coolantSupplyC);
    this.coolantReturnC += follows * (bankC + 1 - this.coolantReturnC);
  }

  /** Everything that warms or wets the rooms, the coil apart (the loop has seen to that). */
  private stepCabin(dtS: number): void {
    const { cabin } = this;
    const people = this.home ? (this.parameters.occupants ?? this.site.cabin.occupants) : 0;
    const freeW = this.sunW + people * PERSON_W + HOUSE_TO_ROOM * this.houseW + this.fanW;
    for (let r = 0; r < cabin.rooms; r++) {
      cabin.heatW[r] += cabin.share[r] * freeW;
      cabin.moistureKgPerS[r] += cabin.share[r] * people * PERSON_KG_PER_S;
    }
    let mainW = this.loop.pumpAirW;
    if (this.site.chiller.rejects === 'cooled-room') mainW += this.machine.rejectsW();
    let vapour = 0;
    if (this.site.bank.stands === 'indoors') {
      mainW -= this.bank.leakJ / dtS;
      vapour = this.bank.evaporatedKg / dtS;
    }
    cabin.heatW[0] += mainW;
    cabin.moistureKgPerS[0] += vapour;
    let heatW = 0;
    let wetKgPerS = 0;
    for (let r = 0; r < cabin.rooms; r++) {
      heatW += cabin.heatW[r] + cabin.moistureKgPerS[r] * VAPOUR_J_PER_KG;
      wetKgPerS += cabin.moistureKgPerS[r];
    }
    cabin.step(dtS, this.cabinBy);
    this.ledger.cabinStep(
      heatW * dtS + cabin.envelopeJ,
      wetKgPerS * dtS + cabin.envelopeKg - cabin.settledKg,
    );
  }

  private account(dtS: number): void {
    this.ledger.bankStep(this.bank);
    this.ledger.deliveredJ += this.loop.deliveredW * dtS;
    this.ledger.latentJ += this.loop.latentW * dtS;
    this.ledger.condensateKg += this.loop.condensateKg;
    this.electricJ.chiller += this.machine.powerW * dtS;
    this.electricJ.pump += this.pumpW * dtS;
    this.electricJ.fan += this.fanW * dtS;
    this.electricJ.house += this.houseW * dtS;
  }
}

/** Rooms beside the main one: those that have a room-temperature point of their own name. */
export function upperRoomNames(site: SiteConfig): string[] {
  return Object.keys(site.points)
    .filter((id) => id.startsWith('room-temperature/'))
    .map((id) => id.slice('room-temperature/'.length));
}

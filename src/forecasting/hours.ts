/**
 * The forecaster's own history: one line for each whole hour (UTC), gathered from cycle records. Hours of the day are
 * UTC hours throughout, so daylight-saving changes shift nothing.
 */
import type { SiteConfig } from '../config.ts';
import { dewPointC, humidityRatio, standardPressurePa } from '../physics/moist-air.ts';
import type { CycleRecord } from '../record.ts';
import type { HourLine } from './hour-line.ts';
import { clearSkyOf } from './sky.ts';
import { HOUR_MS } from '../time.ts';

/** What the forecaster looks at in a record. */
export type Observed = Pick<
  CycleRecord,
  | 'atMs'
  | 'spanMs'
  | 'clock'
  | 'outdoorC'
  | 'outdoorHumidityPct'
  | 'roomC'
  | 'roomHumidityPct'
  | 'panelPowerW'
  | 'batteryPct'
  | 'chillerPowerW'
  | 'fanPowerW'
  | 'chargingW'
  | 'dischargingW'
  | 'deliveredW'
  | 'latentW'
  | 'home'
>;

/** From this charge on an island's charger may hold the panels back. */
const FULL_BATTERY_PCT = 97;
/** The least part of an hour that must have been heard for its mean to stand. */
const LEAST_HEARD = 0.5;
/** Moisture is known to be none while nothing is delivered, so an hour with a gap is one with unknown delivery. */
const LATENT_HEARD = 0.9;

class Mean {
  private sum = 0;
  private weightMs = 0;
  private readonly least: number;

  constructor(least = LEAST_HEARD) {
    this.least = least;
  }

  add(value: number | null, spanMs: number): void {
    if (value === null || !Number.isFinite(value)) return;
    this.sum += value * spanMs;
    this.weightMs += spanMs;
  }

  get value(): number | null {
    return this.weightMs >= this.least * HOUR_MS ? this.sum / this.weightMs : null;
  }

  get valueOrZero(): number {
    return this.weightMs > 0 ? this.sum / this.weightMs : 0;
  }
}

/** Gathers records of one hour after another; an hour is finished by a record that ends it or belongs to a later one. */
export class HourGatherer {
  private readonly config: SiteConfig;
  private readonly pressurePa: number;
  private hour: number | null = null;
  private means = newMeans();
  private roomEndC: number | null = null;

  constructor(config: SiteConfig) {
    this.config = config;
    this.pressurePa = standardPressurePa(config.site.elevationM);
  }

  /** Adds a record; gives the lines that it finishes. Records out of order are passed over. */
  add(record: Observed): HourLine[] {
    const hour = Math.floor((record.atMs - 1) / HOUR_MS);
    if (this.hour !== null && hour < this.hour) return [];
    const lines = this.hour !== null && hour > this.hour ? [this.finish(this.hour)] : [];
    this.hour = hour;
    this.gather(record, Math.min(record.spanMs, HOUR_MS));
    if (record.atMs % HOUR_MS !== 0) return lines;
    this.hour = hour + 1;
    return [...lines, this.finish(hour)];
  }

  private gather(record: Observed, spanMs: number): void {
    const { means } = this;
    means.outdoor.add(record.outdoorC, spanMs);
    means.dew.add(this.dewOf(record.outdoorC, record.outdoorHumidityPct), spanMs);
    means.room.add(record.roomC, spanMs);
    const heldBack = this.config.power.island !== null && (record.batteryPct ?? 0) >= FULL_BATTERY_PCT;
    means.panel.add(heldBack ? null : record.panelPowerW, spanMs);
    means.home.add(record.home ? 1 : 0, spanMs);
    if (record.roomC !== null) this.roomEndC = record.roomC;
    if (record.roomC !== null && record.roomHumidityPct !== null) {
      means.roomW.add(humidityRatio(record.roomC, record.roomHumidityPct, this.pressurePa), spanMs);
    }
    const sensibleW = sensibleOf(record);
    // A coil that rests takes nothing: without its rests the mean of an hour would be that of its runs.
    means.latent.add(record.latentW ?? (sensibleW > 0 ? null : 0), spanMs);
    means.sensible.add(sensibleW, spanMs);
    means.machine.add(this.machineHeatOf(record, sensibleW), spanMs);
  }

  private dewOf(outdoorC: number | null, humidityPct: number | null): number | null {
    if (outdoorC === null || humidityPct === null || !(humidityPct > 1)) return null;
    return dewPointC(outdoorC, Math.min(100, humidityPct), this.pressurePa);
  }

  /** Fans always warm the room; the condenser does where it stands in it. */
  private machineHeatOf(record: Observed, sensibleW: number): number {
    const { chiller, delivery } = this.config;
    const fanW = record.fanPowerW ?? (sensibleW > 0 ? delivery.fanW : 0);
    const rejected = chiller.rejects === 'cooled-room' ? record.chargingW + (record.chillerPowerW ?? 0) : 0;
    return fanW + rejected - sensibleW;
  }

  private finish(hour: number): HourLine {
    const { means } = this;
    const line = {
      hour,
      outdoorC: means.outdoor.value,
      dewC: means.dew.value,
      roomC: means.room.value,
      roomEndC: means.room.value === null ? null : this.roomEndC,
      roomW: means.roomW.value,
      panelW: means.panel.value,
      clearWPerM2: clearSkyOf(this.config, hour),
      machineHeatW: means.machine.value,
      sensibleW: means.sensible.valueOrZero,
      latentW: means.latent.value,
      home: means.home.valueOrZero,
    };
    this.means = newMeans();
    return line;
  }
}

function newMeans() {
  return {
    outdoor: new Mean(),
    dew: new Mean(),
    room: new Mean(),
    roomW: new Mean(),
    panel: new Mean(),
    machine: new Mean(),
    sensible: new Mean(),
    latent: new Mean(LATENT_HEARD),
    home: new Mean(),
  };
}

/** Where the delivery is not known, the heat that the loop brought into the bank stands for it. */
function sensibleOf(record: Observed): number {
  const totalW = record.deliveredW ?? Math.max(0, record.dischargingW);
  return Math.max(0, totalW - Math.max(0, record.latentW ?? 0));
}

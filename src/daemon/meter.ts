/**
 * What the stored cycles say of electricity: the month's energy and peak so far, and the house's habits. Read once from
 * the store and then only what is new: a month is nearly a hundred thousand records. Records that a late reading
 * changes afterwards are not read again before the next start; the bill itself always reads all of them.
 */
import type { SiteConfig } from '../config.ts';
import type { Outlook } from '../cycle-values.ts';
import type { CycleRecord } from '../record.ts';
import { demandSoFar, monthAt } from '../tariff/demand.ts';
import { energyBySlot, type EnergySlot } from '../tariff/energy.ts';
import { HouseProfile } from '../tariff/house.ts';
import { meterZone } from '../tariff/terms.ts';
import { DAY_MS, MINUTE_MS } from '../time.ts';

const HOUSE_DAYS = 14;
const SLOT_MS = 15 * MINUTE_MS;

export interface Records {
  recordsBetween(fromMs: number, toMs: number): readonly CycleRecord[];
}

export class Meter {
  readonly #config: SiteConfig;
  readonly #records: Records;
  readonly #house: HouseProfile;
  readonly #slots = new Map<number, EnergySlot>();
  #readToMs = Number.NaN;
  #monthMs = Number.NaN;

  constructor(config: SiteConfig, records: Records) {
    this.#config = config;
    this.#records = records;
    this.#house = new HouseProfile(config.site.zone);
  }

  at(nowMs: number): Pick<Outlook, 'demand' | 'month' | 'houseW'> {
    const month = monthAt(meterZone(this.#config), nowMs);
    this.#read(nowMs, month.startMs);
    const energy = [...this.#slots.values()].filter((slot) => slot.startMs >= month.startMs);
    const { tariff } = this.#config.power;
    return {
      demand: demandSoFar(this.#config, energy, nowMs),
      month:
        tariff === null
          ? null
          : { kwh: energy.reduce((sum, slot) => sum + slot.importKwh, 0), untilMs: month.endMs },
      houseW: this.#house.profile(),
    };
  }

  /** Day by day, so that a long history is never in memory at once. */
  #read(nowMs: number, monthMs: number): void {
    if (this.#monthMs !== monthMs) {
      for (const startMs of this.#slots.keys()) if (startMs < monthMs) this.#slots.delete(startMs);
      this.#monthMs = monthMs;
    }
    // A clock that was set back has made its records anew.
    if (!(this.#readToMs <= nowMs)) {
      this.#slots.clear();
      this.#readToMs = Math.min(monthMs, nowMs - HOUSE_DAYS * DAY_MS);
    }
    while (this.#readToMs < nowMs) {
      const toMs = Math.min(nowMs, this.#readToMs + DAY_MS);
      this.#take(this.#records.recordsBetween(this.#readToMs, toMs), monthMs);
      this.#readToMs = toMs;
    }
  }

  #take(records: readonly CycleRecord[], monthMs: number): void {
    for (const record of records) this.#house.add(record);
    const overMs = this.#config.power.tariff?.demand?.overMs ?? SLOT_MS;
    for (const slot of energyBySlot(records, overMs)) {
      if (slot.startMs < monthMs) continue;
      const known = this.#slots.get(slot.startMs);
      this.#slots.set(slot.startMs, known === undefined ? slot : sum(known, slot));
    }
  }
}

function sum(a: EnergySlot, b: EnergySlot): EnergySlot {
  return {
    ...a,
    importKwh: a.importKwh + b.importKwh,
    exportKwh: a.exportKwh + b.exportKwh,
    heardMs: a.heardMs + b.heardMs,
  };
}

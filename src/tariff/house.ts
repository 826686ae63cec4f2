/** What the house draws by quarter hour of the local day, the cooling plant left out, from what the cycles stored. */
import type { CycleRecord } from '../record.ts';
import { HOUR_MS, localMinuteOfDay } from '../time.ts';

type HouseRecord = Pick<
  CycleRecord,
  'atMs' | 'spanMs' | 'housePowerW' | 'gridPowerW' | 'chillerPowerW' | 'pumpPowerW' | 'fanPowerW'
>;

const QUARTERS = 96;
/** A quarter hour of the day forgets what is older than about this many days: habits change with the season. */
const REMEMBERED_H = 14 / 4;

export class HouseProfile {
  readonly #zone: string;
  readonly #meanW = new Float64Array(QUARTERS);
  readonly #hours = new Float64Array(QUARTERS);

  constructor(zone: string) {
    this.#zone = zone;
  }

  add(record: HouseRecord): void {
    const powerW = houseW(record);
    const hours = record.spanMs / HOUR_MS;
    if (powerW === null || !(hours > 0)) return;
    const quarter = this.#quarterOf(record.atMs - record.spanMs / 2);
    const known = Math.min(this.#hours[quarter] + hours, REMEMBERED_H);
    this.#meanW[quarter] += (powerW - this.#meanW[quarter]) * Math.min(1, hours / known);
    this.#hours[quarter] = known;
  }

  /** Mean power at an instant, W; null until every hour of the day has been heard once. */
  profile(): ((atMs: number) => number) | null {
    for (let hour = 0; hour < 24; hour += 1) {
      if (this.#hours.subarray(hour * 4, hour * 4 + 4).every((heard) => heard === 0)) return null;
    }
    return (atMs) => this.#near(this.#quarterOf(atMs));
  }

  #near(quarter: number): number {
    if (this.#hours[quarter] > 0) return this.#meanW[quarter];
    const first = quarter - (quarter % 4);
    return this.#meanW[[0, 1, 2, 3].map((k) => first + k).find((k) => this.#hours[k] > 0) ?? quarter];
  }

  #quarterOf(atMs: number): number {
    return Math.floor(localMinuteOfDay(this.#zone, atMs) / 15) % QUARTERS;
  }
}

/** Its own meter, or what a grid meter leaves when the plant's plugs are taken off. */
function houseW(record: HouseRecord): number | null {
  if (record.housePowerW !== null) return record.housePowerW;
  if (record.gridPowerW === null || record.chillerPowerW === null) return null;
  const plantW = record.chillerPowerW + (record.pumpPowerW ?? 0) + (record.fanPowerW ?? 0);
  return Math.max(0, record.gridPowerW - plantW);
}

/** Energy by slot, as a meter would have counted it, from what the cycles stored. */
import type { CycleRecord } from '../record.ts';
import { HOUR_MS, slotStart } from '../time.ts';

/** Energy drawn and fed in over a slot; `heardMs` is how much of the slot the records cover. */
export interface EnergySlot {
  readonly startMs: number;
  readonly endMs: number;
  readonly importKwh: number;
  readonly exportKwh: number;
  readonly heardMs: number;
}

type EnergyRecord = Pick<
  CycleRecord,
  'atMs' | 'spanMs' | 'gridPowerW' | 'chillerPowerW' | 'pumpPowerW' | 'fanPowerW'
>;

/**
 * Sums records into slots, sorted by time. The grid meter speaks where there is one; without it the energy is that of
 * the cooling plant alone. A record without any power adds nothing, and its time is not counted as heard.
 */
export function energyBySlot(records: readonly EnergyRecord[], slotMs: number): EnergySlot[] {
  const slots = new Map<number, EnergySlot>();
  for (const record of records) {
    const powerW = drawnW(record);
    if (powerW === null) continue;
    const endMs = record.atMs;
    for (let at = slotStart(endMs - record.spanMs, slotMs); at < endMs; at += slotMs) {
      const partMs = Math.min(endMs, at + slotMs) - Math.max(endMs - record.spanMs, at);
      slots.set(at, added(slots.get(at), at, slotMs, powerW, partMs));
    }
  }
  return [...slots.values()].toSorted((a, b) => a.startMs - b.startMs);
}

function drawnW(record: EnergyRecord): number | null {
  if (record.gridPowerW !== null) return record.gridPowerW;
  const parts = [record.chillerPowerW, record.pumpPowerW, record.fanPowerW].filter((power) => power !== null);
  return parts.length === 0 ? null : parts.reduce((sum, power) => sum + power, 0);
}

function added(
  slot: EnergySlot | undefined,
  startMs: number,
  slotMs: number,
  powerW: number,
  partMs: number,
): EnergySlot {
  const kwh = (powerW / 1000) * (partMs / HOUR_MS);
  return {
    startMs,
    endMs: startMs + slotMs,
    importKwh: (slot?.importKwh ?? 0) + Math.max(0, kwh),
    exportKwh: (slot?.exportKwh ?? 0) + Math.max(0, -kwh),
    heardMs: (slot?.heardMs ?? 0) + partMs,
  };
}

/** Electricity of the night by machine and price period, what it cost, and what the ice machine made of it. */
import type { SiteConfig } from '../config.ts';
import type { CycleRecord } from '../record.ts';
import { formatInstant, HOUR_MS, type Night } from '../time.ts';
import { grouped } from './grouped.ts';
import type { NightSheet } from './night-schema.ts';
import { bySlot, energyKwh, hoursOf, meanOver, rounded, roundedOrNull, type Span } from './spans.ts';

type Machine = 'machine' | 'pump' | 'fan';
const MACHINES: readonly Machine[] = ['machine', 'pump', 'fan'];
/** An hour with less machine energy than this has no COP worth a line. */
const LEAST_COP_KWH = 0.02;

/** Power of each machine by record. Pump and fan without a power point are taken at nominal power while water runs. */
export function powersOf(site: SiteConfig): {
  of: (machine: Machine) => (record: CycleRecord) => number | null;
  nominal: ('pump' | 'fan')[];
} {
  const nominalW = { pump: site.delivery.pumpW, fan: site.delivery.fanW };
  const nominal = (['pump', 'fan'] as const).filter((machine) => !(`${machine}-power` in site.points));
  const heard = { machine: 'chillerPowerW', pump: 'pumpPowerW', fan: 'fanPowerW' } as const;
  return {
    nominal,
    of: (machine) => (record) => {
      if (machine !== 'machine' && nominal.includes(machine))
        return record.dischargingW > 0 ? nominalW[machine] : 0;
      return record[heard[machine]];
    },
  };
}

export function electricityOf(site: SiteConfig, spans: readonly Span[]): NightSheet['electricity'] {
  const powers = powersOf(site);
  const [machineKwh, pumpKwh, fanKwh] = MACHINES.map((machine) => energyKwh(spans, powers.of(machine)));
  const priced = spans.filter((span) => span.record.priceMoneyPerKwh !== null);
  const all = (part: readonly Span[]): number =>
    MACHINES.reduce((sum, machine) => sum + energyKwh(part, powers.of(machine)), 0);
  return {
    machineKwh: rounded(machineKwh, 3),
    pumpKwh: rounded(pumpKwh, 3),
    fanKwh: rounded(fanKwh, 3),
    totalKwh: rounded(machineKwh + pumpKwh + fanKwh, 3),
    money: rounded(moneyOf(spans, powers.of, MACHINES), 4),
    unpricedKwh: rounded(all(spans) - all(priced), 3),
    machineUnheardMinutes: rounded(hoursOf(spans, (record) => record.chillerPowerW === null) * 60, 1),
    nominal: powers.nominal,
    byPeriod: periodsOf(spans, powers.of),
  };
}

type PowerOf = (machine: Machine) => (record: CycleRecord) => number | null;

/** What the ice machine alone cost. */
export function machineMoney(site: SiteConfig, spans: readonly Span[]): number {
  return moneyOf(spans, powersOf(site).of, ['machine']);
}

function moneyOf(spans: readonly Span[], of: PowerOf, machines: readonly Machine[]): number {
  return spans.reduce((sum, span) => {
    const watts = machines.reduce((total, machine) => total + (of(machine)(span.record) ?? 0), 0);
    return sum + (watts / 1000) * span.hours * (span.record.priceMoneyPerKwh ?? 0);
  }, 0);
}

function periodsOf(spans: readonly Span[], of: PowerOf): NightSheet['electricity']['byPeriod'] {
  const byPeriod = grouped(spans, (span) => span.record.pricePeriod);
  return [...byPeriod].map(([period, part]) => ({
    period,
    machineKwh: rounded(energyKwh(part, of('machine')), 3),
    pumpKwh: rounded(energyKwh(part, of('pump')), 3),
    fanKwh: rounded(energyKwh(part, of('fan')), 3),
    meanPrice: roundedOrNull(
      meanOver(part, (record) => record.priceMoneyPerKwh),
      5,
    ),
    money: rounded(moneyOf(part, of, MACHINES), 4),
  }));
}

/** COP of the ice machine, over the time in which its power was heard, by hour and over the night. */
export function copOf(site: SiteConfig, spans: readonly Span[], night: Night): NightSheet['cop'] {
  const powers = powersOf(site);
  const heard = spans.filter((span) => span.record.chillerPowerW !== null);
  const usedBy = (part: readonly Span[]): number => energyKwh(part, powers.of('machine'));
  const total = MACHINES.reduce((sum, machine) => sum + energyKwh(heard, powers.of(machine)), 0);
  const hours = [...bySlot(heard, night.startMs, HOUR_MS)].toSorted(([a], [b]) => a - b);
  return {
    machine: roundedOrNull(madePer(heard, usedBy(heard)), 3),
    withPumpAndFan: roundedOrNull(madePer(heard, total), 3),
    byHour: hours.flatMap(([hour, part]) => {
      const machineKwh = usedBy(part);
      const madeKwh = energyKwh(part, (record) => record.chargingW);
      const cop = madePer(part, machineKwh);
      if (cop === null || !(madeKwh > 0)) return [];
      return [
        {
          at: formatInstant(night.startMs + hour * HOUR_MS),
          cop: rounded(cop, 3),
          madeKwh: rounded(madeKwh, 3),
          machineKwh: rounded(machineKwh, 3),
          outdoorC: roundedOrNull(
            meanOver(part, (record) => record.outdoorC),
            2,
          ),
        },
      ];
    }),
  };
}

function madePer(part: readonly Span[], usedKwh: number): number | null {
  return usedKwh > LEAST_COP_KWH ? energyKwh(part, (record) => record.chargingW) / usedKwh : null;
}

export function supplyOf(spans: readonly Span[]): NightSheet['supply'] {
  const energy = (pick: (record: CycleRecord) => number | null): number | null =>
    spans.some((span) => pick(span.record) !== null) ? rounded(energyKwh(spans, pick), 3) : null;
  const charges = spans.flatMap((span) => span.record.batteryPct ?? []);
  return {
    panelKwh: energy((record) => record.panelPowerW),
    generatorKwh: energy((record) => record.generatorPowerW),
    gridKwh: energy((record) => record.gridPowerW),
    batteryStartPct: roundedOrNull(charges[0] ?? null, 1),
    batteryEndPct: roundedOrNull(charges.at(-1) ?? null, 1),
  };
}

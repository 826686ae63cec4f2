/**
 * What the simple ways would have cost on the same night: an open account over the night's own records in quarter hours. The cooling
 * that was drawn from the bank is drawn again, the machine works at the night's own COP led to each slot's outdoor
 * temperature by Carnot's ratio, the leak is the recorded one, prices are those of the records. No start times, no
 * melting limits: it is an account, not a simulation; a rehearsal is the finer tool.
 */
import type { Command } from '../commands.ts';
import type { SiteConfig } from '../config.ts';
import type { CycleRecord } from '../record.ts';
import { HOUR_MS, MINUTE_MS, type Night } from '../time.ts';
import { ICE_KG_PER_KWH, iceAtStart } from './account.ts';
import { powersOf } from './electricity.ts';
import { carnotAt } from './carnot.ts';
import type { NightSheet } from './night-schema.ts';
import { bySlot, energyKwh, meanOver, rounded, spansOf, type Span } from './spans.ts';

type WayName = NightSheet['comparisons'][number]['strategy'];

/** One way through the night: what it cost, what ice it left, what it could not serve. */
export interface WayRun {
  readonly strategy: WayName;
  readonly money: number;
  readonly endKwh: number;
  readonly unmetKwh: number;
  readonly how: string;
}

export interface WaysInput {
  readonly site: SiteConfig;
  readonly night: Night;
  readonly records: readonly CycleRecord[];
  /** What the owner's timetable says at an instant; left out, the timetable is not compared. */
  readonly timetableAt?: (atMs: number) => Command;
}

const SLOT_MS = 15 * MINUTE_MS;
const SLOT_H = SLOT_MS / HOUR_MS;
/** A machine that cools the room's water directly evaporates about here (common practice, no source). */
const DIRECT_EVAPORATING_C = 2;
const WATER_KWH_PER_L_K = 4.2 / 3600;

interface Slot {
  readonly startMs: number;
  readonly loadKwh: number;
  readonly leakKwh: number;
  readonly circulationKwh: number;
  readonly outdoorC: number;
  readonly price: number;
}

interface Machine {
  /** COP and heat taken, making ice or cooling directly. */
  at(outdoorC: number, direct: boolean): { cop: number; capacityKwh: number };
}

/** Every simple way that can be told for this night; empty when nothing was recorded. */
export function simpleWays(input: WaysInput): WayRun[] {
  const spans = spansOf(input.records, input.night);
  if (spans.length === 0) return [];
  const slots = slotsOf(input.site, spans, input.night);
  const machine = machineOf(input.site, spans);
  const before = input.records.filter((record) => record.atMs <= input.night.startMs).at(-1) ?? null;
  const startKwh = iceAtStart(spans, before, input.site).kwh;
  const mostKwh = fullBankKwh(input.site);
  const cheapest = Math.min(...slots.map((slot) => slot.price));
  const isCheap = (slot: Slot): boolean => slot.price <= cheapest + 1e-9;
  const account = (strategy: WayName, how: string, ways: BankWay): WayRun => ({
    strategy,
    how,
    ...throughBank(slots, machine, startKwh, mostKwh, ways),
  });
  const timetableAt = input.timetableAt;
  return [
    withoutBank(slots, machine, startKwh),
    account(
      'storage-priority',
      'ice serves all; made at the lowest price of the night until the bank is full',
      {
        charges: isCheap,
        serves: () => true,
      },
    ),
    account(
      'chiller-priority',
      'the machine runs whenever cooling is drawn, ice serves the rest; refilled at the lowest price',
      {
        charges: (slot) => slot.loadKwh > 0 || isCheap(slot),
        serves: () => true,
      },
    ),
    ...(timetableAt === undefined
      ? []
      : [
          account('timetable', "the owner's own cron lines", {
            charges: (slot) => timetableAt(slot.startMs).startsWith('charge'),
            serves: (slot) => timetableAt(slot.startMs).endsWith('discharge'),
          }),
        ]),
  ];
}

/** Like for like: a way that leaves less ice than the night did must buy it back at what ice cost that night. */
export function likeForLike(
  way: WayRun,
  spentMoney: number,
  endKwh: number,
  worth: number | null,
): NightSheet['comparisons'][number] {
  const money = way.money + (endKwh - way.endKwh) * (worth ?? 0);
  return {
    strategy: way.strategy,
    money: rounded(way.money, 4),
    endKwh: rounded(way.endKwh, 3),
    unmetKwh: rounded(way.unmetKwh, 3),
    likeForLikeMoney: rounded(money, 4),
    savedMoney: rounded(money - spentMoney, 4),
    how: way.how,
  };
}

function slotsOf(site: SiteConfig, spans: readonly Span[], night: Night): Slot[] {
  const powers = powersOf(site);
  const parts = [...bySlot(spans, night.startMs, SLOT_MS)].toSorted(([a], [b]) => a - b);
  let price = 0;
  let outdoorC = site.chiller.ratedOutdoorC;
  return parts.map(([index, part]) => {
    price = meanOver(part, (record) => record.priceMoneyPerKwh) ?? price;
    outdoorC = meanOver(part, (record) => record.outdoorC) ?? outdoorC;
    return {
      startMs: night.startMs + index * SLOT_MS,
      loadKwh: energyKwh(part, (record) => record.dischargingW),
      leakKwh: energyKwh(part, (record) => record.leakW),
      circulationKwh: energyKwh(part, powers.of('pump')) + energyKwh(part, powers.of('fan')),
      outdoorC,
      price,
    };
  });
}

function machineOf(site: SiteConfig, spans: readonly Span[]): Machine {
  const { ratedOutdoorC, ratedEvaporatingC, iceMakingW, powerW } = site.chiller;
  const running = spans.filter(({ record }) => record.chargingW > 0 && record.chillerPowerW !== null);
  const usedKwh = energyKwh(running, (record) => record.chillerPowerW);
  const ownOutdoorC = meanOver(running, (record) => record.outdoorC);
  const own = usedKwh > 0.1 && ownOutdoorC !== null;
  const cop = own ? energyKwh(running, (record) => record.chargingW) / usedKwh : iceMakingW / powerW;
  const reference = carnotAt(ratedEvaporatingC, own ? ownOutdoorC : ratedOutdoorC);
  const rated = carnotAt(ratedEvaporatingC, ratedOutdoorC);
  return {
    at: (outdoorC, direct) => {
      const carnot = carnotAt(direct ? DIRECT_EVAPORATING_C : ratedEvaporatingC, outdoorC);
      return {
        cop: (cop * carnot) / reference,
        capacityKwh: (iceMakingW / 1000) * Math.sqrt(carnot / rated) * SLOT_H,
      };
    },
  };
}

/** Ice on hand of a full bank: its ice and the cold of its water up to the useful leaving temperature. */
function fullBankKwh(site: SiteConfig): number {
  const { mostIceKg, waterL, usefulLeavingC } = site.bank;
  return mostIceKg / ICE_KG_PER_KWH + waterL * usefulLeavingC * WATER_KWH_PER_L_K;
}

type Outcome = Omit<WayRun, 'strategy' | 'how'>;

function withoutBank(slots: readonly Slot[], machine: Machine, startKwh: number): WayRun {
  let money = 0;
  let unmetKwh = 0;
  for (const slot of slots) {
    const { cop, capacityKwh } = machine.at(slot.outdoorC, true);
    const served = Math.min(slot.loadKwh, capacityKwh);
    const share = slot.loadKwh > 0 ? served / slot.loadKwh : 0;
    money += (served / cop + share * slot.circulationKwh) * slot.price;
    unmetKwh += slot.loadKwh - served;
  }
  return {
    strategy: 'no-storage',
    how: `the same machine cooling as it is needed, evaporating at ${DIRECT_EVAPORATING_C} degC`,
    money,
    endKwh: startKwh,
    unmetKwh,
  };
}

interface BankWay {
  charges(slot: Slot): boolean;
  serves(slot: Slot): boolean;
}

function throughBank(
  slots: readonly Slot[],
  machine: Machine,
  startKwh: number,
  mostKwh: number,
  way: BankWay,
): Outcome {
  let ice = startKwh;
  let money = 0;
  let unmetKwh = 0;
  for (const slot of slots) {
    ice = Math.max(0, ice - slot.leakKwh);
    const { cop, capacityKwh } = machine.at(slot.outdoorC, false);
    const made = way.charges(slot) ? Math.max(0, Math.min(capacityKwh, mostKwh - ice)) : 0;
    const served = way.serves(slot) ? Math.min(slot.loadKwh, ice + made) : 0;
    const share = slot.loadKwh > 0 ? served / slot.loadKwh : 0;
    ice += made - served;
    money += (made / cop + share * slot.circulationKwh) * slot.price;
    unmetKwh += slot.loadKwh - served;
  }
  return { money, endKwh: ice, unmetKwh };
}

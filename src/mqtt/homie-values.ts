/** What the records say, as values of the device's properties. Pure. */
import type { Strategy, Told, WishName } from '../commands.ts';
import type { ClearedCommand } from '../order.ts';
import type { CycleRecord, PlanRecord } from '../record.ts';
import { formatDuration, formatInstant } from '../time.ts';
import type { Path } from './homie.ts';
import type { Value } from './homie-format.ts';

export type Values = Readonly<Partial<Record<Path, Value>>>;

/** What the owner may set; main holds it and says when it changes. */
export interface Settings {
  readonly strategy: Strategy;
  readonly wish: WishName;
  /** How long the present or the next wish holds. */
  readonly wishForMs: number;
  readonly limitC: number;
  /** What was told of the bank while it can be taken back; null when nothing was. */
  readonly told: Told | null;
}

/** The last closed night. */
export interface NightFigures {
  readonly sheet: object;
  readonly costMoney: number | null;
  readonly savedMoney: number | null;
  readonly balanceResidualPct: number | null;
}

/** What is known beside the record of the cycle. */
export interface Beside {
  readonly pointsHeard: number;
  readonly warmTonightKh: number | null;
}

export function cycleValues(record: CycleRecord, beside: Beside): Values {
  return {
    'bank/ice-on-hand': record.iceOnHandKwh,
    'bank/ice-on-hand-low': record.iceOnHandLowKwh,
    'bank/ice-on-hand-high': record.iceOnHandHighKwh,
    'bank/inventory': record.inventoryPct,
    'bank/ice-mass': record.iceKg,
    'bank/lasts-until': record.lastsUntilMs,
    'bank/phase': record.phase,
    'bank/heat-leak': record.heatLeakWPerK,
    'plan/evening-load': record.eveningLoadKwh,
    'plan/evening-load-high': record.eveningLoadHighKwh,
    'plan/next-change': record.nextChangeMs,
    'plan/worth-of-ice': record.worthOfIceMoneyPerKwh,
    'comfort/warm-hours': beside.warmTonightKh,
    'comfort/feels-like': record.feelsLikeC,
    'health/points-heard': beside.pointsHeard,
    'health/points-stale': record.pointsStale,
    'health/clock': record.clock,
  };
}

/** Two decimals for energy and temperature, four for prices: the schedule is read by people and rules. */
const round = (value: number, decimals: number): number => Number(value.toFixed(decimals));

export function planValues(plan: PlanRecord): Values {
  return {
    'plan/schedule': {
      made: formatInstant(plan.madeMs),
      strategy: plan.strategy,
      outcome: plan.outcome,
      slot: formatDuration(plan.slotMs),
      steps: plan.steps.map((step) => ({
        start: formatInstant(step.startMs),
        command: step.command,
        iceOnHandKwh: round(step.iceKwh, 2),
        lowKwh: round(step.iceLowKwh, 2),
        highKwh: round(step.iceHighKwh, 2),
        price: round(step.priceMoneyPerKwh, 4),
      })),
    },
  };
}

/** The whole order in one document, for a hub's rule: what to do, why, from when and until when. */
export function orderDocument(cleared: ClearedCommand): object {
  return {
    command: cleared.command,
    reason: cleared.reason,
    issued: formatInstant(cleared.issuedMs),
    expires: formatInstant(cleared.expiresMs),
    heldBackBy: cleared.heldBackBy,
    switches: cleared.switches,
    numbers: cleared.numbers,
  };
}

export function orderValues(cleared: ClearedCommand): Values {
  return {
    'dispatch/command': cleared.command,
    'dispatch/reason': cleared.reason,
    'dispatch/expires': cleared.expiresMs,
    'dispatch/order': orderDocument(cleared),
    'dispatch/held-back-by': cleared.heldBackBy,
  };
}

export function settingValues(settings: Settings): Values {
  return {
    'plan/strategy': settings.strategy,
    'dispatch/wish': settings.wish,
    'dispatch/wish-for': settings.wishForMs,
    'comfort/limit': settings.limitC,
    'bank/told': settings.told ?? 'nothing',
  };
}

export function nightValues(night: NightFigures): Values {
  return {
    'night/sheet': night.sheet,
    'night/cost': night.costMoney,
    'night/saved': night.savedMoney,
    'health/balance-residual': night.balanceResidualPct,
  };
}

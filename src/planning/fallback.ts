/** What stands in for a fresh plan: the last one shifted to now, or the owner's timetable. */
import { charges, discharges, type Command } from '../commands.ts';
import { HOUR_MS } from '../time.ts';
import type { Plan } from './plan.ts';
import { firedBetween, lastFired, type TimetableLine } from './timetable.ts';

/** A shifted plan must still say what to do for this long; a shorter one knows too little of the evening. */
const LEAST_LEFT_MS = 2 * HOUR_MS;
/** A plan older than this was made for other weather. */
const OLDEST_MS = 12 * HOUR_MS;

/** The last plan from now on; null when it has no steps for now, or is too old. */
export function shiftPlan(plan: Plan, nowMs: number, note: string): Plan | null {
  const first = plan.steps.findIndex((step) => nowMs < step.startMs + plan.slotMs);
  if (first < 0 || plan.outcome === 'timetable' || plan.outcome === 'none') return null;
  const steps = plan.steps.slice(first);
  const endMs = steps[steps.length - 1].startMs + plan.slotMs;
  const tooOld = !(nowMs >= plan.steps[0].startMs && nowMs - plan.madeMs <= OLDEST_MS);
  if (tooOld || endMs - nowMs < LEAST_LEFT_MS) return null;
  const { command } = steps[0];
  return {
    ...plan,
    outcome: 'shifted',
    note,
    steps,
    command,
    nextChangeMs: steps.find((step) => step.command !== command)?.startMs ?? null,
    waitCostMoney: null,
    flips: { priceMoneyPerKwh: null, iceKwh: null },
  };
}

export interface TimetableInputs {
  readonly nowMs: number;
  readonly slotMs: number;
  readonly slots: number;
  readonly zone: string;
  readonly timetable: readonly TimetableLine[];
  readonly iceKwh: number;
  readonly iceLowKwh: number;
  readonly iceHighKwh: number;
}

/** A plan that knows only the owner's lines. Its ice is what is there now: nothing is foreseen. */
export function timetablePlan(inputs: TimetableInputs, note: string): Plan {
  const { nowMs, slotMs, slots, zone, timetable, iceKwh, iceLowKwh, iceHighKwh } = inputs;
  const startMs = Math.floor(nowMs / slotMs) * slotMs;
  const coming = firedBetween(timetable, zone, nowMs + 1, startMs + slots * slotMs);
  let command: Command = lastFired(timetable, zone, nowMs)?.command ?? 'hold';
  const first = command;
  let next = 0;
  const blank = { priceMoneyPerKwh: 0, outdoorC: 0, outdoorLowC: 0, outdoorHighC: 0 };
  const steps = Array.from({ length: slots }, (_, t) => {
    const at = t === 0 ? nowMs : startMs + t * slotMs;
    while (next < coming.length && coming[next].atMs <= at) {
      command = coming[next].command;
      next += 1;
    }
    return {
      startMs: at,
      command,
      iceKwh,
      iceLowKwh,
      iceHighKwh,
      ...blank,
      loadW: 0,
      loadLowW: 0,
      loadHighW: 0,
    };
  });
  const differs = (other: Command): boolean =>
    charges(other) !== charges(first) || discharges(other) !== discharges(first);
  return {
    madeMs: nowMs,
    outcome: 'timetable',
    strategy: 'planned',
    note,
    slotMs,
    steps,
    command: first,
    nextChangeMs: coming.find((line) => differs(line.command))?.atMs ?? null,
    worthOfIceMoneyPerKwh: null,
    waitCostMoney: null,
    flips: { priceMoneyPerKwh: null, iceKwh: null },
    expectedCostMoney: null,
    expectedWarmKh: null,
    lastsUntilMs: null,
    lastsAtLeastUntilMs: null,
    servesRooms: true,
    meltsOut: false,
  };
}

/** The last plan shifted, or else the timetable; either says why. */
export function fallBack(last: Plan | null, inputs: TimetableInputs, note: string): Plan {
  const shifted = last ? shiftPlan(last, inputs.nowMs, `${note} The last plan goes on.`) : null;
  return shifted ?? timetablePlan(inputs, `${note} The timetable decides.`);
}

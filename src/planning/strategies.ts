/**
 * The trade's simple strategies and the owner's timetable, as pure functions of what is known now. They run live and
 * for comparison, and obey the same interlocks as the plan.
 *
 * Storage priority: the ice bank is filled off peak; on peak it meets as much of the load as it can without running
 * out before the peak ends, the machine the rest. Chiller priority: the machine meets the load first and the bank
 * supplements what exceeds it; the bank is filled off peak. (Terms as in ASHRAE Handbook HVAC Systems and Equipment,
 * Thermal Storage; Drees & Braun 1996, HVAC&R Research 2(4).)
 */
import { commandFor, type Command, type Strategy } from '../commands.ts';
import { localMinuteOfDay } from '../time.ts';
import { slotHours, slotStartMs, type PlanProblem } from './problem.ts';
import { lastFired, type TimetableLine } from './timetable.ts';

/** Inventory at which a machine that runs stops, and below which a resting one starts, %. */
const FULL_PCT = 99;
const REFILL_PCT = 95;

export function simpleCommand(
  strategy: Exclude<Strategy, 'planned'>,
  problem: PlanProblem,
  timetable: readonly TimetableLine[],
): Command {
  if (strategy === 'timetable') return timetableCommand(timetable, problem.zone, problem.nowMs);
  return strategy === 'storage-priority' ? storagePriority(problem) : chillerPriority(problem);
}

export function storagePriority(problem: PlanProblem): Command {
  const offPeak = offPeakSlots(problem);
  const wanted = wantsCooling(problem);
  const short = !offPeak[0] && problem.iceKwh < needUntilOffPeak(problem, offPeak);
  return together(problem, (offPeak[0] || short) && hasRoom(problem), wanted);
}

export function chillerPriority(problem: PlanProblem): Command {
  const wanted = wantsCooling(problem);
  return together(problem, (wanted || offPeakSlots(problem)[0]) && hasRoom(problem), wanted);
}

/** The command of the line that fired last; hold before the first. */
export function timetableCommand(timetable: readonly TimetableLine[], zone: string, nowMs: number): Command {
  return lastFired(timetable, zone, nowMs)?.command ?? 'hold';
}

function together(problem: PlanProblem, charge: boolean, discharge: boolean): Command {
  const both = problem.chiller.chargesWhileDischarging;
  return commandFor(charge && (both || !discharge), discharge);
}

function hasRoom(problem: PlanProblem): boolean {
  const pct = problem.plant.inventoryPct(problem.iceKwh);
  return pct < (problem.chillerOn ? FULL_PCT : REFILL_PCT);
}

/** Somebody is home and a load is foreseen now, or the room is at its limit. */
function wantsCooling(problem: PlanProblem): boolean {
  const { homeNow, roomC, limitC } = problem;
  if (meanLoadW(problem, 0) > 0) return true;
  return homeNow && roomC !== null && roomC > limitC[0] - 0.5;
}

function meanLoadW(problem: PlanProblem, t: number): number {
  let sum = 0;
  let weight = 0;
  for (const s of problem.scenarios) {
    sum += s.weight * s.loadW[t];
    weight += s.weight;
  }
  return sum / weight;
}

/** Mean cooling needed until the next off-peak slot, kWh. */
function needUntilOffPeak(problem: PlanProblem, offPeak: readonly boolean[]): number {
  let kwh = 0;
  for (let t = 0; t < problem.slots && !offPeak[t]; t += 1) {
    kwh += (meanLoadW(problem, t) * slotHours(problem, t)) / 1000;
  }
  return kwh;
}

const NIGHT_FROM_MIN = 22 * 60;
const NIGHT_TO_MIN = 8 * 60;

/**
 * Off peak is the cheapest third of the coming day; with one price all day it is the night, 22 to 8 (common practice,
 * no source). On an island it is the third with the most sun left over.
 */
export function offPeakSlots(problem: PlanProblem): boolean[] {
  const daySlots = Math.min(problem.slots, Math.round(86_400_000 / problem.slotMs));
  const cost = Array.from({ length: problem.slots }, (_, t) => costSignal(problem, t));
  const sorted = cost.slice(0, daySlots).toSorted((a, b) => a - b);
  const flat = sorted[daySlots - 1] - sorted[0] < 1e-6;
  const most = sorted[Math.max(0, Math.floor(daySlots / 3) - 1)];
  return cost.map((value, t) => (flat ? isNight(problem, t) : value <= most + 1e-9));
}

function costSignal(problem: PlanProblem, t: number): number {
  const { power } = problem;
  if (power.kind === 'grid') return power.buy[t];
  let spare = 0;
  let weight = 0;
  for (const s of problem.scenarios) {
    spare += s.weight * Math.max(0, s.panelW[t] - power.houseW[t]);
    weight += s.weight;
  }
  return -spare / weight;
}

function isNight(problem: PlanProblem, t: number): boolean {
  const minute = localMinuteOfDay(problem.zone, slotStartMs(problem, t));
  return minute >= NIGHT_FROM_MIN || minute < NIGHT_TO_MIN;
}

/**
 * The ice machine as a state: off or on, and for how many slots already, up to the shortest rest and the shortest run.
 * Where a demand charge counts, each comes twice: before and after this plan has raised the month's peak.
 */
import type { ChillerTerms, PlanProblem } from './problem.ts';

export interface MachineStates {
  readonly off: number;
  readonly on: number;
  /** Off and on states together. */
  readonly plain: number;
  /** `plain`, or twice that with a demand charge. */
  readonly count: number;
  /** State after a step of one slot, of two, without and with the machine, peak not counted; −1 where it may not. */
  readonly afterIdle: readonly Int8Array[];
  readonly afterCharge: readonly Int8Array[];
}

export function machineStates(chiller: ChillerTerms, slotMs: number, demand: boolean): MachineStates {
  const off = Math.max(1, Math.ceil(chiller.minOffMs / slotMs));
  const on = Math.max(1, Math.ceil(chiller.minOnMs / slotMs));
  const plain = off + on;
  const afterIdle = new Int8Array(plain).fill(-1);
  const afterCharge = new Int8Array(plain).fill(-1);
  for (let k = 0; k < off; k += 1) afterIdle[k] = Math.min(k + 1, off - 1);
  for (let k = 0; k < on; k += 1) afterCharge[off + k] = off + Math.min(k + 1, on - 1);
  afterIdle[plain - 1] = 0;
  afterCharge[off - 1] = off;
  return {
    off,
    on,
    plain,
    count: plain * (demand ? 2 : 1),
    afterIdle: [afterIdle, twice(afterIdle)],
    afterCharge: [afterCharge, twice(afterCharge)],
  };
}

const twice = (after: Int8Array): Int8Array => after.map((state) => (state < 0 ? -1 : after[state]));

/** The state that the machine is in now. An unknown past counts as long enough. */
export function stateNow(problem: PlanProblem, states: MachineStates): number {
  const { chiller, chillerOn, chillerSinceMs, nowMs, slotMs } = problem;
  const done = chillerSinceMs === null ? Infinity : Math.max(0, nowMs - chillerSinceMs);
  const least = chillerOn ? chiller.minOnMs : chiller.minOffMs;
  const count = chillerOn ? states.on : states.off;
  const left = Math.ceil(Math.max(0, least - done) / slotMs);
  return (chillerOn ? states.off : 0) + Math.max(0, count - 1 - left);
}

/** Whether the machine ran in the slot that led to a state. */
export function isOn(states: MachineStates, state: number): boolean {
  return state % states.plain >= states.off;
}

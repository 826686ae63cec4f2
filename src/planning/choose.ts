/** The best command at every state, and which commands a state allows. */
import { spanOf } from './problem.ts';
import { valueAt, type Work } from './work.ts';

/** The best command at every cell of a class at a slot: writes its value. */
export function chooseBest(work: Work, t: number, c: number): void {
  const { value, cells, states, holding, tables } = work;
  for (let state = 0; state < states.count; state += 1) {
    const to = valueAt(work, t, c, state);
    value.fill(Infinity, to, to + cells);
    offer(work, to, idleAfter(work, t, state), 0);
    const after = chargeAfter(work, t, state);
    if (after >= 0) offer(work, to, after, startMoney(work, t, state));
    for (let b = to; b < to + cells; b += tables.points) {
      for (let i = 0; i < tables.points; i += 1) value[b + i] += holding[t * tables.points + i];
    }
  }
}

function offer(work: Work, to: number, after: number, money: number): void {
  if (after < 0) return;
  const { value, expected, cells, states } = work;
  const plain = after * cells;
  const together = after % states.plain < states.off || work.problem.chiller.chargesWhileDischarging;
  const other = together ? (states.count + after) * cells : plain;
  for (let cell = 0; cell < cells; cell += 1) {
    const held = expected[plain + cell];
    const given = expected[other + cell];
    const best = (held < given ? held : given) + money;
    if (best < value[to + cell]) value[to + cell] = best;
  }
}

/** State after an idle slot, −1 where the shortest run forbids; a machine that must not run may always stop. */
export function idleAfter(work: Work, t: number, state: number): number {
  const { states, problem } = work;
  const machine = state % states.plain;
  const after = states.afterIdle[spanOf(problem, t) - 1][machine];
  if (after < 0 && work.mayRun[t]) return -1;
  return state - machine + Math.max(0, after);
}

/** State after a slot with the machine, −1 where the shortest rest or a limit forbids. */
export function chargeAfter(work: Work, t: number, state: number): number {
  const { states, problem } = work;
  const machine = state % states.plain;
  const after = states.afterCharge[spanOf(problem, t) - 1][machine];
  if (after < 0 || !work.mayRun[t] || (machine < states.off && !work.mayStart[t])) return -1;
  const peak = states.count > states.plain && (state >= states.plain || work.peakMoney[t] > 0);
  return after + (peak ? states.plain : 0);
}

/** Money that running the machine costs beside its electricity: a start, and a peak raised for the first time. */
export function startMoney(work: Work, t: number, state: number): number {
  const { states, problem } = work;
  const start = state % states.plain < states.off ? problem.chiller.startMoney : 0;
  return start + (state < states.plain ? work.peakMoney[t] : 0);
}

/** What it is worth to have, or for once not to have, ice in the bank at certain hours. */
import { slotStartMs, spanOf, type PlanProblem } from './problem.ts';
import type { Tables } from './tables.ts';

/** The chance of an evening outside all scenarios: one in one more than there are, as for the next draw of a sample. */
const outsideChance = (scenarios: number): number => 1 / (scenarios + 1);

/**
 * Money charged for falling short of the reserve, by slot and ice: the chance of a warmer evening than any scenario
 * times the warm hours that the missing ice would have saved, spread over the evening by its load. It weighs nothing
 * where no cooling is expected, so a bank may be empty before a cool day. The reserve is widened by what the estimate
 * itself does not know; the two are independent, hence the root of squares.
 */
export function holdingMoney(problem: PlanProblem, tables: Tables): Float64Array {
  const { scenarios, slots, reserveKwh, iceKwh, iceLowKwh, warmHourMoney } = problem;
  const holding = new Float64Array((slots + 1) * tables.points);
  rewardMeltOut(problem, tables, holding);
  const wantedKwh = Math.hypot(reserveKwh, Math.max(0, iceKwh - iceLowKwh));
  if (!(wantedKwh > 0)) return holding;
  const { loadW, warmKhPerKwh } = meanOf(problem);
  const slotsInAll = loadW.reduce((sum, _, t) => sum + spanOf(problem, t), 0);
  const days = Math.max(1, (slotsInAll * problem.slotMs) / 86_400_000);
  const total = loadW.reduce((sum, w, t) => sum + w * spanOf(problem, t), 0);
  const perKwh = outsideChance(scenarios.length) * warmHourMoney * warmKhPerKwh;
  for (let t = 0; t < slots; t += 1) {
    const share = total > 0 ? (loadW[t] * spanOf(problem, t) * days) / total : 0;
    for (let i = 0; i < tables.points; i += 1) {
      holding[t * tables.points + i] = share * perKwh * Math.max(0, wantedKwh - i * tables.stepKwh);
    }
  }
  return holding;
}

function meanOf(problem: PlanProblem): { loadW: Float64Array; warmKhPerKwh: number } {
  const loadW = new Float64Array(problem.slots);
  let warmKhPerKwh = 0;
  const total = problem.scenarios.reduce((sum, s) => sum + s.weight, 0);
  for (const s of problem.scenarios) {
    const weight = s.weight / total;
    warmKhPerKwh += weight * s.warmKhPerKwh;
    for (let t = 0; t < problem.slots; t += 1) loadW[t] += weight * Math.max(0, s.loadW[t]);
  }
  return { loadW, warmKhPerKwh };
}

/** Half width of the estimate, as a share of the bank, from which a melt-out is worth something. */
const UNSURE = 0.1;
/** Nights over which a clear estimate is taken to save the ice that doubt keeps back; a judgement, no source. */
const NIGHTS_SERVED = 3;
const EMPTY_PCT = 1;

/**
 * The slot at which the coming evening is over and a melt-out would count; null when the estimate is sure enough.
 * Melting the bank out now and then also evens the block (common practice, no source).
 */
export function meltOutSlot(problem: PlanProblem): number | null {
  const { iceHighKwh, iceLowKwh, plant, slots, nowMs } = problem;
  if (!((iceHighKwh - iceLowKwh) / 2 > UNSURE * plant.capacityKwh)) return null;
  const { loadW } = meanOf(problem);
  let daySlots = 0;
  while (daySlots < slots && slotStartMs(problem, daySlots) - nowMs < 86_400_000) daySlots += 1;
  let last = -1;
  for (let t = 0; t < daySlots; t += 1) {
    if (last >= 0 && loadW[t] <= 0 && loadW[t - 1] > 0) break;
    if (loadW[t] > 0) last = t;
  }
  return last >= 0 ? last : Math.floor(daySlots / 2);
}

/** Ice that doubt keeps back each night would have to be made: its cheapest money is what certainty is worth. */
function rewardMeltOut(problem: PlanProblem, tables: Tables, holding: Float64Array): void {
  const slot = meltOutSlot(problem);
  if (slot === null) return;
  const { power, iceHighKwh, iceLowKwh } = problem;
  const price = power.kind === 'grid' ? Math.max(0, Math.min(...Array.from(power.buy))) : 0.05;
  const perIce = tables.powerW[0] / Math.max(1, tables.makingW[0]);
  const reward = price * perIce * ((iceHighKwh - iceLowKwh) / 2) * NIGHTS_SERVED;
  for (let i = 0; i < tables.points; i += 1) {
    const pct = problem.plant.inventoryPct(i * tables.stepKwh);
    if (pct <= EMPTY_PCT) holding[slot * tables.points + i] -= reward;
  }
}

/**
 * Why the plan says what it says: one plain sentence with numbers for every command, and one each for what an hour's
 * wait would cost, what ice is worth, and what would change its mind. For people who never heard of a forecast.
 */
import { charges, discharges, type Command, type Strategy } from '../commands.ts';
import { weightedQuantile } from '../numerics/quantile.ts';
import type { PlanStep } from '../record.ts';
import { HOUR_MS, noonOf, localDate, DAY_MS } from '../time.ts';
import { needKwh, type Plan } from './plan.ts';
import { slotStartMs, type PlanProblem } from './problem.ts';
import {
  clockText,
  energyFigure,
  energyText,
  moneyText,
  powerText,
  priceText,
  temperatureText,
} from './words.ts';

/** The reason for the command of now. `problem` is what the plan was made from, at the present time. */
export function explain(plan: Plan, problem: PlanProblem): string {
  if (plan.outcome !== 'solved') return `${plan.note} ${fallbackSentence(plan, problem)}`;
  if (plan.meltsOut && !charges(plan.command)) return meltOutSentence(problem);
  switch (plan.command) {
    case 'charge-now':
      return `${makingClause(plan, problem)}: ${priceClause(problem)}, and ${needClause(problem)}.`;
    case 'charge-and-discharge':
      return `Cooling and making ice at once: ${priceClause(problem)}, and ${needClause(problem)}.`;
    case 'discharge':
      return coolingSentence(plan, problem);
    default:
      return holdSentence(plan, problem);
  }
}

/** The last slot of the run of steps that share a trait with the first. */
function runEndMs(plan: Plan, same: (command: Command) => boolean): number | null {
  return plan.steps.find((step) => !same(step.command))?.startMs ?? null;
}

function makingClause(plan: Plan, problem: PlanProblem): string {
  const { nowMs, chillerOn, chillerSinceMs } = problem;
  const endMs = runEndMs(plan, charges);
  const until = endMs === null ? '' : `until about ${clockText(problem, nowMs, endMs)}`;
  if (!chillerOn || chillerSinceMs === null) return `Making ice from now ${until}`.trimEnd();
  return `Making ice since ${clockText(problem, nowMs, chillerSinceMs)}`;
}

/** What electricity costs now and until when, or what the sun leaves over. */
function priceClause(problem: PlanProblem): string {
  const { power, nowMs } = problem;
  if (power.kind === 'island') return sunClause(problem);
  const now = power.buy[0];
  let t = 1;
  while (t < problem.slots && Math.abs(power.buy[t] - now) < 5e-4) t += 1;
  if (t >= problem.slots) return `power costs ${priceText(problem, now)} all day`;
  const until = clockText(problem, nowMs, slotStartMs(problem, t));
  const then = priceText(problem, power.buy[t]);
  return `power costs ${priceText(problem, now)} until ${until}, then ${then}`;
}

function sunClause(problem: PlanProblem): string {
  const spareW = meanOver(problem, (s) => s.panelW[0]) - problem.power.houseW[0];
  if (spareW > 50) return `the panels give ${powerText(problem, spareW)} more than the house needs`;
  const battery = problem.power.kind === 'island' ? problem.power.battery : null;
  if (!battery) return 'there is no sun to spare';
  const pct = (100 * battery.nowKwh) / battery.capacityKwh;
  return `the battery, at ${pct.toFixed(0)} %, can spare it`;
}

function meanOver(problem: PlanProblem, value: (s: PlanProblem['scenarios'][number]) => number): number {
  let sum = 0;
  let weight = 0;
  for (const s of problem.scenarios) {
    sum += s.weight * value(s);
    weight += s.weight;
  }
  return sum / weight;
}

/** Cooling until the coming night is over: what it probably needs, and what it may need at most, nine in ten. */
interface Need {
  readonly likelyKwh: number;
  readonly mostKwh: number;
  readonly startsMs: number | null;
}

function comingNeed(problem: PlanProblem): Need {
  const { nowMs, scenarios } = problem;
  const noon = noonOf(problem.zone, localDate(problem.zone, nowMs));
  const endMs = noon + DAY_MS;
  const need = needKwh(problem, nowMs, endMs);
  const weights = scenarios.map((s) => s.weight);
  let t = 0;
  while (t < problem.slots && meanOver(problem, (s) => s.loadW[t]) < 50) t += 1;
  return {
    likelyKwh: weightedQuantile(need, weights, 0.5),
    mostKwh: weightedQuantile(need, weights, 0.9),
    startsMs: t < problem.slots ? slotStartMs(problem, t) : null,
  };
}

function needClause(problem: PlanProblem): string {
  const need = comingNeed(problem);
  const bank = `${energyFigure(problem, problem.iceKwh)} are in the bank`;
  if (need.mostKwh < 0.05) return `the bank holds only ${energyText(problem, problem.iceKwh)}`;
  return `the ${eveningWord(problem)} may need ${energyText(problem, need.mostKwh)}; ${bank}`;
}

/** The word for the hours ahead: before evening it is still to come, later it is the rest of the night. */
function eveningWord(problem: PlanProblem): string {
  const noon = noonOf(problem.zone, localDate(problem.zone, problem.nowMs));
  const sinceNoonMs = problem.nowMs - noon;
  return sinceNoonMs > 8 * HOUR_MS ? 'night' : 'evening';
}

/** Part of the estimate under which its low end is told as well: that is what the plan counts on. */
const SURE_PART = 0.7;

function coolingSentence(plan: Plan, problem: PlanProblem): string {
  const need = comingNeed(problem);
  const { iceKwh, iceLowKwh } = problem;
  const have = `${energyFigure(problem, iceKwh)} are in the bank`;
  if (need.mostKwh < 0.05) {
    return `Ready to cool: the room is close to its limit of ${temperatureText(problem, problem.limitC[0])}, and ${energyText(problem, iceKwh)} of cold are in the bank.`;
  }
  const ends = plan.lastsAtLeastUntilMs ?? plan.lastsUntilMs;
  const how = ends === null ? 'through the night' : `until about ${clockText(problem, problem.nowMs, ends)}`;
  const sure = `of which ${energyFigure(problem, Math.max(0, iceLowKwh))} are sure and last`;
  const lasts = `${iceLowKwh < SURE_PART * iceKwh ? sure : 'which lasts'} ${how}`;
  const more = nextMaking(plan);
  const then =
    more && ends !== null ? `, and more is made from ${clockText(problem, problem.nowMs, more.startMs)}` : '';
  return `Cooling with ice: the rest of the night may need ${energyText(problem, need.mostKwh)}; ${have}, ${lasts}${then}.`;
}

const nextMaking = (plan: Plan): PlanStep | undefined => plan.steps.find((step) => charges(step.command));

function holdSentence(plan: Plan, problem: PlanProblem): string {
  const need = comingNeed(problem);
  const have = `${energyText(problem, problem.iceKwh)} are in the bank`;
  const making = nextMaking(plan);
  const loadNow = problem.scenarios.some((s) => s.loadW[0] > 50);
  if (loadNow && discharges(plan.steps.find((step) => step.command !== 'hold')?.command ?? 'hold')) {
    return savingSentence(plan, problem);
  }
  if (problem.plant.inventoryPct(problem.iceKwh) >= 98) {
    return `Resting: the bank is full with ${energyText(problem, problem.iceKwh)}.`;
  }
  if (making && makingIsSoon(plan, making, need)) return waitingSentence(problem, making, need, have);
  if (need.mostKwh < 0.05) {
    const when = need.startsMs === null ? '' : ` before ${clockText(problem, problem.nowMs, need.startsMs)}`;
    return `Resting: ${have}, and no cooling is expected${when}.`;
  }
  const evening = `the ${eveningWord(problem)} may need ${energyText(problem, need.mostKwh)} at most`;
  const short = making !== undefined && need.mostKwh > problem.iceKwh;
  const more = short
    ? `; more is made from ${clockText(problem, problem.nowMs, making.startMs)} if it comes to that`
    : '';
  return `Resting: ${have}, and ${evening}${more}.`;
}

/** Whether the next making is what this hold waits for: it comes within half a day. */
function makingIsSoon(plan: Plan, making: PlanStep, need: Need): boolean {
  return making.startMs - plan.steps[0].startMs < 12 * HOUR_MS && need.startsMs !== null;
}

function waitingSentence(problem: PlanProblem, making: PlanStep, need: Need, have: string): string {
  const now = problem.power.kind === 'grid' ? problem.power.buy[0] : null;
  const when = clockText(problem, problem.nowMs, making.startMs);
  const outdoorC = meanOver(problem, (s) => s.outdoorC[0]);
  const why =
    now === null
      ? 'when the sun has more to spare'
      : making.priceMoneyPerKwh < now - 5e-4
        ? `when power costs ${priceText(problem, making.priceMoneyPerKwh)} instead of ${priceText(problem, now)}`
        : outdoorC - making.outdoorC > 1
          ? `when ${temperatureText(problem, making.outdoorC)} outdoors makes ice cheaper than ${temperatureText(problem, outdoorC)} now`
          : 'as late as will do, because ice melts while it waits';
  const may =
    need.mostKwh < 0.05
      ? ''
      : `, and the ${eveningWord(problem)} may need ${energyFigure(problem, need.mostKwh)}`;
  return `Waiting to make ice until ${when}, ${why}; ${have}${may}.`;
}

function savingSentence(plan: Plan, problem: PlanProblem): string {
  const step = plan.steps.find((later) => discharges(later.command));
  const when = step ? ` for ${clockText(problem, problem.nowMs, step.startMs)}` : '';
  const need = comingNeed(problem);
  return `Saving the ice${when}: ${energyText(problem, problem.iceKwh)} are in the bank, and ${energyFigure(problem, need.likelyKwh)} will probably be needed.`;
}

function meltOutSentence(problem: PlanProblem): string {
  const { iceLowKwh, iceHighKwh } = problem;
  return `Letting the bank melt out on a mild evening: it may hold anything from ${energyFigure(problem, iceLowKwh)} to ${energyText(problem, iceHighKwh)}, and an empty bank settles that.`;
}

const DOES: Readonly<Record<Command, string>> = {
  hold: 'Resting',
  'charge-now': 'Making ice',
  discharge: 'Cooling with ice',
  'charge-and-discharge': 'Cooling and making ice at once',
};

function fallbackSentence(plan: Plan, problem: PlanProblem): string {
  const until =
    plan.nextChangeMs === null ? '' : ` until ${clockText(problem, problem.nowMs, plan.nextChangeMs)}`;
  return `${DOES[plan.command]}${until}; ${energyText(problem, problem.iceKwh)} are in the bank.`;
}

/** The sentence of a simple strategy's command. */
export function explainSimple(
  strategy: Exclude<Strategy, 'planned'>,
  command: Command,
  problem: PlanProblem,
): string {
  const have = `${energyText(problem, problem.iceKwh)} are in the bank`;
  if (strategy === 'timetable') return `${DOES[command]}, as the timetable says; ${have}.`;
  const rule =
    strategy === 'storage-priority'
      ? 'ice first, and the bank is filled in the cheap hours'
      : 'the machine first, and ice only helps';
  return `${DOES[command]}: ${rule}; ${priceClause(problem)}; ${have}.`;
}

/** What stands beside the reason: what waiting would cost, what ice is worth, what would change its mind. */
export function asides(plan: Plan, problem: PlanProblem): string[] {
  return [waitSentence, worthSentence, flipSentence].flatMap((sentence) => sentence(plan, problem) ?? []);
}

/** What an hour of doing otherwise would cost; null when that is not known. */
function waitSentence(plan: Plan, problem: PlanProblem): string | null {
  const { waitCostMoney } = plan;
  if (waitCostMoney === null) return null;
  const cost = waitCostMoney < 0.005 ? 'next to nothing' : moneyText(problem, waitCostMoney);
  if (plan.command === 'hold') return `Making ice this hour instead would cost ${cost} more.`;
  return plan.command === 'discharge'
    ? `Leaving the room uncooled for an hour would cost ${cost}, warm hours counted.`
    : `Waiting an hour would cost ${cost}.`;
}

/** What a little more ice is worth now; null when that is not known. */
function worthSentence(plan: Plan, problem: PlanProblem): string | null {
  if (plan.worthOfIceMoneyPerKwh === null) return null;
  const unit = problem.units === 'SI' ? 'kWh' : 'kWh (3.4 kBTU)';
  return `One more ${unit} of ice would be worth ${priceText(problem, plan.worthOfIceMoneyPerKwh)}.`;
}

/** What would turn the machine's command into its opposite; null when nothing near would. */
function flipSentence(plan: Plan, problem: PlanProblem): string | null {
  const { priceMoneyPerKwh, iceKwh } = plan.flips;
  const stop = charges(plan.command);
  const parts: string[] = [];
  if (priceMoneyPerKwh !== null && priceMoneyPerKwh > 0) {
    parts.push(
      `power ${stop ? 'above' : 'below'} ${priceText(problem, priceMoneyPerKwh)} for the coming hour`,
    );
  }
  if (iceKwh !== null) {
    parts.push(
      `${iceKwh > problem.iceKwh ? 'more' : 'less'} than ${energyText(problem, iceKwh)} in the bank`,
    );
  }
  if (parts.length === 0) return null;
  return `It would ${stop ? 'stop' : 'start'} making ice with ${parts.join(', or ')}.`;
}

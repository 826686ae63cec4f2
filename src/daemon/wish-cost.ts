/**
 * What a wish would probably cost beside the plan: the electricity of each slot at its own price, and ice at the worth
 * that the plan gives it. Ranges stay out of it: it is there to choose by, and the words say "up to" and "about".
 * Cooling that falls out is said first, and its warm hours stay out of the money: nobody saves by a hot room unawares.
 */
import { charges, discharges, type WishName } from '../commands.ts';
import type { PlanProblem } from '../planning/problem.ts';
import type { CycleRecord, PlanRecord, PlanStep } from '../record.ts';
import { displayFor } from '../reports/display.ts';
import { HOUR_MS } from '../time.ts';
import type { WishPreview } from '../web/source.ts';
import type { Daemon } from './daemon.ts';

type View = Pick<ReturnType<Daemon['view']>, 'config' | 'plan'> & {
  readonly last: { readonly record: CycleRecord } | null;
  readonly state: { readonly planned: { readonly problem: PlanProblem } | null };
};

/** What stands behind every wish's figures. */
interface Ground {
  readonly view: View;
  readonly record: CycleRecord;
  readonly plan: PlanRecord;
  /** The plant with what was learned of it, as the plan sees it. */
  readonly problem: PlanProblem;
  readonly parts: readonly Part[];
}

interface Draws {
  /** Worth of the ice spent and the electricity drawn beyond the plan; negative: spared. */
  readonly money: number;
  readonly sentence: string;
  /** Whether cooling that the plan has falls out. */
  readonly coolsLess: boolean;
}

/** A plan's slot, as far as it lies in the time of the wish. */
interface Part {
  readonly hours: number;
  readonly step: PlanStep;
}

export function wishCost(view: View, name: WishName, durationMs: number): WishPreview {
  const { last, plan, state } = view;
  const problem = state.planned?.problem;
  if (name === 'none' || last === null || plan === null || problem === undefined)
    return { sentence: 'What it would cost cannot be told yet.', costMoney: null, coolsLess: false };
  const nowMs = last.record.atMs;
  const parts = plan.steps.flatMap((step): Part[] => {
    const fromMs = Math.max(nowMs, step.startMs);
    const toMs = Math.min(nowMs + durationMs, step.startMs + plan.slotMs);
    return toMs > fromMs ? [{ hours: (toMs - fromMs) / HOUR_MS, step }] : [];
  });
  const ground = { view, record: last.record, plan, problem, parts };
  const { money, sentence, coolsLess } = drawsOf(ground, name);
  // Against a plan of least cost nothing is saved but at the rooms' expense: less than nothing is the pricing's grain.
  const least = plan.strategy === 'planned' && !coolsLess ? 0 : -Infinity;
  return { sentence, costMoney: Math.max(least, money), coolsLess };
}

function drawsOf(ground: Ground, name: WishName): Draws {
  switch (name) {
    case 'cool-now':
      return coolNow(ground);
    case 'make-ice':
      return makeIce(ground);
    case 'save-ice':
      return saveIce(ground);
    default:
      return standDown(ground);
  }
}

const hoursOf = (parts: readonly Part[]): number => parts.reduce((sum, { hours }) => sum + hours, 0);
const hoursText = (parts: readonly Part[]): string => `${hoursOf(parts).toFixed(1)} h`;
const coolingOf = ({ parts }: Ground): Part[] => parts.filter(({ step }) => discharges(step.command));
const loadKwh = (parts: readonly Part[]): number =>
  parts.reduce((sum, { hours, step }) => sum + (hours * step.loadW) / 1000, 0);

/** What the machine makes and draws over some slots, at the weather and the ice that the plan sees in them. */
function making({ problem }: Ground, parts: readonly Part[]): { iceKwh: number; money: number } {
  let iceKwh = 0;
  let money = 0;
  for (const { hours, step } of parts) {
    const { iceMakingW, powerW } = problem.plant.operate(
      step.outdoorC,
      problem.plant.inventoryPct(step.iceKwh),
    );
    iceKwh += (hours * iceMakingW) / 1000;
    money += (hours * powerW * step.priceMoneyPerKwh) / 1000;
  }
  return { iceKwh, money };
}

/** The rooms take what ice and coil can give them as they are now, whatever load was foreseen. */
function coolNow({ view, record, plan, problem, parts }: Ground): Draws {
  const mostW = problem.plant.meltLimitW(record.iceOnHandKwh, record.roomC ?? record.limitC);
  const beyond = parts.reduce((sum, { hours, step }) => {
    const foreseenW = discharges(step.command) ? step.loadW : 0;
    return sum + (hours * Math.max(0, mostW - foreseenW)) / 1000;
  }, 0);
  const iceKwh = Math.min(record.iceOnHandKwh, beyond);
  const sentence = `Up to ${heat(view, iceKwh)} of ice more would be spent: that is what the coil can take from the rooms as they are.`;
  return { money: iceKwh * plan.worthOfIceMoneyPerKwh, sentence, coolsLess: false };
}

function makeIce(ground: Ground): Draws {
  const { view, record, problem, parts } = ground;
  const full = making(
    ground,
    parts.filter(({ step }) => !charges(step.command)),
  );
  const madeKwh = Math.min(Math.max(0, problem.plant.capacityKwh - record.iceOnHandKwh), full.iceKwh);
  const money = full.iceKwh > 0 ? (full.money * madeKwh) / full.iceKwh : 0;
  const sentence = `Up to ${heat(view, madeKwh)} of ice more would be made.`;
  return { money: money - madeKwh * worthOfMore(ground), sentence, coolsLess: false };
}

/** More ice now is so much less to make later: it is worth no more than what the plan would make that for. */
function worthOfMore(ground: Ground): number {
  const { plan, record } = ground;
  const hours = plan.slotMs / HOUR_MS;
  const later = plan.steps.filter(({ startMs, command }) => startMs > record.atMs && charges(command));
  const { iceKwh, money } = making(
    ground,
    later.map((step) => ({ hours, step })),
  );
  return iceKwh > 0 ? Math.min(plan.worthOfIceMoneyPerKwh, money / iceKwh) : plan.worthOfIceMoneyPerKwh;
}

function saveIce(ground: Ground): Draws {
  const cooling = coolingOf(ground);
  const lostKwh = loadKwh(cooling);
  const coolsLess = cooling.length > 0;
  const kept = `${heat(ground.view, lostKwh)} of ice are kept.`;
  const money = -lostKwh * ground.plan.worthOfIceMoneyPerKwh;
  return { money, sentence: `${withoutCooling(ground)}${lostKwh > 0 ? ` ${kept}` : ''}`, coolsLess };
}

function standDown(ground: Ground): Draws {
  const charging = ground.parts.filter(({ step }) => charges(step.command));
  const cooling = coolingOf(ground);
  const lostKwh = loadKwh(cooling);
  const coolsLess = cooling.length > 0;
  const unmade = making(ground, charging);
  const money = (unmade.iceKwh - lostKwh) * ground.plan.worthOfIceMoneyPerKwh - unmade.money;
  const also =
    charging.length === 0
      ? ''
      : ` ${hoursText(charging)} of making ice fall out, ${heat(ground.view, unmade.iceKwh)}.`;
  return { money, sentence: `${withoutCooling(ground)}${also}`, coolsLess };
}

/** How much cooling falls out, and how warm that is expected to make the rooms, in the plan's own measure. */
function withoutCooling(ground: Ground): string {
  const { view, problem } = ground;
  const cooling = coolingOf(ground);
  if (cooling.length === 0) return 'The plan melts no ice in that time anyway.';
  const { scenarios, warmHourMoney } = problem;
  const weight = scenarios.reduce((sum, s) => sum + s.weight, 0);
  const warmKhPerKwh = scenarios.reduce((sum, s) => sum + s.weight * s.warmKhPerKwh, 0) / weight;
  const show = displayFor(view.config.site);
  const warmKh = loadKwh(cooling) * warmKhPerKwh;
  const lost = `The rooms would go without ${hoursText(cooling)} of cooling, ${heat(view, loadKwh(cooling))}, and get warmer`;
  if (!(warmKh > 0.05)) return `${lost}.`;
  const over = `${show.degreeHours(warmKh)} ${show.degreeHourUnit} more above their limit`;
  return `${lost}: about ${over}, which the plan counts as ${show.money(warmKh * warmHourMoney)} ${show.currency}.`;
}

function heat({ config }: View, kwh: number): string {
  const show = displayFor(config.site);
  return `${show.heat(kwh)} ${show.heatUnit}`;
}

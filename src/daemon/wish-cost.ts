/**
 * What a wish would probably cost beside the plan: the electricity of each slot at its own price, and ice at the worth
 * that the plan gives it. Ranges stay out of it: it is there to choose by, and the words say "up to".
 */
import { charges, discharges, type WishName } from '../commands.ts';
import { bankLimits } from '../plant/bank.ts';
import type { PlanStep } from '../record.ts';
import { displayFor } from '../reports/display.ts';
import { HOUR_MS } from '../time.ts';
import type { WishPreview } from '../web/source.ts';
import type { Daemon } from './daemon.ts';

type View = ReturnType<Daemon['view']>;

interface Draws {
  /** Ice spent beyond the plan, kWh; negative: made or kept. */
  readonly iceKwh: number;
  /** Electricity drawn beyond the plan; negative: spared. */
  readonly money: number;
  readonly sentence: string;
}

/** A plan's slot, as far as it lies in the time of the wish. */
interface Part {
  readonly hours: number;
  readonly step: PlanStep;
}

export function wishCost(view: View, name: WishName, durationMs: number): WishPreview {
  const { last, plan } = view;
  const worth = plan?.worthOfIceMoneyPerKwh ?? null;
  if (name === 'none' || last === null || plan === null || worth === null)
    return { sentence: 'What it would cost cannot be told yet.', costMoney: null };
  const nowMs = last.record.atMs;
  const parts = plan.steps.flatMap((step): Part[] => {
    const fromMs = Math.max(nowMs, step.startMs);
    const toMs = Math.min(nowMs + durationMs, step.startMs + plan.slotMs);
    return toMs > fromMs ? [{ hours: (toMs - fromMs) / HOUR_MS, step }] : [];
  });
  const { iceKwh, money, sentence } = drawsOf(view, name, parts);
  return { sentence, costMoney: money + iceKwh * worth };
}

function drawsOf(view: View, name: WishName, parts: readonly Part[]): Draws {
  switch (name) {
    case 'cool-now':
      return coolNow(view, parts);
    case 'make-ice':
      return makeIce(view, parts);
    case 'save-ice':
      return uncooled(view, parts);
    default:
      return standDown(view, parts);
  }
}

const hoursOf = (parts: readonly Part[]): number => parts.reduce((sum, { hours }) => sum + hours, 0);
const hoursText = (parts: readonly Part[]): string => `${hoursOf(parts).toFixed(1)} h`;
const coolingOf = (parts: readonly Part[]): Part[] => parts.filter(({ step }) => discharges(step.command));
const chargingOf = (parts: readonly Part[]): Part[] => parts.filter(({ step }) => charges(step.command));
const machineMoney = ({ config }: View, parts: readonly Part[]): number =>
  parts.reduce(
    (sum, { hours, step }) => sum + (hours * config.chiller.powerW * step.priceMoneyPerKwh) / 1000,
    0,
  );

function coolNow(view: View, parts: readonly Part[]): Draws {
  const { config, last } = view;
  const more = parts.filter(({ step }) => !discharges(step.command));
  const iceOnHandKwh = last?.record.iceOnHandKwh ?? 0;
  const mostW = bankLimits(config).meltLimitW(iceOnHandKwh, last?.record.roomC ?? config.comfort.limitC);
  const iceKwh = Math.min(iceOnHandKwh, (hoursOf(more) * mostW) / 1000);
  const sentence = `Up to ${heat(view, iceKwh)} of ice more would be spent, as much as the rooms take.`;
  return { iceKwh, money: 0, sentence };
}

function makeIce(view: View, parts: readonly Part[]): Draws {
  const { config, last } = view;
  const more = parts.filter(({ step }) => !charges(step.command));
  const roomKwh = Math.max(0, bankLimits(config).capacityKwh - (last?.record.iceOnHandKwh ?? 0));
  const fullKwh = (hoursOf(more) * config.chiller.iceMakingW) / 1000;
  const madeKwh = Math.min(roomKwh, fullKwh);
  const money = fullKwh > 0 ? (machineMoney(view, more) * madeKwh) / fullKwh : 0;
  const sentence = `Up to ${heat(view, madeKwh)} of ice more would be made.`;
  return { iceKwh: -madeKwh, money, sentence };
}

function uncooled(view: View, parts: readonly Part[]): Draws {
  const cooling = coolingOf(parts);
  const keptKwh = cooling.reduce((sum, { hours, step }) => sum + (hours * step.loadW) / 1000, 0);
  const sentence =
    cooling.length === 0
      ? 'The plan melts no ice in that time anyway.'
      : `The rooms would go without the cooling that the plan has in ${hoursText(cooling)}; ${heat(view, keptKwh)} of ice are kept.`;
  return { iceKwh: -keptKwh, money: 0, sentence };
}

function standDown(view: View, parts: readonly Part[]): Draws {
  const charging = chargingOf(parts);
  const { iceKwh } = uncooled(view, parts);
  const unmadeKwh = (hoursOf(charging) * view.config.chiller.iceMakingW) / 1000;
  const sentence = `Everything would rest; ${hoursText(charging)} of making ice and ${hoursText(coolingOf(parts))} of cooling fall out.`;
  return { iceKwh: iceKwh + unmadeKwh, money: -machineMoney(view, charging), sentence };
}

function heat({ config }: View, kwh: number): string {
  const show = displayFor(config.site);
  return `${show.heat(kwh)} ${show.heatUnit}`;
}

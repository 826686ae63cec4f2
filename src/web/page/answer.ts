/** The sentences that *Tonight* opens with: until when, what it does and why, what is uncertain. */
import { discharges } from '../../commands.ts';
import type { CycleRecord, PlanRecord } from '../../record.ts';
import type { NowAnswer } from '../source.ts';
import { span, type Format } from './format.ts';
import { strings } from './strings.ts';

export interface Answer {
  readonly headline: string;
  readonly why: string;
  /** What waiting would cost, what ice is worth, what would change the plan's mind. */
  readonly asides: string;
  readonly uncertain: string;
}

/** Less than this is a puddle, not ice on hand. */
const PUDDLE_KWH = 0.05;

export function answer(now: NowAnswer, nowMs: number, format: Format): Answer {
  const { record, modeSinceMs } = now;
  if (!record) return { headline: strings.answer.nothing, why: '', asides: '', uncertain: '' };
  return {
    headline: headline(now, record, nowMs, format),
    why: why(record, modeSinceMs === null ? null : format.when(modeSinceMs, nowMs)),
    asides: asides(now.plan, record, nowMs),
    uncertain: uncertain(now, record, format),
  };
}

/** End of the last step before the night's end in which the plan melts ice; null when it melts none. */
export function neededUntilMs(plan: PlanRecord | null, nowMs: number, nightEndMs: number): number | null {
  const step = plan?.steps.findLast(
    ({ startMs, command }) => discharges(command) && startMs < nightEndMs && startMs + plan.slotMs > nowMs,
  );
  return step && plan ? step.startMs + plan.slotMs : null;
}

/** When the low end of what may be there runs out before it is needed no more; null when even that lasts. */
export function leastUntilMs(now: NowAnswer, record: CycleRecord, nowMs: number): number | null {
  if (!(record.iceOnHandLowKwh > PUDDLE_KWH)) return nowMs;
  const neededMs = neededUntilMs(now.plan, nowMs, now.night.endMs) ?? nowMs;
  const dry = now.plan?.steps.find(
    ({ startMs, iceLowKwh }) => startMs > nowMs && startMs < neededMs && !(iceLowKwh > PUDDLE_KWH),
  );
  return dry?.startMs ?? null;
}

function headline(now: NowAnswer, record: CycleRecord, nowMs: number, format: Format): string {
  const words = strings.answer;
  if (!(record.iceOnHandHighKwh > PUDDLE_KWH)) return words.noIce;
  const most = format.energy(record.iceOnHandHighKwh);
  if (!(record.iceOnHandKwh > PUDDLE_KWH)) return words.hardlyAny(most);
  const untilMs = record.lastsUntilMs;
  const least = leastUntilMs(now, record, nowMs);
  const until = untilMs === null ? null : format.when(untilMs, nowMs);
  if (least === nowMs) return words.perhapsNone(most);
  if (least !== null && (untilMs === null || least < untilMs))
    return words.perhapsOnly(until, format.when(least, nowMs));
  if (until === null || untilMs === null) return words.whole;
  const neededMs = neededUntilMs(now.plan, nowMs, now.night.endMs);
  if (neededMs === null) return words.unneeded(until);
  const spareMs = untilMs - neededMs;
  return spareMs >= 0 ? words.spare(until, span(spareMs)) : words.short(until, span(spareMs));
}

function why(record: CycleRecord, since: string | null): string {
  return [strings.answer.since(strings.doing(record.mode), since), record.reason].filter(Boolean).join(' ');
}

/** Only while the plan's own command runs: under a wish or an interlock they would speak of something else. */
function asides(plan: PlanRecord | null, record: CycleRecord, nowMs: number): string {
  const step = plan?.steps.find(({ startMs }) => startMs <= nowMs && nowMs < startMs + plan.slotMs);
  return step?.command === record.command ? (plan?.asides ?? []).join(' ') : '';
}

function uncertain(now: NowAnswer, record: CycleRecord, format: Format): string {
  const halfKwh = (record.iceOnHandHighKwh - record.iceOnHandLowKwh) / 2;
  const helps = now.helpsMost ? `; ${strings.answer.helps(now.helpsMost)}.` : '.';
  const evening =
    record.eveningLoadKwh !== null && record.eveningLoadHighKwh !== null
      ? strings.answer.evening(format.energy(record.eveningLoadKwh), format.energy(record.eveningLoadHighKwh))
      : '';
  const knows = now.plan?.forecastKnows ?? '';
  return [`${strings.answer.giveOrTake(format.energy(halfKwh))}${helps}`, evening, knows]
    .filter(Boolean)
    .join(' ');
}

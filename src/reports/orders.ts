/** What was commanded, wished and held back. */
import type { Told as ToldWhat } from '../commands.ts';
import { formatInstant } from '../time.ts';
import type { NightSheet } from './night-schema.ts';
import { rounded, runsOf, type Span } from './spans.ts';

const from = (run: readonly Span[]): string => formatInstant(run[0].fromMs);
const to = (run: readonly Span[]): string => formatInstant(run[run.length - 1].toMs);

export function commandsOf(spans: readonly Span[]): NightSheet['commands'] {
  return runsOf(spans, (record) => `${record.command} ${wordsOnly(record.heldBackBy)}`).map((run) => {
    const { command, requested, reason, heldBackBy } = run[0].record;
    return { from: from(run), to: to(run), command, requested, reason, heldBackBy };
  });
}

export function wishesOf(spans: readonly Span[]): NightSheet['wishes'] {
  return runsOf(spans, (record) => record.wish)
    .filter((run) => run[0].record.wish !== 'none')
    .map((run) => ({ from: from(run), to: to(run), wish: run[0].record.wish }));
}

/** What the owner said of the bank, and when it was taken back again. */
export interface Told {
  readonly atMs: number;
  readonly what: ToldWhat;
  readonly point: string | null;
  readonly takenBackMs: number | null;
  /** Ice on hand before and after it was told. */
  readonly beforeKwh: number;
  readonly afterKwh: number;
}

/** Cold that came or went by word alone, kWh: no flux accounts for it. */
export const toldKwh = (told: readonly Told[]): number =>
  told.reduce((sum, one) => sum + (one.takenBackMs === null ? one.afterKwh - one.beforeKwh : 0), 0);

/** Only where something was told, so that sheets from before this could be told stand as they were written. */
export function toldOf(told: readonly Told[]): Pick<NightSheet, 'told'> {
  if (told.length === 0) return {};
  return {
    told: told.map(({ atMs, what, point, takenBackMs }) => ({
      at: formatInstant(atMs),
      what,
      point,
      takenBack: takenBackMs === null ? null : formatInstant(takenBackMs),
    })),
  };
}

/** Each as a few words for a sheet. */
export function toldWords(sheet: NightSheet, clock: (instant: string) => string): string[] {
  return (sheet.told ?? []).map(({ at, what, point, takenBack }) => {
    const back = takenBack === null ? '' : `, taken back ${clock(takenBack)}`;
    return `${clock(at)} ${what}${point === null ? '' : ` (${point})`}${back}`;
  });
}

/** Interlocks that spoke; their sentences without the figures in them, so that one interlock is one line. */
export function interlocksOf(spans: readonly Span[]): NightSheet['interlocks'] {
  const lines = new Map<string, NightSheet['interlocks'][number]>();
  for (const run of runsOf(spans, (record) => wordsOnly(record.heldBackBy))) {
    const what = run[0].record.heldBackBy;
    if (what === '') continue;
    const key = wordsOnly(what);
    const minutes = run.reduce((sum, span) => sum + span.hours, 0) * 60;
    const line = lines.get(key);
    if (line) lines.set(key, { ...line, minutes: rounded(line.minutes + minutes, 1), times: line.times + 1 });
    else lines.set(key, { what, minutes: rounded(minutes, 1), times: 1, first: from(run) });
  }
  return [...lines.values()];
}

function wordsOnly(sentence: string): string {
  return sentence.replace(/\d+(?:[.,:]\d+)*/g, '#');
}

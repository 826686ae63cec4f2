/** What the strip shows, worked out of records and plans without drawing anything. */
import type { Command, Mode } from '../../commands.ts';
import type { CycleRecord, PlanRecord, PlanStep } from '../../record.ts';
import type { RecordColumns, RecordValue } from '../source.ts';

/** The fields that the strip asks for. */
export const STRIP_FIELDS = [
  'atMs',
  'iceOnHandKwh',
  'iceOnHandLowKwh',
  'iceOnHandHighKwh',
  'outdoorC',
  'roomC',
  'limitC',
  'priceMoneyPerKwh',
  'mode',
] as const satisfies readonly (keyof CycleRecord)[];

export type StripRecord = Pick<CycleRecord, (typeof STRIP_FIELDS)[number]>;

/** One record in this stretch is drawn. */
export const STRIP_EVERY_MS = 300_000;
/** A stretch without records longer than this is named, not bridged. */
const GAP_MS = 900_000;

export function stripRecords({ fields, rows }: RecordColumns): StripRecord[] {
  const at = (row: readonly RecordValue[], name: string): RecordValue => row[fields.indexOf(name)] ?? null;
  return rows.map(
    (row) =>
      // oxlint-disable-next-line typescript/no-unsafe-type-assertion -- the daemon answers with the fields asked for
      Object.fromEntries(STRIP_FIELDS.map((name) => [name, at(row, name)])) as unknown as StripRecord,
  );
}

const stretchOf = (atMs: number): number => Math.floor(atMs / STRIP_EVERY_MS);

/** Adds a record, or puts it in place of the last one in the same stretch. */
export function withRecord(records: readonly StripRecord[], record: StripRecord): StripRecord[] {
  const last = records.at(-1);
  if (last && record.atMs <= last.atMs) return [...records];
  const kept = last && stretchOf(last.atMs) === stretchOf(record.atMs) ? records.slice(0, -1) : records;
  return [...kept, record];
}

export interface Sample {
  readonly atMs: number;
  readonly value: number;
}

export interface Range {
  readonly atMs: number;
  readonly low: number;
  readonly high: number;
}

export interface Stretch<T> {
  readonly fromMs: number;
  readonly toMs: number;
  readonly value: T;
}

export interface StripSpan {
  readonly startMs: number;
  readonly endMs: number;
  readonly nowMs: number;
}

export interface StripData extends StripSpan {
  readonly price: { readonly past: Stretch<number>[]; readonly ahead: Stretch<number>[] };
  /** Runs of samples without a gap between. */
  readonly outdoor: Sample[][];
  readonly room: Sample[][];
  readonly limit: Sample[][];
  readonly ice: Sample[][];
  readonly iceRange: Range[][];
  readonly outdoorAhead: Sample[];
  readonly outdoorAheadRange: Range[];
  readonly iceAhead: Sample[];
  readonly iceAheadRange: Range[];
  readonly runs: { readonly past: Stretch<Mode>[]; readonly ahead: Stretch<Mode>[] };
  readonly gaps: Stretch<null>[];
  readonly thought: { readonly madeMs: number; readonly ice: Sample[]; readonly outdoor: Sample[] } | null;
}

export function stripData(
  span: StripSpan,
  records: readonly StripRecord[],
  plan: PlanRecord | null,
  thought: PlanRecord | null,
): StripData {
  const inside = records.filter(({ atMs }) => atMs >= span.startMs && atMs <= span.endMs);
  const ahead = stepsAhead(span, plan, inside.at(-1)?.atMs ?? span.nowMs);
  const lastMs = inside.at(-1)?.atMs ?? null;
  return {
    ...span,
    ...pastLines(inside),
    ...aheadLines(ahead, lastMs === null ? null : inside[inside.length - 1]),
    price: {
      past: stretches(inside, (record) => record.priceMoneyPerKwh),
      ahead: stepStretches(ahead, plan, span, (step) => step.priceMoneyPerKwh),
    },
    runs: {
      past: stretches(inside, (record) => record.mode),
      ahead: stepStretches(ahead, plan, span, (step) => modeOf(step.command)),
    },
    gaps: gapsOf(span, inside),
    thought: thought && thoughtLines(span, thought),
  };
}

function pastLines(
  records: readonly StripRecord[],
): Pick<StripData, 'outdoor' | 'room' | 'limit' | 'ice' | 'iceRange'> {
  return {
    outdoor: runsOf(records, ({ outdoorC }) => outdoorC),
    room: runsOf(records, ({ roomC }) => roomC),
    limit: runsOf(records, ({ limitC }) => limitC),
    ice: runsOf(records, ({ iceOnHandKwh }) => iceOnHandKwh),
    iceRange: unbroken(records).map((run) =>
      run.map(({ atMs, iceOnHandLowKwh, iceOnHandHighKwh }) => ({
        atMs,
        low: iceOnHandLowKwh,
        high: iceOnHandHighKwh,
      })),
    ),
  };
}

type AheadLines = Pick<StripData, 'outdoorAhead' | 'outdoorAheadRange' | 'iceAhead' | 'iceAheadRange'>;

const join = <T>(first: T | null, rest: T[]): T[] => (first && rest.length > 0 ? [first, ...rest] : rest);

/** The pencilled lines begin where the pen stands, so that they join. */
function aheadLines(steps: readonly PlanStep[], pen: StripRecord | null): AheadLines {
  const outdoorC = pen?.outdoorC ?? null;
  return {
    outdoorAhead: join(
      pen && outdoorC !== null ? { atMs: pen.atMs, value: outdoorC } : null,
      steps.map((step) => ({ atMs: step.startMs, value: step.outdoorC })),
    ),
    outdoorAheadRange: steps.map((step) => ({
      atMs: step.startMs,
      low: step.outdoorLowC,
      high: step.outdoorHighC,
    })),
    iceAhead: join(
      pen && { atMs: pen.atMs, value: pen.iceOnHandKwh },
      steps.map((step) => ({ atMs: step.startMs, value: step.iceKwh })),
    ),
    iceAheadRange: join(
      pen && { atMs: pen.atMs, low: pen.iceOnHandLowKwh, high: pen.iceOnHandHighKwh },
      steps.map((step) => ({ atMs: step.startMs, low: step.iceLowKwh, high: step.iceHighKwh })),
    ),
  };
}

function thoughtLines(span: StripSpan, plan: PlanRecord): StripData['thought'] {
  const steps = plan.steps.filter(({ startMs }) => startMs >= span.startMs && startMs <= span.endMs);
  return {
    madeMs: plan.madeMs,
    ice: steps.map((step) => ({ atMs: step.startMs, value: step.iceKwh })),
    outdoor: steps.map((step) => ({ atMs: step.startMs, value: step.outdoorC })),
  };
}

function stepsAhead(span: StripSpan, plan: PlanRecord | null, fromMs: number): PlanStep[] {
  return (plan?.steps ?? []).filter(
    ({ startMs }) => startMs > fromMs && startMs <= span.endMs && startMs >= span.startMs,
  );
}

/** Records parted where they stop for longer than a gap. */
function unbroken(records: readonly StripRecord[]): StripRecord[][] {
  const runs: StripRecord[][] = [];
  for (const record of records) {
    const run = runs.at(-1);
    const last = run?.at(-1);
    if (run && last && record.atMs - last.atMs <= GAP_MS) run.push(record);
    else runs.push([record]);
  }
  return runs;
}

function runsOf(records: readonly StripRecord[], pick: (record: StripRecord) => number | null): Sample[][] {
  const known = records.filter((record) => pick(record) !== null);
  return unbroken(known).map((run) =>
    run.flatMap((record) => {
      const value = pick(record);
      return value === null ? [] : [{ atMs: record.atMs, value }];
    }),
  );
}

function gapsOf(span: StripSpan, records: readonly StripRecord[]): Stretch<null>[] {
  const times = records.map(({ atMs }) => atMs);
  const edges = [span.startMs, ...times, Math.min(span.nowMs, span.endMs)];
  if (records.length === 0) return [];
  return edges
    .slice(1)
    .flatMap((toMs, i) => (toMs - edges[i] > GAP_MS ? [{ fromMs: edges[i], toMs, value: null }] : []));
}

/** Equal neighbours merged; each record stands for the time since the one before it. */
function stretches<T>(
  records: readonly StripRecord[],
  pick: (record: StripRecord) => T | null,
): Stretch<T>[] {
  const list: Stretch<T>[] = [];
  let beforeMs: number | null = null;
  for (const record of records) {
    const fromMs =
      beforeMs !== null && record.atMs - beforeMs <= GAP_MS ? beforeMs : record.atMs - STRIP_EVERY_MS;
    beforeMs = record.atMs;
    append(list, fromMs, record.atMs, pick(record));
  }
  return list;
}

function stepStretches<T>(
  steps: readonly PlanStep[],
  plan: PlanRecord | null,
  span: StripSpan,
  pick: (step: PlanStep) => T,
): Stretch<T>[] {
  const list: Stretch<T>[] = [];
  const fromMs = Math.max(span.nowMs, span.startMs);
  const current = plan?.steps.findLast(({ startMs }) => startMs <= fromMs);
  if (plan && current && current.startMs + plan.slotMs > fromMs && fromMs < span.endMs) {
    append(list, fromMs, current.startMs + plan.slotMs, pick(current));
  }
  for (const step of steps) {
    if (step.startMs >= fromMs)
      append(list, step.startMs, Math.min(step.startMs + (plan?.slotMs ?? 0), span.endMs), pick(step));
  }
  return list;
}

function append<T>(list: Stretch<T>[], fromMs: number, toMs: number, value: T | null): void {
  if (value === null || toMs <= fromMs) return;
  const last = list.at(-1);
  if (last && last.value === value && fromMs - last.toMs < 1000) list[list.length - 1] = { ...last, toMs };
  else list.push({ fromMs, toMs, value });
}

const MODE_OF: Readonly<Record<Command, Mode>> = {
  hold: 'idle',
  'charge-now': 'charging',
  discharge: 'discharging',
  'charge-and-discharge': 'charging-while-discharging',
};

export function modeOf(command: Command): Mode {
  return MODE_OF[command];
}

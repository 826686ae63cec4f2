/** What a request asks for, read strictly: anything not understood is a problem with what was expected. */
import { parseDuration, parseInstant, DAY_MS, MINUTE_MS } from '../time.ts';
import type { CycleRecord } from '../record.ts';
import { problem } from './problem.ts';

/** A whole record is about 1.6 kB of JSON: more than a night and a bit at a time is thinned or refused. */
const LONGEST_RAW_MS = 26 * 3_600_000;
const LONGEST_THINNED_MS = 8 * DAY_MS;

export interface RecordQuery {
  readonly fromMs: number;
  readonly toMs: number;
  /** One record in each stretch of this length, the last; 0 for all of them. */
  readonly everyMs: number;
  readonly fields: readonly string[] | null;
}

type Query = Readonly<Record<string, string | undefined>>;

/** Reads `from`, `to`, `every`, `fields`; a Response is the refusal. */
export function recordQuery(query: Query): RecordQuery | Response {
  const span = spanQuery(query);
  if (span instanceof Response) return span;
  const everyMs = query['every'] === undefined ? 0 : parseDuration(query['every']);
  if (everyMs === null || (everyMs !== 0 && everyMs < MINUTE_MS)) {
    return problem(400, 'Expected "every" as an ISO 8601 duration of at least PT1M, such as PT5M.');
  }
  const longest = everyMs === 0 ? LONGEST_RAW_MS : LONGEST_THINNED_MS;
  if (span.toMs - span.fromMs > longest) {
    return problem(
      400,
      `Expected at most ${longest / 3_600_000} h between "from" and "to"; ask in parts, or with "every".`,
    );
  }
  const fields = query['fields'] === undefined ? null : query['fields'].split(',');
  const known = fields === null || fields.every((field) => /^[A-Za-z0-9]{1,40}$/.test(field));
  return known
    ? { ...span, everyMs, fields }
    : problem(
        400,
        'Expected "fields" as names of record fields with commas between, such as atMs,iceOnHandKwh.',
      );
}

/** Reads `from` and `to` as RFC 3339 instants. */
export function spanQuery(query: Query): { fromMs: number; toMs: number } | Response {
  const fromMs = parseInstant(query['from'] ?? '');
  const toMs = parseInstant(query['to'] ?? '');
  if (fromMs === null || toMs === null || !(fromMs <= toMs)) {
    return problem(
      400,
      'Expected "from" and "to" as RFC 3339 times, "from" first, such as 2026-07-14T12:00:00Z.',
    );
  }
  return { fromMs, toMs };
}

const DATE = /^\d{4}-\d{2}-\d{2}$/;

export function isDate(text: string): boolean {
  const atMs = DATE.test(text) ? Date.parse(`${text}T00:00:00Z`) : Number.NaN;
  return Number.isFinite(atMs) && new Date(atMs).toISOString().slice(0, 10) === text;
}

/** Reads `from` and `to` as dates; each may be left out. */
export function dateQuery(query: Query): { from: string; to: string } | Response {
  const from = query['from'] ?? '0000-01-01';
  const to = query['to'] ?? '9999-12-31';
  return DATE.test(from) && DATE.test(to) && from <= to
    ? { from, to }
    : problem(400, 'Expected "from" and "to" as dates, "from" first, such as 2026-07-14.');
}

/** The last record of every stretch of `everyMs`, untouched; all of them when it is 0. */
export function thinned(records: readonly CycleRecord[], everyMs: number): readonly CycleRecord[] {
  if (everyMs === 0) return records;
  const stretch = (record: CycleRecord): number => Math.floor(record.atMs / everyMs);
  return records.filter(
    (record, i) => i === records.length - 1 || stretch(record) !== stretch(records[i + 1]),
  );
}

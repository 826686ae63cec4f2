/** What anybody on the house's network may read. */
import type { Hono } from 'hono';
import {
  openMetrics,
  prometheusText,
  wantsOpenMetrics,
  OPENMETRICS_TYPE,
  PROMETHEUS_TYPE,
} from './exposition.ts';
import { metricFamilies } from './metrics.ts';
import { problem } from './problem.ts';
import { dateQuery, isDate, recordQuery, spanQuery, thinned, type RecordQuery } from './query.ts';
import type { CycleRecord } from '../record.ts';
import type { Access, NowAnswer, NowView, RecordColumns, RecordValue, WebSource } from './source.ts';
import { zoneOffsets } from './zone.ts';

const FRESH = { 'cache-control': 'no-store' };

/** The printable sheet brings its own styles and nothing else; only our own page may frame it. */
const SHEET_POLICY = "default-src 'none'; style-src 'unsafe-inline'; img-src data:; frame-ancestors 'self'";

export interface ReadParts {
  readonly source: WebSource;
  readonly accessOf: (cookieHeader: string | undefined) => Access;
  readonly recordsSinceStart: () => number;
}

export function addReadRoutes(app: Hono, parts: ReadParts): void {
  const { source } = parts;
  app.get('/api/now', (c) =>
    c.json(nowAnswer(source.now(), parts.accessOf(c.req.header('cookie'))), 200, FRESH),
  );
  app.get('/api/records', (c) => {
    const query = recordQuery(c.req.query());
    return query instanceof Response ? query : c.json(recordsAnswer(source, query), 200, FRESH);
  });
  app.get('/api/plans', (c) => {
    const span = spanQuery(c.req.query());
    return span instanceof Response ? span : c.json(source.plansBetween(span.fromMs, span.toMs), 200, FRESH);
  });
  app.get('/metrics', (c) => {
    const families = metricFamilies(source.now(), parts.recordsSinceStart());
    return wantsOpenMetrics(c.req.header('accept'))
      ? c.body(openMetrics(families), 200, { 'content-type': OPENMETRICS_TYPE })
      : c.body(prometheusText(families), 200, { 'content-type': PROMETHEUS_TYPE });
  });
  app.get('/health', (c) => {
    const health = healthAnswer(source.now());
    return c.json(health, health.status === 'fail' ? 503 : 200, FRESH);
  });
  addNightRoutes(app, source);
}

function nowAnswer(now: NowView, access: Access): NowAnswer {
  return { ...now, zoneOffsets: zoneOffsets(now.site.zone, now.nowMs), access };
}

function addNightRoutes(app: Hono, source: WebSource): void {
  app.get('/api/nights', (c) => {
    const span = dateQuery(c.req.query());
    return span instanceof Response ? span : c.json(source.nights(span.from, span.to), 200, FRESH);
  });
  app.get('/api/nights.csv', (c) => {
    const span = dateQuery(c.req.query());
    if (span instanceof Response) return span;
    const headers = {
      'content-type': 'text/csv; charset=utf-8; header=present',
      'content-disposition': 'attachment; filename="nights.csv"',
      ...FRESH,
    };
    return c.body(source.nightsCsv(span.from, span.to), 200, headers);
  });
  app.get('/api/nights/:date', (c) => {
    const date = c.req.param('date');
    const sheet = isDate(date) ? source.night(date) : null;
    return sheet === null || sheet === undefined ? noSheet(date) : c.json(sheet, 200, FRESH);
  });
  app.get('/nights/:date', (c) => {
    const date = c.req.param('date');
    const html = isDate(date) ? source.nightHtml(date) : null;
    if (html === null) return noSheet(date);
    const headers = { 'content-security-policy': SHEET_POLICY, 'x-frame-options': 'SAMEORIGIN', ...FRESH };
    return c.html(html, 200, headers);
  });
}

function noSheet(date: string): Response {
  return isDate(date)
    ? problem(404, `There is no sheet for the night of ${date}; a sheet is written at the noon after.`)
    : problem(404, 'Expected the date of a night as YYYY-MM-DD.');
}

function recordsAnswer(source: WebSource, query: RecordQuery): readonly CycleRecord[] | RecordColumns {
  const records = thinned(source.records(query.fromMs, query.toMs), query.everyMs);
  const { fields } = query;
  return fields ? { fields, rows: records.map((record) => row(record, fields)) } : records;
}

/** The asked values of a record in their order; null for a field that no record has. */
function row(record: CycleRecord, fields: readonly string[]): RecordValue[] {
  const values: Readonly<Record<string, RecordValue>> = { ...record };
  return fields.map((field) => (Object.hasOwn(values, field) ? values[field] : null));
}

/** A record older than this many of its own spans means that the loop stands still. */
const STANDSTILL_SPANS = 4;
const STANDSTILL_LEAST_MS = 120_000;

interface HealthAnswer {
  readonly status: 'pass' | 'warn' | 'fail';
  readonly checks: Readonly<Record<string, string>>;
}

/** `fail` only where a restart could help: the loop stands still or the database is broken. All else warns. */
function healthAnswer(now: NowView): HealthAnswer {
  const { broker, clock, store } = now.health;
  const ageMs = now.record ? now.nowMs - now.record.atMs : null;
  const oldMs = Math.max(STANDSTILL_LEAST_MS, STANDSTILL_SPANS * (now.record?.spanMs ?? 0));
  const loop = ageMs === null ? 'no record yet' : ageMs <= oldMs ? 'running' : 'standing still';
  const checks = { loop, broker: broker.state, clock: clock.state, store: store.state };
  if (loop === 'standing still' || store.state === 'broken') return { status: 'fail', checks };
  const well =
    loop === 'running' && broker.state === 'connected' && clock.state === 'set' && store.state === 'ok';
  return { status: well ? 'pass' : 'warn', checks };
}

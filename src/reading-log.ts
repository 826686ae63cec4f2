/**
 * The reading log: CSV with the header `time,point,value`, RFC 3339 times in any zone, values in the point's own unit,
 * true/false for truths, any rate, any order. Lines end with LF or CRLF; fields may stand in double quotes (RFC 4180).
 */
import { judge, pointSpec, type PointId, type Reading, type Unusable } from './points.ts';
import { parseInstant } from './time.ts';

export const LOG_HEADER = 'time,point,value';

/** A logger that has lost its clock writes 1970, a broken one writes anything. */
const EARLIEST_MS = Date.UTC(2000, 0, 1);
const LATEST_MS = Date.UTC(2100, 0, 1);

export type LogLine =
  | { readonly kind: 'reading'; readonly reading: Reading }
  | { readonly kind: 'empty' }
  /** A number that came but cannot be a true reading: dropped by name, counted, not a fault of the file. */
  | { readonly kind: 'dropped'; readonly point: PointId; readonly why: Unusable }
  | { readonly kind: 'fault'; readonly sentence: string };

const fault = (sentence: string): LogLine => ({ kind: 'fault', sentence });

/** True when the first line of a file is the header of a reading log; a byte order mark is overlooked. */
export function isLogHeader(line: string): boolean {
  return fieldsOf(line.replace(/^\uFEFF/, '').trim()).join(',') === LOG_HEADER;
}

/** Reads one line after the header. */
export function parseLogLine(line: string): LogLine {
  const text = line.trimEnd();
  if (text === '') return { kind: 'empty' };
  const fields = fieldsOf(text);
  if (fields.length !== 3) return fault(`expected 3 fields as ${LOG_HEADER}, found ${fields.length}`);
  const [time, id, written] = fields;
  const atMs = parseInstant(time);
  if (atMs === null) return fault(`expected a time as 2026-07-14T18:00:00Z, found "${time}"`);
  if (!(atMs >= EARLIEST_MS && atMs < LATEST_MS))
    return fault(`expected a time between 2000 and 2100, found "${time}"`);
  const spec = pointSpec(id);
  if (spec === null) return fault(`expected a known point, found "${id}"`);
  if (spec.kind === 'series') return fault(`expected a point with single values, found "${id}"`);
  const value = valueFrom(written, spec.kind === 'boolean');
  if (value === null)
    return fault(`expected a ${spec.kind === 'boolean' ? 'true or false' : 'number'}, found "${written}"`);
  const point = id as PointId;
  const why = judge(spec, value);
  return why === null
    ? { kind: 'reading', reading: { point, atMs, value } }
    : { kind: 'dropped', point, why };
}

function valueFrom(written: string, truth: boolean): number | null {
  if (truth && (written === 'true' || written === 'false')) return written === 'true' ? 1 : 0;
  const value = Number(written);
  return written.trim() === '' || !Number.isFinite(value) || (truth && value !== 0 && value !== 1)
    ? null
    : value;
}

function fieldsOf(line: string): string[] {
  if (!line.includes('"')) return line.split(',');
  return [...line.matchAll(/(?:^|,)(?:"((?:[^"]|"")*)"|([^,]*))/g)].map(
    (match) => match[1]?.replaceAll('""', '"') ?? match[2],
  );
}

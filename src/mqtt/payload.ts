/**
 * What a payload says about a point: numbers in the point's own unit with the time they were measured, a series, or
 * one sentence about what is wrong with it. Pure, and total: no payload makes it throw.
 */
import type { PointConfig } from '../config.ts';
import { judge, type PointId, type PointSpec, type Unusable } from '../points.ts';
import { parseInstant } from '../time.ts';
import { toInside, unitNames, type Dimension } from '../units.ts';
import { pointAt } from './pointer.ts';
import { resolveSenml, senmlUnit, type SenmlRecord } from './senml.ts';

/** A point that the site file names, with what is known of its kind. */
export interface KnownPoint {
  readonly id: PointId;
  readonly config: PointConfig;
  readonly spec: PointSpec;
}

export interface DecodedReading {
  /** In the point's own unit, offset applied; truth values are 0 or 1. */
  readonly value: number;
  /** Why the number must not be used; null when it may. */
  readonly unusable: Unusable | null;
  readonly atMs: number;
  /** Whether the payload told the time itself; otherwise `atMs` is when it arrived. */
  readonly ownTime: boolean;
}

export interface ForecastEntry {
  readonly atMs: number;
  readonly temperatureC: number;
}

export type Decoded =
  | {
      readonly kind: 'readings';
      readonly readings: readonly DecodedReading[];
      readonly updateMs: number | null;
    }
  | { readonly kind: 'forecast'; readonly entries: readonly ForecastEntry[] }
  | { readonly kind: 'prices'; readonly document: unknown }
  | { readonly kind: 'fault'; readonly fault: string };

/** A payload that is read as text and as JSON at most once, however many points share its topic. */
export interface OpenPayload {
  text(): string | null;
  json(): { readonly ok: true; readonly value: unknown } | { readonly ok: false };
}

const UTF8 = new TextDecoder('utf-8', { fatal: true });

export function openPayload(bytes: Uint8Array): OpenPayload {
  let text: string | null | undefined;
  let json: ReturnType<OpenPayload['json']> | undefined;
  const readText = (): string | null => (text ??= decodeUtf8(bytes));
  return {
    text: readText,
    json: () => (json ??= parseJson(readText())),
  };
}

function decodeUtf8(bytes: Uint8Array): string | null {
  try {
    return UTF8.decode(bytes);
  } catch {
    return null;
  }
}

function parseJson(text: string | null): ReturnType<OpenPayload['json']> {
  if (text === null) return { ok: false };
  try {
    return { ok: true, value: JSON.parse(text) as unknown };
  } catch {
    return { ok: false };
  }
}

/** A sentence about the payload, thrown inside this file only. */
class Fault extends Error {}

/** Decodes one payload for one point, as heard at `arrivalMs`. Never throws. */
export function decode(payload: OpenPayload, point: KnownPoint, arrivalMs: number): Decoded {
  try {
    if (point.spec.kind === 'series') return decodeSeries(payload, point);
    if (point.config.read.startsWith('senml:')) return decodeSenml(payload, point, arrivalMs);
    return decodeValue(payload, point, arrivalMs);
  } catch (error) {
    // RangeError: a date or a nesting beyond what the machine can hold
    if (!(error instanceof Fault) && !(error instanceof RangeError)) throw error;
    return { kind: 'fault', fault: error.message };
  }
}

function decodeValue(payload: OpenPayload, point: KnownPoint, arrivalMs: number): Decoded {
  const raw = locate(payload, point.config.read);
  const time = point.config.timePointer;
  const ownMs = time === null ? null : instantOf(locate(payload, time), 'the time');
  const reading = toReading(raw, point.config.unit, point, ownMs, arrivalMs);
  return { kind: 'readings', readings: [reading], updateMs: null };
}

function decodeSenml(payload: OpenPayload, point: KnownPoint, arrivalMs: number): Decoded {
  const name = point.config.read.slice('senml:'.length);
  const pack = resolveSenml(jsonOf(payload), arrivalMs / 1000);
  if (!pack.ok) throw new Fault(pack.fault);
  const records = pack.records.filter((record) => record.name === name && record.value !== null);
  if (records.length === 0) throw new Fault(`expected a SenML record named "${name}", found none`);
  return {
    kind: 'readings',
    readings: records.map((record) => senmlReading(record, point, arrivalMs)),
    updateMs: shortestUpdateMs(records),
  };
}

function senmlReading(record: SenmlRecord, point: KnownPoint, arrivalMs: number): DecodedReading {
  const unit = record.unit === null ? point.config.unit : senmlUnit(record.unit);
  const atMs = Math.round(record.timeS * 1000);
  if (!(Math.abs(atMs) <= LAST_INSTANT_MS)) throw new Fault(`expected a time, found ${record.timeS} s`);
  if (record.ownTime) return toReading(record.value, unit, point, atMs, arrivalMs);
  // a relative time says how long before arrival it was measured, not when
  if (!(atMs >= CLOCK_UNSET_BEFORE_MS))
    throw new Fault(`expected a time relative to now, or absolute from 2020 on, found ${record.timeS} s`);
  return toReading(record.value, unit, point, null, atMs);
}

function shortestUpdateMs(records: readonly SenmlRecord[]): number | null {
  const seconds = records.flatMap((record) =>
    record.updateS !== null && record.updateS > 0 ? [record.updateS] : [],
  );
  return seconds.length === 0 ? null : Math.min(...seconds) * 1000;
}

/** A sensor that has lost its clock counts from 1970, 2000 or its own making; such a time is no time. */
const CLOCK_UNSET_BEFORE_MS = Date.UTC(2020, 0, 1);

function toReading(
  raw: unknown,
  unit: string | null,
  point: KnownPoint,
  ownMs: number | null,
  arrivalMs: number,
): DecodedReading {
  const ownTime = ownMs !== null && ownMs >= CLOCK_UNSET_BEFORE_MS;
  const atMs = ownTime ? ownMs : arrivalMs;
  if (point.spec.kind === 'boolean') {
    return { value: truthOf(raw, point.config) ? 1 : 0, unusable: null, atMs, ownTime };
  }
  const measured = converted(numberOf(raw), unit, point.spec);
  const value = point.spec.kind === 'temperature' ? measured + point.config.offsetK : measured;
  return { value, unusable: judgeBoth(point.spec, measured, value), atMs, ownTime };
}

/** Glitches are known by the very number that the thermometer sent, ranges by the corrected one. */
function judgeBoth(spec: PointSpec, measured: number, corrected: number): Unusable | null {
  // 185 °F converts to 85 °C only to the last bit
  const glitch = judge(spec, Math.round(measured * 1e6) / 1e6);
  return glitch !== null && glitch !== 'implausible' ? glitch : judge(spec, corrected);
}

function converted(value: number, unit: string | null, spec: PointSpec): number {
  if (unit === null || unit === spec.unit) return value;
  const dimension = spec.kind as Dimension;
  const inside = toInside(value, unit, dimension);
  if (inside === null) {
    throw new Fault(`expected one of the units ${unitNames(dimension).join(', ')}, found ${shown(unit)}`);
  }
  return inside;
}

const NUMBER = /^[-+]?(\d+\.?\d*|\.\d+)([eE][-+]?\d+)?$/;

function numberOf(raw: unknown): number {
  if (typeof raw === 'number' && Number.isFinite(raw)) return raw;
  if (typeof raw === 'string' && NUMBER.test(raw.trim())) {
    const value = Number(raw.trim());
    if (Number.isFinite(value)) return value;
  }
  throw new Fault(`expected a number, found ${shown(raw)}`);
}

/** The owner's two texts decide first, so that an inverted contact can be told; then JSON's own true and false. */
function truthOf(raw: unknown, config: PointConfig): boolean {
  const text = typeof raw === 'string' ? raw.trim() : (JSON.stringify(raw) ?? '');
  if (text === config.trueText) return true;
  if (text === config.falseText) return false;
  if (typeof raw === 'boolean') return raw;
  throw new Fault(`expected "${config.trueText}" or "${config.falseText}", found ${shown(raw)}`);
}

/** Epoch numbers from here on are milliseconds: as seconds this is the year 5138, as milliseconds 1973. */
const MILLISECONDS_FROM = 1e11;
/** The last instant that ECMAScript can hold. */
const LAST_INSTANT_MS = 8.64e15;

function instantOf(raw: unknown, what: string): number {
  const text = typeof raw === 'string' ? raw.trim() : null;
  const number = text !== null && NUMBER.test(text) ? Number(text) : raw;
  const atMs = typeof number === 'number' ? epochMs(number) : text === null ? null : parseInstant(text);
  if (atMs === null || !(Math.abs(atMs) <= LAST_INSTANT_MS)) {
    throw new Fault(`expected ${what} as RFC 3339 or as epoch seconds or milliseconds, found ${shown(raw)}`);
  }
  return atMs;
}

function epochMs(number: number): number {
  return Math.round(Math.abs(number) < MILLISECONDS_FROM ? number * 1000 : number);
}

function locate(payload: OpenPayload, read: string): unknown {
  if (read === 'plain') {
    const text = payload.text();
    if (text === null) throw new Fault('expected text, found bytes that are not UTF-8');
    return text;
  }
  const pointed = pointAt(jsonOf(payload), read);
  if (!pointed.found) throw new Fault(`expected a value at ${read}, found none`);
  return pointed.value;
}

function jsonOf(payload: OpenPayload): unknown {
  const json = payload.json();
  if (!json.ok)
    throw new Fault(`expected JSON, found ${shown(payload.text() ?? 'bytes that are not UTF-8')}`);
  return json.value;
}

function decodeSeries(payload: OpenPayload, point: KnownPoint): Decoded {
  const { read } = point.config;
  const document = read === 'plain' ? jsonOf(payload) : locate(payload, read);
  if (point.id === 'prices') return { kind: 'prices', document };
  if (!Array.isArray(document))
    throw new Fault(`expected an array of {time, temperature}, found ${shown(document)}`);
  const byTime = new Map(document.map((entry, index) => forecastEntry(entry, index, point)));
  const entries = [...byTime].map(([atMs, temperatureC]) => ({ atMs, temperatureC }));
  return { kind: 'forecast', entries: entries.toSorted((a, b) => a.atMs - b.atMs) };
}

function forecastEntry(entry: unknown, index: number, point: KnownPoint): [number, number] {
  const time = pointAt(entry, '/time');
  const temperature = pointAt(entry, '/temperature');
  if (!time.found || !temperature.found) {
    throw new Fault(`expected {time, temperature} as entry ${index}, found ${shown(entry)}`);
  }
  const value = converted(numberOf(temperature.value), point.config.unit, {
    ...point.spec,
    kind: 'temperature',
  });
  if (judge(point.spec, value) !== null) {
    const [low, high] = point.spec.plausible;
    throw new Fault(`expected ${low} to ${high} degC as entry ${index}, found ${value}`);
  }
  return [instantOf(time.value, `the time of entry ${index}`), value];
}

function shown(value: unknown): string {
  const text = JSON.stringify(value) ?? 'nothing';
  return text.length <= 48 ? text : `${text.slice(0, 47)}…`;
}

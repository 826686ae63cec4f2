/** Values to payloads and back, Homie 5.0.0 section "Payload": what is published, and what a `/set` may say. */
import { formatDuration, formatInstant, parseDuration } from '../time.ts';
import type { Property } from './homie.ts';

/** Numbers, epoch milliseconds for times, milliseconds for durations, text, or a JSON object. Null is unknown. */
export type Value = number | string | object | null;

/** An empty text is one zero byte: a payload without bytes would delete the topic. */
const EMPTY = '\0';

/** The payload of a value; unknown is a payload without bytes, which clears the topic. */
export function formatValue(property: Property, value: Value): string {
  if (value === null || (typeof value === 'number' && !Number.isFinite(value))) return '';
  if (typeof value === 'object') return JSON.stringify(value);
  if (typeof value === 'string') return value === '' ? EMPTY : value;
  if (property.datatype === 'datetime') return formatInstant(value);
  if (property.datatype === 'duration') return formatDuration(value);
  return formatNumber(value, property.decimals ?? 3);
}

/** Only `0-9 - . e E`: no plus sign, no negative zero. */
export function formatNumber(value: number, decimals: number): string {
  const rounded = Number(value.toFixed(decimals));
  return String(rounded === 0 ? 0 : rounded).replace('+', '');
}

/** Whether a value is far enough from the published one to be published. */
export function isNews(property: Property, published: Value | undefined, value: Value): boolean {
  if (published === undefined || typeof published !== typeof value) return true;
  if (typeof value !== 'number' || typeof published !== 'number') {
    return formatValue(property, published) !== formatValue(property, value);
  }
  const band = property.bandMs ?? (property.decimals === undefined ? 0 : 10 ** -property.decimals);
  return (
    formatValue(property, published) !== formatValue(property, value) &&
    Math.abs(value - published) >= band * 0.999
  );
}

export type Parsed =
  { readonly ok: true; readonly value: number | string } | { readonly ok: false; readonly fault: string };

const INTEGER = /^-?\d+$/;
const FLOAT = /^-?(\d+\.?\d*|\.\d+)([eE]-?\d+)?$/;
const DURATION = /^PT(?=.)(\d+H)?(\d+M)?(\d+S)?$/;
const LEAST_64 = -(2n ** 63n);
const MOST_64 = 2n ** 63n - 1n;

/** Reads the payload of a `/set` for a property: its datatype, then rounding to the step, then the range. */
export function parseSet(property: Property, payload: string): Parsed {
  if (payload === '') return refused('a value', payload);
  switch (property.datatype) {
    case 'integer': {
      const fits = INTEGER.test(payload) && BigInt(payload) >= LEAST_64 && BigInt(payload) <= MOST_64;
      return fits ? intoRange(property, Number(payload), payload) : refused('an integer', payload);
    }
    case 'float': {
      const value = FLOAT.test(payload) ? Number(payload) : Number.NaN;
      return Number.isFinite(value) ? intoRange(property, value, payload) : refused('a number', payload);
    }
    case 'enum':
      return property.format?.split(',').includes(payload)
        ? { ok: true, value: payload }
        : refused(`one of ${property.format?.replaceAll(',', ', ')}`, payload);
    case 'duration': {
      const ms = DURATION.test(payload) ? parseDuration(payload) : null;
      return ms === null ? refused('a duration such as PT2H or PT30M', payload) : { ok: true, value: ms };
    }
    case 'string':
      return { ok: true, value: payload === EMPTY ? '' : payload };
    default:
      return refused('a property that can be set', payload);
  }
}

/**
 * Rounds to the step, from the low end, else the high end, and then checks the range:
 * `floor((v − base) / step + 0.5) · step + base` (Homie 5.0.0, "Payload", Float).
 */
function intoRange(property: Property, value: number, payload: string): Parsed {
  const [low, high, step] = (property.format ?? '').split(':').map((part) => (part ? Number(part) : null));
  const base = low ?? high ?? value;
  const stepped = step ? Math.floor((value - base) / step + 0.5) * step + base : value;
  // a step of 0.1 has no exact binary form; twelve digits are beyond any step and within any double
  const rounded = Number(stepped.toPrecision(12));
  const inside = rounded >= (low ?? -Infinity) && rounded <= (high ?? Infinity);
  const range = [low === null ? '' : `from ${low}`, high === null ? '' : `to ${high}`]
    .filter(Boolean)
    .join(' ');
  return inside ? { ok: true, value: rounded } : refused(`a number ${range}`, payload);
}

function refused(expected: string, payload: string): Parsed {
  return { ok: false, fault: `expected ${expected}, found ${JSON.stringify(payload.slice(0, 60))}` };
}

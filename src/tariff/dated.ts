/**
 * Dated prices from a retained message: a subset of the OpenADR 3 event (OpenADR 3.1.1, User Guide 7.3). Taken: one
 * event or a list of them, `intervalPeriod` at the event and at an interval, PRICE and EXPORT_PRICE payloads whose
 * several values split their interval evenly. Refused: loops (`event.duration`; they drift an hour at daylight-saving
 * changes), endless and "now" starts (a retained message has no now), other units, another currency, and a count of
 * values that does not divide the interval into common steps (24 values in a 23-hour day).
 */
import { RimeholdError } from '../errors.ts';
import { HOUR_MS, MINUTE_MS, parseDuration, parseInstant } from '../time.ts';

/** A price that holds over [startMs, endMs); null where the message gives none. Earlier in the list wins. */
export interface DatedPrice {
  readonly startMs: number;
  readonly endMs: number;
  readonly buy: number | null;
  readonly sell: number | null;
}

type Fields = Readonly<Record<string, unknown>>;
interface Span {
  readonly startMs: number;
  readonly durationMs: number;
}

const SIDES: Readonly<Record<string, 'buy' | 'sell'>> = { PRICE: 'buy', EXPORT_PRICE: 'sell' };
/** A year of hours: more values than that are a mistake, and would slow every plan. */
const MOST_VALUES = 9000;
/** Money per kWh beyond this is a unit mistake (money per MWh). */
const MOST_PRICE = 100;

/** Reads a parsed JSON value; prices come in order of precedence. Throws `payload` with what was expected and found. */
export function parseDatedPrices(value: unknown, currency: string): DatedPrice[] {
  const events = Array.isArray(value) ? value : [value];
  const read = events.map((event, i) => {
    const at = Array.isArray(value) ? `/${i}` : '';
    const fields = fieldsOf(event, at || '/');
    return { priority: priorityOf(fields, at), prices: pricesOf(fields, currency, at) };
  });
  const prices = read.toSorted((a, b) => a.priority - b.priority).flatMap((event) => event.prices);
  if (prices.length > MOST_VALUES) throw fault(`at most ${MOST_VALUES} prices`, prices.length, '/');
  return prices;
}

function fault(expected: string, found: unknown, at: string): RimeholdError {
  const shown = JSON.stringify(found) ?? 'nothing';
  const short = shown.length > 80 ? `${shown.slice(0, 77)}...` : shown;
  return new RimeholdError('payload', `Expected ${expected} at ${at} of the dated prices, found ${short}.`, {
    at,
  });
}

function fieldsOf(value: unknown, at: string): Fields {
  if (isFields(value)) return value;
  throw fault('an object', value, at);
}

function isFields(value: unknown): value is Fields {
  return typeof value === 'object' && value !== null && !Array.isArray(value);
}

function listOf(value: unknown, at: string): readonly unknown[] {
  if (!Array.isArray(value) || value.length === 0) throw fault('a list with at least one entry', value, at);
  return value;
}

/** OpenADR: 0 is the highest priority, none the lowest. */
function priorityOf(event: Fields, at: string): number {
  const { priority } = event;
  if (priority === undefined || priority === null) return Number.MAX_SAFE_INTEGER;
  if (typeof priority === 'number' && Number.isInteger(priority) && priority >= 0) return priority;
  throw fault('a whole number from 0', priority, `${at}/priority`);
}

function pricesOf(event: Fields, currency: string, at: string): DatedPrice[] {
  if (event['duration'] !== undefined && event['duration'] !== null) {
    throw fault(
      'no looped duration (it cannot follow daylight-saving changes; send dated days)',
      event['duration'],
      `${at}/duration`,
    );
  }
  checkDescriptors(event['payloadDescriptors'], currency, at);
  const whole =
    event['intervalPeriod'] == null ? null : spanOf(event['intervalPeriod'], `${at}/intervalPeriod`);
  let nextMs = whole?.startMs ?? null;
  return listOf(event['intervals'], `${at}/intervals`).flatMap((entry, i) => {
    const place = `${at}/intervals/${i}`;
    const interval = fieldsOf(entry, place);
    const own =
      interval['intervalPeriod'] == null
        ? null
        : spanOf(interval['intervalPeriod'], `${place}/intervalPeriod`);
    const startMs = own?.startMs ?? nextMs;
    const durationMs = own?.durationMs ?? whole?.durationMs;
    if (startMs === null || durationMs === undefined)
      throw fault('an intervalPeriod here or at the event', entry, place);
    nextMs = startMs + durationMs;
    return payloadsOf(interval['payloads'], { startMs, durationMs }, `${place}/payloads`);
  });
}

function spanOf(value: unknown, at: string): Span {
  const { start, duration, randomizeStart } = fieldsOf(value, at);
  const startMs = typeof start === 'string' ? parseInstant(start) : null;
  if (startMs === null || startMs < 0)
    throw fault('a dated start such as "2026-12-02T07:00:00Z"', start, `${at}/start`);
  const durationMs = typeof duration === 'string' ? parseDuration(duration) : null;
  if (durationMs === null || durationMs <= 0)
    throw fault('a duration such as "PT24H"', duration, `${at}/duration`);
  if (randomizeStart != null && randomizeStart !== 'PT0S') {
    throw fault('no randomised start', randomizeStart, `${at}/randomizeStart`);
  }
  return { startMs, durationMs };
}

function checkDescriptors(value: unknown, currency: string, at: string): void {
  if (value === undefined || value === null) return;
  for (const [i, entry] of listOf(value, `${at}/payloadDescriptors`).entries()) {
    const place = `${at}/payloadDescriptors/${i}`;
    const descriptor = fieldsOf(entry, place);
    if (!Object.hasOwn(SIDES, String(descriptor['payloadType']))) continue;
    const { units } = descriptor;
    if (units != null && units !== 'KWH') throw fault('prices per "KWH"', units, `${place}/units`);
    if (descriptor['currency'] != null && descriptor['currency'] !== currency) {
      throw fault(`the site's currency "${currency}"`, descriptor['currency'], `${place}/currency`);
    }
  }
}

function payloadsOf(value: unknown, span: Span, at: string): DatedPrice[] {
  return listOf(value, at).flatMap((entry, i) => {
    const place = `${at}/${i}`;
    const payload = fieldsOf(entry, place);
    if (typeof payload['type'] !== 'string')
      throw fault('a payload type such as "PRICE"', payload['type'], `${place}/type`);
    if (!Object.hasOwn(SIDES, payload['type'])) return [];
    return valuesOf(payload['values'], SIDES[payload['type']], span, `${place}/values`);
  });
}

function valuesOf(value: unknown, side: 'buy' | 'sell', span: Span, at: string): DatedPrice[] {
  const values = listOf(value, at);
  const stepMs = span.durationMs / values.length;
  if (values.length > MOST_VALUES) throw fault(`at most ${MOST_VALUES} values`, values.length, at);
  if (values.length > 1 && !isCommonStep(stepMs)) {
    throw fault(
      `a count of values that divides ${span.durationMs / HOUR_MS} h into whole hours or parts of an hour (23 or 25 on change days)`,
      values.length,
      at,
    );
  }
  return values.map((price, i) => {
    if (typeof price !== 'number' || !(Math.abs(price) <= MOST_PRICE)) {
      throw fault(`a price per kWh between -${MOST_PRICE} and ${MOST_PRICE}`, price, `${at}/${i}`);
    }
    const startMs = span.startMs + i * stepMs;
    return { startMs, endMs: startMs + stepMs, buy: null, sell: null, [side]: price };
  });
}

/** Whole minutes that divide the hour, or whole hours. */
function isCommonStep(stepMs: number): boolean {
  return stepMs % MINUTE_MS === 0 && (HOUR_MS % stepMs === 0 || stepMs % HOUR_MS === 0);
}

/**
 * From messages to readings: which points a topic carries, what is new, late, twice, glitched or implausible, and what
 * is known of every point now. Pure: the time of arrival is an argument.
 *
 * Rules
 * - A reading with the same time and value as one heard before is a duplicate and is dropped.
 * - A reading older than the latest is delivered onward with its own time; the latest value is not moved back.
 * - A retained message that does not tell its own time has an unknown age: it is shown, but is no reading and is not
 *   fresh. One that does is placed at its time, so its age decides. A truth is a state, not a measurement: what the
 *   broker keeps of a contact that speaks only when it changes holds now.
 * - A reading more than a minute ahead of our clock counts as measured when it arrived, and raises doubt in the clock.
 */
import { RimeholdError } from '../errors.ts';
import type { PointConfig } from '../config.ts';
import { pointSpec, type LivePoint, type LivePoints, type PointId, type Reading } from '../points.ts';
import { MINUTE_MS } from '../time.ts';
import { unitNames } from '../units.ts';
import {
  decode,
  openPayload,
  type Decoded,
  type DecodedReading,
  type ForecastEntry,
  type KnownPoint,
} from './payload.ts';

export const DROP_REASONS = [
  'bad-payload',
  'duplicate',
  'retained-undated',
  'one-wire-power-on-85',
  'one-wire-cut',
  'implausible',
  'not-a-number',
] as const;
export type DropReason = (typeof DROP_REASONS)[number];

export interface Message {
  readonly topic: string;
  readonly payload: Uint8Array;
  /** Whether the broker had kept it: it may be of any age. */
  readonly retained: boolean;
}

/** What one message yielded: readings to use, in the order of the payload, and sentences for the log. */
export interface Heard {
  readonly readings: readonly Reading[];
  readonly says: readonly string[];
}

/** What the owner may see of a point: counts, and the values that are not used beside the reason. */
export interface PointStatus {
  readonly id: PointId;
  readonly topic: string;
  readonly heard: number;
  readonly late: number;
  readonly dropped: Readonly<Partial<Record<DropReason, number>>>;
  readonly last: Reading | null;
  readonly lastHeardMs: number | null;
  readonly maxAgeMs: number;
  /** The latest value that was set aside as implausible. */
  readonly quarantined: { readonly value: number; readonly atMs: number } | null;
  /** A retained value of unknown age. */
  readonly undated: { readonly value: number; readonly heardMs: number } | null;
  readonly lastFault: string | null;
}

export interface Series<T> {
  readonly heardMs: number;
  readonly value: T;
}

/** Own times further ahead of ours than this raise doubt: either clock is wrong. */
const FUTURE_MS = MINUTE_MS;
/** A bad topic is spoken of at once, and then at most this often. */
const SAY_EVERY_MS = 10 * MINUTE_MS;
/** Readings remembered for each point, to know a repeated batch again. */
const REMEMBERED = 256;

interface PointState {
  readonly point: KnownPoint;
  heard: number;
  late: number;
  readonly dropped: Map<DropReason, number>;
  last: Reading | null;
  lastHeardMs: number | null;
  updateMs: number | null;
  quarantined: PointStatus['quarantined'];
  undated: PointStatus['undated'];
  lastFault: string | null;
  saidMs: number | null;
  unsaid: number;
  /** How far its own clock was ahead of ours at the last reading; null when it tells no time. */
  aheadMs: number | null;
  readonly seen: Map<number, number>;
}

/** What is wrong with the points of a site file beyond what its schema can tell; one sentence each. */
export function pointFaults(points: Readonly<Record<string, PointConfig>>): string[] {
  return Object.entries(points).flatMap(([id, config]) => {
    const spec = pointSpec(id);
    if (!spec) return [`points.${id}: expected a known point.`];
    const dimension = spec.kind === 'series' && spec.unit === 'degC' ? 'temperature' : spec.kind;
    const unitsApply = dimension !== 'boolean' && dimension !== 'series';
    const units = unitsApply ? unitNames(dimension) : [];
    const faults: string[] = [];
    if (config.unit !== null && config.unit !== spec.unit && !units.includes(config.unit)) {
      const expected = units.length === 0 ? 'no unit' : `one of ${units.join(', ')}`;
      faults.push(`points.${id}.unit: expected ${expected}, found "${config.unit}".`);
    }
    if (config.timePointer !== null && !config.read.startsWith('/')) {
      faults.push(`points.${id}.time: expected \`read\` to be a JSON pointer too, found "${config.read}".`);
    }
    if (spec.kind === 'series' && config.read.startsWith('senml:')) {
      faults.push(`points.${id}.read: expected plain or a JSON pointer, found "${config.read}".`);
    }
    return faults;
  });
}

export class Intake {
  readonly #states = new Map<PointId, PointState>();
  readonly #byTopic = new Map<string, PointState[]>();
  #forecast: Series<readonly ForecastEntry[]> | null = null;
  #prices: Series<unknown> | null = null;

  /** Throws `config` when a point cannot be read as the site file says. */
  constructor(points: Readonly<Record<string, PointConfig>>) {
    const faults = pointFaults(points);
    if (faults.length > 0) throw new RimeholdError('config', faults.join(' '), { faults });
    for (const [id, config] of Object.entries(points)) {
      const spec = pointSpec(id);
      if (!spec) continue;
      const state = newState({ id: id as PointId, config, spec });
      this.#states.set(state.point.id, state);
      this.#byTopic.set(config.topic, [...(this.#byTopic.get(config.topic) ?? []), state]);
    }
  }

  topics(): string[] {
    return [...this.#byTopic.keys()];
  }

  /** Takes one message at its time of arrival. A topic that carries no point yields nothing. */
  hear(message: Message, arrivalMs: number): Heard {
    const states = this.#byTopic.get(message.topic);
    if (!states || (message.retained && message.payload.length === 0)) return { readings: [], says: [] };
    const payload = openPayload(message.payload);
    const readings: Reading[] = [];
    const says: string[] = [];
    for (const state of states) {
      state.lastHeardMs = arrivalMs;
      this.#take(state, decode(payload, state.point, arrivalMs), message.retained, arrivalMs, readings, says);
    }
    return { readings, says };
  }

  #take(
    state: PointState,
    decoded: Decoded,
    retained: boolean,
    arrivalMs: number,
    readings: Reading[],
    says: string[],
  ): void {
    switch (decoded.kind) {
      case 'fault':
        return complain(state, decoded.fault, arrivalMs, says);
      case 'forecast':
        this.#forecast = { heardMs: arrivalMs, value: decoded.entries };
        state.heard += 1;
        return;
      case 'prices':
        this.#prices = { heardMs: arrivalMs, value: decoded.document };
        state.heard += 1;
        return;
      case 'readings':
        state.updateMs = decoded.updateMs;
        for (const one of decoded.readings) accept(state, one, retained, arrivalMs, readings);
    }
  }

  /** Every configured point but the series, fresh or not. */
  live(nowMs: number): LivePoints {
    const live: Partial<Record<PointId, LivePoint>> = {};
    for (const [id, state] of this.#states) {
      if (state.point.spec.kind !== 'series') live[id] = livePoint(state, nowMs);
    }
    return live;
  }

  /** The latest forecast heard, as given; null when none was. */
  forecast(): Series<readonly ForecastEntry[]> | null {
    return this.#forecast;
  }

  /** The latest dated prices heard, parsed as JSON and no further; null when none were. */
  prices(): Series<unknown> | null {
    return this.#prices;
  }

  status(): PointStatus[] {
    return [...this.#states.values()].map(statusOf);
  }

  /**
   * How far the sensors that tell their own time are ahead of our clock, the median over those heard of late; null when
   * that is not more than a minute. One sensor with a wrong clock among several right ones raises no doubt in ours.
   */
  ahead(nowMs: number): { readonly medianMs: number; readonly points: readonly PointId[] } | null {
    const heard = [...this.#states.values()].flatMap((state) => {
      const late = state.lastHeardMs === null || Math.abs(nowMs - state.lastHeardMs) > maxAgeMs(state);
      return state.aheadMs === null || late ? [] : [{ id: state.point.id, aheadMs: state.aheadMs }];
    });
    if (heard.length === 0) return null;
    const sorted = heard.map(({ aheadMs }) => aheadMs).toSorted((a, b) => a - b);
    const medianMs = sorted[Math.floor((sorted.length - 1) / 2)];
    const points = heard.filter(({ aheadMs }) => aheadMs > FUTURE_MS).map(({ id }) => id);
    return medianMs > FUTURE_MS ? { medianMs, points } : null;
  }
}

function newState(point: KnownPoint): PointState {
  return {
    point,
    heard: 0,
    late: 0,
    dropped: new Map(),
    last: null,
    lastHeardMs: null,
    updateMs: null,
    quarantined: null,
    undated: null,
    lastFault: null,
    saidMs: null,
    unsaid: 0,
    aheadMs: null,
    seen: new Map(),
  };
}

function drop(state: PointState, reason: DropReason): void {
  state.dropped.set(reason, (state.dropped.get(reason) ?? 0) + 1);
}

/** Counts a bad payload; says so the first time and then at a limited rate, with how many were passed over. */
function complain(state: PointState, fault: string, nowMs: number, says: string[]): void {
  drop(state, 'bad-payload');
  state.lastFault = fault;
  // a clock that was set back must not silence the topic for years
  const quiet = state.saidMs !== null && Math.abs(nowMs - state.saidMs) < SAY_EVERY_MS;
  if (quiet) {
    state.unsaid += 1;
    return;
  }
  const more = state.unsaid > 0 ? ` (${state.unsaid} more since it was last said)` : '';
  says.push(`Topic ${state.point.config.topic}, point ${state.point.id}: ${fault}; dropped${more}.`);
  state.saidMs = nowMs;
  state.unsaid = 0;
}

function accept(
  state: PointState,
  decoded: DecodedReading,
  retained: boolean,
  arrivalMs: number,
  readings: Reading[],
): void {
  if (decoded.unusable !== null) {
    drop(state, decoded.unusable);
    if (decoded.unusable === 'implausible') {
      state.quarantined = { value: decoded.value, atMs: decoded.atMs };
    }
    return;
  }
  if (retained && !decoded.ownTime && state.point.spec.kind !== 'boolean') {
    drop(state, 'retained-undated');
    state.undated = { value: decoded.value, heardMs: arrivalMs };
    return;
  }
  if (decoded.ownTime) state.aheadMs = decoded.atMs - arrivalMs;
  const atMs = decoded.atMs > arrivalMs + FUTURE_MS ? arrivalMs : decoded.atMs;
  keep(state, { point: state.point.id, atMs, value: decoded.value }, arrivalMs, readings);
}

function keep(state: PointState, reading: Reading, arrivalMs: number, readings: Reading[]): void {
  if (state.seen.get(reading.atMs) === reading.value) return drop(state, 'duplicate');
  remember(state.seen, reading);
  state.heard += 1;
  readings.push(reading);
  // a latest value ahead of the clock was taken before the clock was set back: it must not block what comes now
  const blocked = state.last !== null && state.last.atMs > arrivalMs + FUTURE_MS;
  if (state.last === null || blocked || reading.atMs >= state.last.atMs) {
    state.last = reading;
    state.undated = null;
  } else {
    state.late += 1;
  }
}

function remember(seen: Map<number, number>, reading: Reading): void {
  if (seen.size >= REMEMBERED) {
    const oldest = seen.keys().next();
    if (!oldest.done) seen.delete(oldest.value);
  }
  seen.set(reading.atMs, reading.value);
}

/** The owner's limit, or the sender's own promise (SenML `ut`) where that is shorter. */
function maxAgeMs(state: PointState): number {
  return Math.min(state.point.config.maxAgeMs, state.updateMs ?? Number.POSITIVE_INFINITY);
}

function livePoint(state: PointState, nowMs: number): LivePoint {
  const { last } = state;
  if (last === null) {
    return { value: null, reason: state.undated === null ? 'never-heard' : 'stale', last: null };
  }
  const ageMs = nowMs - last.atMs;
  const fresh = ageMs <= maxAgeMs(state) && ageMs >= -FUTURE_MS;
  return fresh ? { value: last.value, atMs: last.atMs } : { value: null, reason: 'stale', last };
}

function statusOf(state: PointState): PointStatus {
  const { point, heard, late, last, lastHeardMs, quarantined, undated, lastFault } = state;
  return {
    id: point.id,
    topic: point.config.topic,
    heard,
    late,
    dropped: Object.fromEntries(state.dropped),
    last,
    lastHeardMs,
    maxAgeMs: maxAgeMs(state),
    quarantined,
    undated,
    lastFault,
  };
}

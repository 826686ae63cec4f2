/** Broken and empty states: what is wrong, and what to do about it. The gravest comes first. */
import type { NowAnswer, PointRow } from '../source.ts';
import { age, type Format } from './format.ts';
import type { Staleness } from './live.ts';
import { strings } from './strings.ts';

export interface Notice {
  /** Stays the same while only the times in the sentence move on. */
  readonly kind: string;
  readonly what: string;
  readonly todo: string;
}

/** More stale points than this are told together. */
const FEW = 2;
const FIRST_DAY_MS = 24 * 3_600_000;

const notice = (kind: string, [what, todo]: readonly string[]): Notice => ({ kind, what, todo });

export function notices(now: NowAnswer, stale: Staleness, nowMs: number, format: Format): Notice[] {
  const words = strings.notices;
  const list: Notice[] = [];
  if (stale) {
    const since = format.when(stale.sinceMs, nowMs);
    list.push(notice(stale.kind, stale.kind === 'lost' ? words.lost(since) : words.standstill(since)));
  }
  list.push(...healthNotices(now, nowMs, format), ...heldNotices(now));
  // a broker that is away explains every silence
  if (now.health.broker.state === 'connected') list.push(...pointNotices(now.points));
  const young = now.firstRecordMs === null || nowMs - now.firstRecordMs < FIRST_DAY_MS;
  if (young && now.nightsClosed === 0) list.push(notice('first-day', words.firstDay));
  return list;
}

function healthNotices({ health }: NowAnswer, nowMs: number, format: Format): Notice[] {
  const words = strings.notices;
  const { broker, clock, store } = health;
  const since = broker.sinceMs === null ? null : format.when(broker.sinceMs, nowMs);
  const list: Notice[] = [];
  if (store.state === 'broken') list.push(notice('store-broken', words.storeBroken));
  if (broker.state === 'away') list.push(notice('broker-away', words.broker(since)));
  if (clock.state === 'doubtful') list.push(notice('clock', words.clock));
  if (store.state === 'full') list.push(notice('store-full', words.storeFull));
  return list;
}

function heldNotices({ record, interlocks }: NowAnswer): Notice[] {
  if (!record?.heldBackBy) return [];
  const [what] = strings.notices.held(record.heldBackBy.split(', '));
  const held = new Set(record.heldBackBy.split(', '));
  // The compressor's own times have the record's reason for their sentence, which may be all of it.
  const sentences = interlocks
    .filter(({ name, speaks, sentence }) => speaks && held.has(name) && !record.reason.includes(sentence))
    .map(({ sentence }) => sentence);
  return [{ kind: `held ${record.heldBackBy}`, what, todo: sentences.join(' ') }];
}

const oneStale = ({ point, ageMs }: PointRow): Notice =>
  notice(`stale ${point}`, strings.notices.pointStale(point, age(ageMs)));

/** Several at once have one cause more often than several. */
function manyStale(stale: readonly PointRow[]): Notice {
  const names = stale.map(({ point }) => point).join(', ');
  const longestMs = Math.max(...stale.map(({ ageMs }) => ageMs ?? 0));
  return notice(`stale ${names}`, strings.notices.manyStale(stale.length, names, age(longestMs)));
}

/** Only points that have something to say: all of them silent is one notice, not ten. */
function pointNotices(points: readonly PointRow[]): Notice[] {
  const words = strings.notices;
  if (points.every(({ heard }) => !heard)) return [notice('no-sensor', words.noSensor)];
  const stale = points.filter(({ fresh, heard }) => heard && !fresh);
  const silent = points.filter(({ heard, required }) => required && !heard);
  return [
    ...(stale.length > FEW ? [manyStale(stale)] : stale.map(oneStale)),
    ...silent.map(({ point }) => notice(`silent ${point}`, words.pointSilent(point))),
  ];
}

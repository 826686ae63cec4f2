/** Closing nights: when a night is over its sheet is written once; a later change makes a revision, both are kept. */
import type { SiteConfig } from '../config.ts';
import { lastFired } from '../planning/timetable.ts';
import { simpleWays } from '../reports/compare.ts';
import type { ProbeState } from '../reports/coverage.ts';
import { readSheet, type NightSheet } from '../reports/night-schema.ts';
import { nextRevision, nightSheet } from '../reports/night.ts';
import type { CycleRecord } from '../record.ts';
import type { Store } from '../store/store.ts';
import { DAY_MS, nightAt, nightOf, type Night } from '../time.ts';
import { heardAgain } from './heard-again.ts';
import type { Late } from './late-nights.ts';
import { Tellings, type Telling } from './telling.ts';

/** What the estimator knows at the end of a night. */
export interface NightEnd {
  readonly probes: readonly ProbeState[];
  readonly learned: readonly {
    readonly name: string;
    readonly value: number;
    readonly sd: number;
    readonly unit: string;
  }[];
}

/** How many nights that ended while the daemon was away are still closed when it comes back. */
const MOST_BEHIND = 14;

/** Nights that are over at `nowMs` and have no sheet, oldest first. */
export function nightsToClose(store: Store, zone: string, nowMs: number): Night[] {
  const written = new Set(store.sheets().map((sheet) => sheet.date));
  const nights: Night[] = [];
  let night = nightAt(zone, nowMs);
  for (let back = 0; back < MOST_BEHIND; back += 1) {
    night = nightAt(zone, night.startMs - DAY_MS / 4);
    if (!written.has(night.date)) nights.unshift(night);
  }
  return nights.filter((candidate) => store.recordsBetween(candidate.startMs, candidate.endMs).length > 0);
}

/** The sheet of a night from what is stored; null when there is no record of it. */
export function sheetOf(
  config: SiteConfig,
  store: Store,
  night: Night,
  nowMs: number,
  end: NightEnd | null,
  told: readonly Telling[] = [],
  records: readonly CycleRecord[] = store.recordsBetween(night.startMs - DAY_MS, night.endMs),
): NightSheet | null {
  if (!records.some((record) => record.atMs > night.startMs)) return null;
  const { timetable } = config.planning;
  const timetableAt = (atMs: number) =>
    lastFired(timetable, config.site.zone, atMs)?.command ?? ('hold' as const);
  return nightSheet({
    site: config,
    night,
    records,
    plans: store.plansBetween(night.startMs - DAY_MS, night.endMs),
    ways: simpleWays({ site: config, night, records, timetableAt }),
    ...(end === null ? {} : { probes: end.probes, learned: end.learned }),
    told,
    revision: 1,
    issuedMs: nowMs,
  });
}

/** Writes the sheet of a night, or its next revision if it was written before and has changed; null when it stands. */
export function writeSheet(
  config: SiteConfig,
  store: Store,
  night: Night,
  nowMs: number,
  end: NightEnd | null,
  told: readonly Telling[],
  because = 'it was closed again',
): NightSheet | null {
  const fresh = sheetOf(config, store, night, nowMs, end, told);
  if (fresh === null) return null;
  const before = store.sheet(night.date);
  const written = before === null ? null : readSheet(before.body);
  const sheet = written === null ? fresh : nextRevision(written, fresh, because);
  if (sheet !== null) store.addSheet(night.date, JSON.stringify(sheet));
  return sheet;
}

/** Ice on hand that a replay may differ by without having learned anything new. */
const SAME_KWH = 0.02;

/**
 * The next revision of a closed night from its records with what came late in its place; null when the night has no
 * sheet yet, or the late readings change nothing. The records in the store stay: they say what was known when it was decided.
 */
export function reviseSheet(
  config: SiteConfig,
  store: Store,
  night: Night,
  nowMs: number,
  late: Late,
  told: readonly Telling[],
): NightSheet | null {
  const written = storedSheet(store, night.date);
  if (written === null) return null;
  const stored = store.recordsBetween(night.startMs - DAY_MS, night.endMs);
  const moved = stored.some(({ atMs, iceOnHandKwh }) => {
    const again = late.relived.get(atMs);
    return again !== undefined && Math.abs(again.iceOnHandKwh - iceOnHandKwh) > SAME_KWH;
  });
  const relived = moved ? stored.map((record) => late.relived.get(record.atMs) ?? record) : stored;
  const fromMs = Math.max(late.fromMs, night.startMs - DAY_MS);
  const readings = store.readingsBetween(fromMs - DAY_MS, night.endMs, late.points);
  const records = heardAgain(config, relived, readings);
  if (records.every((record, i) => record === stored[i])) return null;
  const fresh = sheetOf(config, store, night, nowMs, null, told, records);
  const sheet = fresh === null ? null : nextRevision(written, fresh, lateWords(late));
  if (sheet !== null) store.addSheet(night.date, JSON.stringify(sheet));
  return sheet;
}

/** Why a sheet was revised, in a few words. */
export function lateWords({ count, points }: Late): string {
  return `${count} late reading${count === 1 ? '' : 's'} of ${points.join(', ')}`;
}

/** A stored sheet, the newest revision unless one is named; null when the night has none. */
export function storedSheet(store: Store, date: string, revision?: number): NightSheet | null {
  const stored = store.sheet(date, revision);
  return stored === null ? null : readSheet(stored.body);
}

/** The sheet of a date: as written, else, for a night still going on or never closed, as it stands now. */
export function sheetFor(config: SiteConfig, store: Store, date: string, nowMs: number): NightSheet | null {
  const night = nightOf(config.site.zone, date);
  const told = new Tellings(store.loadMemory('told')).all(night.startMs, night.endMs);
  return storedSheet(store, date) ?? sheetOf(config, store, night, nowMs, null, told);
}

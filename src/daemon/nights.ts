/** Closing nights: when a night is over its sheet is written once; a later change makes a revision, both are kept. */
import type { SiteConfig } from '../config.ts';
import { lastFired } from '../planning/timetable.ts';
import { simpleWays } from '../reports/compare.ts';
import type { ProbeState } from '../reports/coverage.ts';
import { readSheet, type NightSheet } from '../reports/night-schema.ts';
import { nextRevision, nightSheet } from '../reports/night.ts';
import type { Store } from '../store/store.ts';
import { DAY_MS, nightAt, nightOf, type Night } from '../time.ts';
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
): NightSheet | null {
  const records = store.recordsBetween(night.startMs - DAY_MS, night.endMs);
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
): NightSheet | null {
  const fresh = sheetOf(config, store, night, nowMs, end, told);
  if (fresh === null) return null;
  const before = store.sheet(night.date);
  const written = before === null ? null : readSheet(before.body);
  const sheet = written === null ? fresh : nextRevision(written, fresh);
  if (sheet !== null) store.addSheet(night.date, JSON.stringify(sheet));
  return sheet;
}

/** A stored sheet, or null when the night has none. */
export function storedSheet(store: Store, date: string): NightSheet | null {
  const stored = store.sheet(date);
  return stored === null ? null : readSheet(stored.body);
}

/** The sheet of a date: as written, else, for a night still going on or never closed, as it stands now. */
export function sheetFor(config: SiteConfig, store: Store, date: string, nowMs: number): NightSheet | null {
  const night = nightOf(config.site.zone, date);
  const told = new Tellings(store.loadMemory('told')).all(night.startMs, night.endMs);
  return storedSheet(store, date) ?? sheetOf(config, store, night, nowMs, null, told);
}

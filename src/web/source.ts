/**
 * What the page is served from. The web room knows no other room: whoever builds the daemon hands in one of these.
 * Every figure here is the figure of the record, the plan or the sheet; nothing is worked out again on the way.
 */
import type { Strategy, Told, Wish, WishName } from '../commands.ts';
import type { PointId, PointName } from '../points.ts';
import type { ClockState, CycleRecord, PlanRecord } from '../record.ts';
import type { Night } from '../time.ts';
import type { DisplayUnits } from '../units.ts';

/** The title block: what stands on every page and print. */
export interface SiteBlock {
  readonly id: string;
  readonly name: string;
  readonly zone: string;
  /** ISO 4217. */
  readonly currency: string;
  readonly units: DisplayUnits;
  /** Ice on hand of a full bank; the strip's scale. Null when not known. */
  readonly capacityKwh: number | null;
  readonly reserveKwh: number;
  readonly island: boolean;
  /** Version of the program. */
  readonly revision: string;
}

/** A line of the commissioning sheet: one point as it is heard. */
export interface PointRow {
  readonly point: PointId;
  /** Unit of `last` and `plausible`, as `src/points.ts` has it. */
  readonly unit: string;
  readonly what: string;
  readonly required: boolean;
  readonly heard: boolean;
  readonly last: number | null;
  readonly atMs: number | null;
  readonly ageMs: number | null;
  readonly fresh: boolean;
  /** Why the point is not used, one sentence; empty when it is. */
  readonly why: string;
  readonly plausible: readonly [low: number, high: number];
  readonly errorAtIcePointK: number | null;
  readonly errorSdK: number | null;
  /** When the ice point was last seen at this probe. */
  readonly errorDateMs: number | null;
  /** Why the estimate sets the probe aside; null when it listens to it. */
  readonly setAside: string | null;
}

/** A figure that the tool learned of this plant, with its standard deviation in the same unit. */
export interface LearnedFigure {
  readonly name: string;
  readonly value: number;
  readonly sd: number;
  readonly unit: string;
}

export interface InterlockRow {
  readonly name: string;
  /** Whether it holds something back now. */
  readonly speaks: boolean;
  readonly sentence: string;
}

export type BrokerState = 'connected' | 'away';
export type StoreState = 'ok' | 'full' | 'broken';

/** State words choose what the page advises; `detail` is the part's own sentence, or empty. */
export interface Health {
  readonly broker: { readonly state: BrokerState; readonly sinceMs: number | null; readonly detail: string };
  readonly clock: { readonly state: ClockState; readonly detail: string };
  readonly store: { readonly state: StoreState; readonly detail: string };
}

/** What the owner told of the bank last, while it can still be taken back. */
export interface ToldView {
  readonly what: Told;
  /** The probe that was moved; null: any of them may have been. */
  readonly point: PointId | null;
  readonly atMs: number;
  /** Until when it can be taken back. */
  readonly untilMs: number;
  /** Ice on hand before and after it was told. */
  readonly beforeKwh: number;
  readonly afterKwh: number;
}

export interface NowView {
  /** The daemon's own clock; it may be a lapse clock. */
  readonly nowMs: number;
  /** Seconds of the daemon's time in a second: 1 unless on a lapse clock. */
  readonly clockRate: number;
  readonly site: SiteBlock;
  readonly night: Night;
  readonly record: CycleRecord | null;
  readonly plan: PlanRecord | null;
  /** Since when the record's mode has held without a break; null when it was not seen to begin. */
  readonly modeSinceMs: number | null;
  readonly wish: Wish;
  readonly strategy: Strategy;
  readonly limitC: number;
  /** Null when nothing was told within the hour. */
  readonly told: ToldView | null;
  /** First record in the store; null before the first one. */
  readonly firstRecordMs: number | null;
  readonly nightsClosed: number;
  /** The point that would narrow the interval most if it were added; null when none would. */
  readonly helpsMost: PointName | null;
  readonly points: readonly PointRow[];
  readonly learned: readonly LearnedFigure[];
  readonly interlocks: readonly InterlockRow[];
  readonly cautions: readonly string[];
  readonly health: Health;
}

/** A row of the ledger. Null where the night did not yield the figure. */
export interface NightRow {
  readonly date: string;
  readonly partial: boolean;
  readonly revision: number;
  readonly iceStartKwh: number | null;
  readonly iceEndKwh: number | null;
  readonly madeKwh: number | null;
  readonly meltedKwh: number | null;
  readonly leakedKwh: number | null;
  readonly electricityKwh: number | null;
  readonly costMoney: number | null;
  /** Against the same night without storage; negative when storage cost more. */
  readonly savedMoney: number | null;
  readonly cop: number | null;
  readonly warmKh: number | null;
  readonly residualPct: number | null;
  /** For the margin: one short sentence, or empty. */
  readonly note: string;
}

export interface DriftNote {
  readonly sinceDate: string;
  readonly sentence: string;
}

export interface NightsView {
  readonly rows: readonly NightRow[];
  readonly drifts: readonly DriftNote[];
}

export interface WishPreview {
  readonly sentence: string;
  /** Power and ice more than without the wish; negative when it saves. Null when it cannot be told. */
  readonly costMoney: number | null;
  /** Whether it drops cooling that the plan has: `sentence` says how much, `costMoney` leaves the warm rooms out. */
  readonly coolsLess: boolean;
}

export type WebEvent =
  | { readonly kind: 'record'; readonly record: CycleRecord }
  | { readonly kind: 'plan'; readonly plan: PlanRecord }
  | { readonly kind: 'night'; readonly date: string };

export interface WebSource {
  now(): NowView;
  /** Records with fromMs < atMs <= toMs, oldest first. */
  records(fromMs: number, toMs: number): readonly CycleRecord[];
  /** Plans made in [fromMs, toMs], oldest first. */
  plansBetween(fromMs: number, toMs: number): readonly PlanRecord[];
  /** Closed nights whose date lies in [from, to] (YYYY-MM-DD), oldest first. */
  nights(from: string, to: string): NightsView;
  /** The sheet of a closed night as its own JSON; null when there is none. */
  night(date: string): unknown;
  /** The printable sheet, a whole HTML document without scripts; null when there is none. */
  nightHtml(date: string): string | null;
  /** The ledger as CSV (RFC 4180). */
  nightsCsv(from: string, to: string): string;
  /** Throws `usage` when the wish cannot be taken. `none` gives back. Returns what holds now. */
  setWish(name: WishName, durationMs: number): Wish;
  setStrategy(strategy: Strategy): void;
  setLimit(limitC: number): void;
  wishPreview(name: WishName, durationMs: number): WishPreview;
  /** Throws `usage` for a point that is no probe. */
  tell(what: Told, point: PointId | null): void;
  /** Takes back what was told last. Throws `usage` when it is too late. */
  takeBack(): void;
  /** Calls back on each record, plan and closed night until the returned function is called. */
  subscribe(listener: (event: WebEvent) => void): () => void;
}

/** The site's offset from UTC from an instant on; zone rules are the daemon's, never the viewer's. */
export interface ZoneOffset {
  readonly fromMs: number;
  readonly offsetMs: number;
}

/** What a viewer may do here. */
export interface Access {
  /** Whether a passphrase is set up at all; without one the page only shows. */
  readonly changes: boolean;
  readonly signedIn: boolean;
}

/** Answer of `/api/now`. */
export interface NowAnswer extends NowView {
  readonly zoneOffsets: readonly ZoneOffset[];
  readonly access: Access;
}

export type RecordValue = string | number | boolean | null;

/** Answer of `/api/records` when fields are asked for: a row for each record, values in the order of `fields`. */
export interface RecordColumns {
  readonly fields: readonly string[];
  readonly rows: readonly (readonly RecordValue[])[];
}

/** A log as the daemon keeps one (the order of pino: context first). */
export interface WebLog {
  info(context: object, message: string): void;
  warn(context: object, message: string): void;
  error(context: object, message: string): void;
}

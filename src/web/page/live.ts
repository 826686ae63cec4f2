/**
 * What the page knows of the plant, kept fresh by server-sent events. The daemon's clock is followed, not the viewer's:
 * between messages it is carried on by the browser's monotonic time.
 */
import type { CycleRecord, PlanRecord } from '../../record.ts';
import type { NowAnswer } from '../source.ts';
import { read } from './api.ts';

/** Health, points and interlocks come with /api/now; they are asked for this often. */
const REFRESH_MS = 60_000;
/** A connection that returns within this time is not worth a word. */
const LOST_AFTER_MS = 8000;
/** Wait before asking again for a stream that was refused. */
const AGAIN_AFTER_MS = 5000;
/** A record is old when it is older than four of its spans, and never before two minutes. */
const OLD_SPANS = 4;
const OLD_LEAST_MS = 120_000;
/** On a lapse clock records come many times a second; the page is drawn this often at most. */
const DRAW_EVERY_MS = 400;

/** `lost`: the daemon is not reached. `standstill`: it is, but writes no records. */
export type Staleness = { readonly kind: 'lost' | 'standstill'; readonly sinceMs: number } | null;

type Listener<T> = (value: T) => void;

export class Live {
  /** The newest answer of /api/now with every record and plan since worked in. */
  now: NowAnswer | null = null;
  /** Why /api/now could not be read; empty when it could. */
  failure = '';
  /** The daemon's time at which the viewer holds the page still; null when it moves. */
  heldMs: number | null = null;
  #lostAt: number | null = null;
  #anchor = { siteMs: Date.now(), atMs: performance.now() };
  #drawing: number | null = null;
  readonly #changed: Listener<void>[] = [];
  readonly #recorded: Listener<CycleRecord>[] = [];
  readonly #closed: Listener<void>[] = [];

  onChange(listener: Listener<void>): void {
    this.#changed.push(listener);
  }

  onRecord(listener: Listener<CycleRecord>): void {
    this.#recorded.push(listener);
  }

  /** A night was closed. */
  onNight(listener: Listener<void>): void {
    this.#closed.push(listener);
  }

  start(): void {
    void this.refresh().then(() => this.#listen());
    const ask = (): void => {
      if (!document.hidden) void this.refresh();
    };
    window.setInterval(ask, REFRESH_MS);
    document.addEventListener('visibilitychange', ask);
  }

  /** The daemon's time. */
  nowMs(): number {
    return this.#anchor.siteMs + (performance.now() - this.#anchor.atMs) * (this.now?.clockRate ?? 1);
  }

  hold(held: boolean): void {
    this.heldMs = held ? this.nowMs() : null;
    this.#drawAtOnce();
  }

  stale(): Staleness {
    const { now } = this;
    const sinceMs = now?.record?.atMs ?? now?.nowMs ?? this.nowMs();
    if (this.#lostAt !== null && performance.now() - this.#lostAt > LOST_AFTER_MS)
      return { kind: 'lost', sinceMs };
    if (!now?.record) return null;
    const oldMs = Math.max(OLD_LEAST_MS, (OLD_SPANS * now.record.spanMs) / now.clockRate);
    return (this.nowMs() - now.record.atMs) / now.clockRate > oldMs ? { kind: 'standstill', sinceMs } : null;
  }

  async refresh(): Promise<void> {
    try {
      this.now = await read<NowAnswer>('/api/now');
      this.#setClock(this.now.nowMs);
      this.failure = '';
    } catch (error) {
      this.failure = error instanceof Error ? error.message : String(error);
    }
    if (this.heldMs === null) this.#drawAtOnce();
  }

  #setClock(siteMs: number): void {
    this.#anchor = { siteMs, atMs: performance.now() };
  }

  #drawAtOnce(): void {
    for (const listener of this.#changed) listener();
  }

  #draw(): void {
    if (this.heldMs !== null || this.#drawing !== null) return;
    this.#drawing = window.setTimeout(() => {
      this.#drawing = null;
      if (this.heldMs === null) this.#drawAtOnce();
    }, DRAW_EVERY_MS);
  }

  #listen(): void {
    const events = new EventSource('/events');
    const on = (name: string, take: (data: string) => void): void =>
      events.addEventListener(name, (event) => take(String(event.data)));
    on('record', (data) => this.#takeRecord(JSON.parse(data)));
    on('plan', (data) => this.#takePlan(JSON.parse(data)));
    on('night', () => {
      for (const listener of this.#closed) listener();
      void this.refresh();
    });
    events.addEventListener('open', () => this.#found());
    events.addEventListener('error', () => {
      this.#lostAt ??= performance.now();
      // The browser tries again by itself, except where the stream was refused.
      if (events.readyState === EventSource.CLOSED) window.setTimeout(() => this.#listen(), AGAIN_AFTER_MS);
    });
  }

  #found(): void {
    const back = this.#lostAt !== null;
    this.#lostAt = null;
    if (back) void this.refresh();
  }

  #takeRecord(record: CycleRecord): void {
    const { now } = this;
    if (!now) return;
    const wish = { name: record.wish, untilMs: record.wishUntilMs ?? now.wish.untilMs };
    const same = record.mode === now.record?.mode;
    this.now = { ...now, record, wish, modeSinceMs: same ? now.modeSinceMs : record.atMs - record.spanMs };
    if (record.atMs > this.nowMs()) this.#setClock(record.atMs);
    for (const listener of this.#recorded) listener(record);
    this.#draw();
  }

  #takePlan(plan: PlanRecord): void {
    if (this.now) this.now = { ...this.now, plan };
    this.#draw();
  }
}

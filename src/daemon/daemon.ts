/**
 * The loop: messages in, a tick each half minute, a plan each quarter hour, sheets at noon, memory kept. It owns no
 * logic of its own: what is decided stands in `cycle.ts`. A part that fails is named, logged and passed over; the
 * loop goes on.
 */
import type { Mode, Told } from '../commands.ts';
import type { SiteConfig } from '../config.ts';
import { planRecordOf } from '../cycle-plan.ts';
import type { CycleState, Moment, Stages } from '../cycle-values.ts';
import { forecastSite, replan, replanDue, stagesOf, startState, tick, type Ticked } from '../cycle.ts';
import { judgeClock, type ClockVerdict } from '../dispatch/clock.ts';
import { RimeholdError, sentenceOf } from '../errors.ts';
import { createEstimator } from '../estimation/estimator.ts';
import { createForecaster } from '../forecasting/forecaster.ts';
import type { Message } from '../mqtt/intake.ts';
import type { PointId, Reading } from '../points.ts';
import type { CycleRecord, PlanRecord } from '../record.ts';
import { HOUR_MS, MINUTE_MS } from '../time.ts';
import { AlertBoard } from './alert-board.ts';
import { latchesOf, Memory } from './memory.ts';
import { NightBook } from './night-book.ts';
import { OutlookSource } from './outlook.ts';
import { Owner, withLimit } from './owner.ts';
import type { DaemonEvents, DaemonParts } from './ports.ts';
import { flush } from './flush.ts';
import { HighWater } from './high-water.ts';
import { LATE_MS, Past, relivedRecord, replay, type Checkpoint } from './rewind.ts';
import { Tellings } from './telling.ts';
import { WarmTonight } from './warm-tonight.ts';

const MEMORY_EVERY_MS = HOUR_MS / 2;
const HOUSEKEEPING_MS = 5 * MINUTE_MS;
/** A first memory soon after the start, so that an early crash does not lose all of it. */
const FIRST_MEMORY_MS = 5 * MINUTE_MS;
/** Settings that come in a burst make one plan together. */
const SOON_REAL_MS = 300;
/** On a lapse clock a flush of each half minute would be one each few milliseconds. */
const LEAST_FLUSH_REAL_MS = 1000;
/** Points whose word stops a machine are acted upon at once, at most this often. */
const URGENT_EVERY_MS = 1000;
const URGENT_POINTS = new Set(['drip-tray-wet', 'high-pressure-trip', 'ice-at-electrode']);

/** What a setting asks for, from least to most: each does all that stands before it. */
const AFTER = ['cycle', 'plan', 'limit'] as const;
export type After = (typeof AFTER)[number];

export class Daemon {
  readonly owner: Owner;
  readonly tellings: Tellings;
  readonly #parts: DaemonParts;
  readonly #events = new Set<DaemonEvents>();
  readonly #stops: (() => void)[] = [];
  readonly #alerts = new AlertBoard();
  readonly #memory: Memory;
  readonly #outlook: OutlookSource;
  #config: SiteConfig;
  #stages: Stages;
  #state: CycleState;
  #heard = 0;
  #connected = false;
  #connectedSinceMs: number | null = null;
  #linkSentence = '';
  #mode: { mode: Mode; sinceMs: number } | null = null;
  #firstRecordMs: number | null = null;
  #clock: ClockVerdict = { state: 'set', why: '' };
  #pending: Reading[] = [];
  readonly #highWater = new HighWater();
  readonly #past = new Past();
  #startedMs = 0;
  #soon: After | null = null;
  #last: Ticked | null = null;
  #lastPlan: PlanRecord | null = null;
  #lastUrgentMs = 0;
  readonly #nights: NightBook;
  readonly #warm: WarmTonight;

  constructor(parts: DaemonParts) {
    const { config, store, clock, seed } = parts;
    const nowMs = clock.nowMs();
    this.#parts = parts;
    this.#memory = new Memory(store, parts.log);
    this.#outlook = new OutlookSource(parts);
    this.owner = new Owner(config, store.loadMemory('owner'));
    this.#warm = new WarmTonight(store, config.site.zone);
    this.tellings = new Tellings(store.loadMemory('told'));
    this.#nights = new NightBook(parts, (sheet) => this.#inform((events) => events.night?.(sheet)));
    this.#config = withLimit(config, this.owner.settings(nowMs).limitC);
    this.#stages = stagesOf(
      this.#config,
      createEstimator(this.#config, { seed, startMs: nowMs }),
      createForecaster(forecastSite(this.#config), { seed, memory: this.#memory.load('forecaster') }),
    );
    this.#state = startState(nowMs, this.#memory.dispatch(nowMs));
  }

  /** Takes up where the last life stood, then begins to look at the plant. */
  start(): void {
    const { clock, clockRate, config } = this.#parts;
    this.#guarded('taking up the estimate', () => this.#takeUp());
    this.#stops.push(
      clock.every(config.planning.cycleMs, () => this.cycle()),
      clock.every(Math.max(config.store.flushMs, LEAST_FLUSH_REAL_MS * clockRate), () => flush(this.#parts)),
      clock.every(MEMORY_EVERY_MS, () => this.#guarded('keeping what was learned', () => this.#saveMemory())),
      clock.every(Math.max(HOUSEKEEPING_MS, LEAST_FLUSH_REAL_MS * clockRate), () =>
        this.#guarded('thinning old records', () => this.#parts.store.compact(clock.nowMs())),
      ),
    );
    this.#stops.push(
      clock.after(FIRST_MEMORY_MS, () => this.#guarded('keeping what was learned', () => this.#saveMemory())),
    );
    this.cycle();
  }

  /** Ends the loop and keeps what was learned. The store is closed by whoever opened it. */
  stop(): void {
    for (const stop of this.#stops.splice(0)) stop();
    this.#guarded('keeping what was learned', () => this.#saveMemory());
  }

  observe(events: DaemonEvents): () => void {
    this.#events.add(events);
    return () => this.#events.delete(events);
  }

  /** The link to the broker came or went. */
  linked(connected: boolean, sentence: string): void {
    if (connected !== this.#connected || this.#connectedSinceMs === null)
      this.#connectedSinceMs = this.#parts.clock.nowMs();
    this.#connected = connected;
    this.#linkSentence = sentence;
  }

  /** A message from the broker. */
  hear(message: Message): void {
    this.#heard += 1;
    this.#guarded('a message', () => {
      if (this.#parts.device.hear(message)) return;
      this.#parts.actuators.hear(message);
      const nowMs = this.#parts.clock.nowMs();
      const { readings, says } = this.#parts.intake.hear(message, nowMs);
      for (const sentence of says) this.#parts.log.warn({ topic: message.topic }, sentence);
      this.#take(readings);
    });
  }

  #take(readings: readonly Reading[]): void {
    this.#parts.store.addReadings(readings);
    const horizonMs = (this.#state.lastMs ?? Number.NEGATIVE_INFINITY) - LATE_MS;
    for (const reading of readings) {
      if (reading.atMs > horizonMs) this.#pending.push(reading);
      else this.#late(reading);
    }
    if (readings.some(({ point, value }) => URGENT_POINTS.has(point) && value === 1)) this.#urgent();
  }

  #late(reading: Reading): void {
    this.#past.late(reading.atMs);
    this.#nights.late(reading, this.#parts.clock.nowMs());
  }

  #urgent(): void {
    const nowMs = this.#parts.clock.nowMs();
    if (Math.abs(nowMs - this.#lastUrgentMs) < URGENT_EVERY_MS) return;
    this.#lastUrgentMs = nowMs;
    this.cycle();
  }

  /** One look at the plant, and a new plan when one is due. Never throws. */
  cycle(): void {
    this.#guarded('a cycle', () => {
      const moment = this.#moment();
      this.#rewind(moment.nowMs);
      const readings = this.#takePending();
      if (this.#state.planned === null)
        this.#stages.estimator.advance(moment.nowMs, readings.splice(0), null);
      if (replanDue(this.#state, this.#config, moment.nowMs))
        this.#guarded('planning', () => this.#replan(moment));
      this.#tick(moment, readings);
    });
    this.closeNights();
  }

  #takePending(): Reading[] {
    return this.#pending.splice(0).toSorted((a, b) => a.atMs - b.atMs);
  }

  #moment(): Moment {
    const { clock, intake, notBeforeMs } = this.#parts;
    const nowMs = clock.nowMs();
    this.#clock = judgeClock({
      nowMs,
      notBeforeMs,
      lastRecordMs: this.#highWater.at(nowMs),
      sensorsAheadMs: intake.ahead(nowMs)?.medianMs ?? null,
    });
    const steadyMs = clock.steadyMs?.();
    const steady = steadyMs === undefined ? {} : { steadyMs };
    return {
      nowMs,
      ...steady,
      live: intake.live(nowMs),
      clock: this.#clock,
      brokerConnected: this.#connected,
    };
  }

  #replan(moment: Moment): void {
    const wanted = this.owner.wanted(moment.nowMs);
    const planned = replan(this.#stages, this.#state, moment, wanted, this.#outlook.at(moment.nowMs));
    this.#state = { ...this.#state, planned };
    if (planned.plan.note !== '') this.#parts.log.warn({ outcome: planned.plan.outcome }, planned.plan.note);
    this.#lastPlan = this.#parts.store.addPlan(planRecordOf(planned));
    this.#parts.device.publishPlan(this.#lastPlan);
    this.#inform((events) => events.plan?.());
  }

  #tick(moment: Moment, readings: readonly Reading[]): void {
    const { store, device, actuators, publisher } = this.#parts;
    const ticked = tick(this.#stages, this.#state, moment, this.owner.wanted(moment.nowMs), readings);
    const latched = latchesOf(this.#state.dispatch) !== latchesOf(ticked.state.dispatch);
    this.#state = ticked.state;
    if (latched) this.#memory.saveNow('dispatch', this.#state.dispatch);
    for (const publication of actuators.order(ticked.order, moment.nowMs))
      void publisher.publish(publication);
    device.publishOrder(ticked.order);
    const record = store.addRecord(ticked.record);
    this.#last = { ...ticked, record };
    this.#warm.count(record);
    this.#firstRecordMs ??= record.atMs;
    if (this.#mode?.mode !== record.mode) this.#mode = { mode: record.mode, sinceMs: record.atMs };
    const pointsHeard = Object.values(moment.live).filter((point) => point?.value != null).length;
    device.publishCycle(record, { pointsHeard, warmTonightKh: this.#warm.warmKh });
    device.publishSettings(this.#settings(moment.nowMs));
    this.#alerts.show(this.#parts, this.#config, moment, ticked, {
      expectedWarmKh: this.#state.planned?.plan.expectedWarmKh ?? null,
      listeningMs: moment.nowMs - this.#startedMs,
    });
    this.#past.keep(moment.nowMs, () => this.#stages.estimator.memory());
    this.#highWater.seen(moment.nowMs);
    this.#inform((events) => events.record?.(record));
  }

  #settings(nowMs: number) {
    const { wish, wishForMs, strategy, limitC } = this.owner.settings(nowMs);
    return { wish: wish.name, wishForMs, strategy, limitC, told: this.tellings.open(nowMs)?.what ?? null };
  }

  /** Writes the sheet of every night that is over; called by each cycle and, on real time, by the noon job. */
  closeNights(): void {
    this.#guarded('closing the night', () => {
      if (this.#clock.state === 'doubtful') return;
      const nowMs = this.#parts.clock.nowMs();
      this.#nights.close(this.#config, nowMs, this.#last?.estimate ?? null, this.tellings);
      if (!this.#past.waiting) this.#nights.revise(this.#config, nowMs, this.tellings);
    });
  }

  /** Takes over a changed comfort limit; the forecaster goes on with what it has learned. */
  limitChanged(): void {
    const { limitC } = this.owner.settings(this.#parts.clock.nowMs());
    const memory = this.#stages.forecaster.memory();
    this.#config = withLimit(this.#parts.config, limitC);
    const forecaster = createForecaster(forecastSite(this.#config), { seed: this.#parts.seed, memory });
    this.#stages = stagesOf(this.#config, this.#stages.estimator, forecaster);
    this.planAfresh();
  }

  /** The owner says what the bank is; the estimate takes it at once. Throws `usage`. */
  tell(what: Told, point: PointId | null): void {
    const nowMs = this.#parts.clock.nowMs();
    this.#rewind(nowMs);
    this.#stages.estimator.advance(nowMs, this.#takePending(), this.#state.order?.command ?? null);
    this.tellings.tell(this.#stages.estimator, what, point, nowMs);
    this.#told(`The owner told of the bank: ${what}${point === null ? '' : `, ${point}`}.`);
  }

  /** Takes back what was told last: estimate and records are as if it had never been told. Throws `usage` after an hour. */
  takeBack(): void {
    const nowMs = this.#parts.clock.nowMs();
    const before = this.tellings.takeBack(nowMs);
    for (const record of this.#liveAgain(before, nowMs)) this.#parts.store.addRecord(record);
    this.#pending = [];
    this.#told('The owner took back what was told of the bank.');
    this.#nights.takenBack(this.#config, before.atMs, nowMs, this.tellings);
  }

  #told(sentence: string): void {
    this.#parts.store.saveMemory('told', this.tellings.memory());
    flush(this.#parts);
    this.#parts.log.info({}, sentence);
    this.planAfresh();
  }

  /** Takes over a setting a moment later; those of a burst are taken over together. */
  soon(after: After): void {
    const { clock, clockRate } = this.#parts;
    if (this.#soon === null) this.#stops.push(clock.after(SOON_REAL_MS * clockRate, () => this.#doSoon()));
    if (this.#soon === null || AFTER.indexOf(after) > AFTER.indexOf(this.#soon)) this.#soon = after;
  }

  #doSoon(): void {
    const after = this.#soon;
    this.#soon = null;
    this.#guarded('taking over a setting', () => {
      if (after === 'limit') this.limitChanged();
      else if (after === 'plan') this.planAfresh();
      else this.cycle();
    });
  }

  /** Makes a new plan at once. */
  planAfresh(): void {
    this.#guarded('planning', () => this.#replan(this.#moment()));
    this.cycle();
  }

  #takeUp(): void {
    const { store, clock } = this.#parts;
    const nowMs = clock.nowMs();
    this.#startedMs = nowMs;
    this.#firstRecordMs = store.firstRecordMs();
    const last = store.latestRecord();
    if (last !== null) this.#highWater.seen(last.atMs);
    const from = this.#memory.checkpoint(nowMs);
    if (from === null) return;
    this.#liveAgain(from, nowMs);
    if (last !== null && last.atMs <= nowMs) this.#state = { ...this.#state, lastMs: last.atMs };
  }

  #liveAgain(from: Checkpoint, nowMs: number): readonly CycleRecord[] {
    const { config, store, seed } = this.#parts;
    const told = this.tellings.between(from.atMs, nowMs);
    const relived: CycleRecord[] = [];
    const { estimator, checkpoints } = replay(config, store, from, nowMs, seed, told, (record, at) => {
      relived.push(relivedRecord(record, at.estimate()));
    });
    this.#nights.relived(relived);
    this.#stages = { ...this.#stages, estimator };
    this.#past.relived(from, checkpoints);
    return relived;
  }

  #rewind(nowMs: number): void {
    const from = this.#past.due(nowMs);
    if (from === null) return;
    this.#liveAgain(from, nowMs);
    this.#pending = [];
    this.#parts.log.info(
      { fromMs: from.atMs },
      'Late readings came in; the estimate was worked out again from before them.',
    );
  }

  #saveMemory(): void {
    const { estimator, forecaster } = this.#stages;
    const atMs = this.#state.lastMs ?? this.#parts.clock.nowMs();
    this.#memory.save('estimator', { atMs, memory: estimator.memory() });
    this.#memory.save('forecaster', forecaster.memory());
    this.#memory.save('dispatch', this.#state.dispatch);
    this.saveOwner();
  }

  saveOwner(): void {
    this.#parts.store.saveMemory('owner', this.owner.memory());
  }

  #inform(call: (events: DaemonEvents) => void): void {
    for (const events of this.#events) this.#guarded('telling an observer', () => call(events));
  }

  #guarded(what: string, work: () => void): void {
    try {
      work();
    } catch (error) {
      const code = error instanceof RimeholdError ? error.code : 'internal';
      this.#parts.log.error(
        { code, err: error },
        `Something failed in ${what}: ${sentenceOf(error)} The loop goes on.`,
      );
      this.#parts.device.log('error', `Something failed in ${what}: ${sentenceOf(error)}`);
    }
  }

  /** For the page: what is known now. */
  view() {
    return {
      config: this.#config,
      state: this.#state,
      clock: this.#clock,
      heard: this.#heard,
      connected: this.#connected,
      connectedSinceMs: this.#connectedSinceMs,
      linkSentence: this.#linkSentence,
      modeSinceMs: this.#mode?.sinceMs ?? null,
      firstRecordMs: this.#firstRecordMs,
      last: this.#last,
      plan: this.#lastPlan,
    };
  }
}

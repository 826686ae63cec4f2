/** A stand-in for the daemon behind the page, with the made-up evening and a switch for each broken state. */
import type { Strategy, Wish } from '../../src/commands.ts';
import type { PointId } from '../../src/points.ts';
import { pointSpec } from '../../src/points.ts';
import { DAY_MS, HOUR_MS, MINUTE_MS, localDate, nightAt } from '../../src/time.ts';
import type {
  Health,
  InterlockRow,
  NightRow,
  NowView,
  PointRow,
  WebEvent,
  WebSource,
} from '../../src/web/source.ts';
import { CAPACITY_KWH, EVENING, NOW_MS, ZONE, planAt, recordAt, recordsBetween } from './juniper-evening.ts';

export type FakeState =
  | 'evening'
  | 'first-day'
  | 'no-sensor'
  | 'broker-away'
  | 'stale-probe'
  | 'clock-doubtful'
  | 'store-full'
  | 'held-back';

export interface FakeSource extends WebSource {
  emit(event: WebEvent): void;
  /** Moves the fake's clock and emits the record of that instant. */
  advance(ms: number): void;
  show(state: FakeState): void;
  readonly changes: string[];
  readonly listeners: () => number;
}

const SITE = {
  id: 'juniper',
  name: 'Juniper hut',
  zone: ZONE,
  currency: 'EUR',
  units: 'SI',
  capacityKwh: CAPACITY_KWH,
  reserveKwh: 0.5,
  island: false,
  revision: '0.1.0',
} as const;

export function createFakeSource(initial: FakeState = 'evening'): FakeSource {
  let state = initial;
  let nowMs = NOW_MS;
  let wish: Wish = { name: 'none', untilMs: 0 };
  let strategy: Strategy = 'planned';
  let limitC = 26;
  const listeners = new Set<(event: WebEvent) => void>();
  const changes: string[] = [];
  const blank = (): boolean => state === 'first-day' || state === 'no-sensor';
  const record = (): NowView['record'] =>
    blank()
      ? null
      : { ...recordAt(nowMs - (nowMs % MINUTE_MS)), ...recordOf(state), wish: wish.name, limitC };
  const emit = (event: WebEvent): void => {
    for (const listener of listeners) listener(event);
  };
  return {
    now: () => ({
      nowMs,
      clockRate: 1,
      site: SITE,
      night: nightAt(ZONE, nowMs),
      record: record(),
      plan: blank() ? null : planAt(nowMs),
      modeSinceMs: blank() ? null : EVENING.startMs + 7.5 * HOUR_MS,
      wish,
      strategy,
      limitC,
      told: null,
      firstRecordMs: blank() ? null : EVENING.startMs - 40 * DAY_MS,
      nightsClosed: blank() ? 0 : 40,
      helpsMost: blank() ? null : 'entering-water',
      points: pointRows(state, nowMs),
      learned: blank() ? [] : LEARNED,
      interlocks: interlockRows(state),
      cautions: CAUTIONS,
      health: healthOf(state),
    }),
    records: (fromMs, toMs) => (blank() ? [] : recordsBetween(fromMs, Math.min(toMs, nowMs))),
    plansBetween: (fromMs, toMs) =>
      blank() || fromMs > nowMs || toMs < EVENING.startMs ? [] : [planAt(fromMs, -1.6, -1.8)],
    nights: (from, to) => ({
      rows: blank() ? [] : nightRows(nowMs).filter((row) => row.date >= from && row.date <= to),
      drifts: blank()
        ? []
        : [
            {
              sinceDate: '2026-07-02',
              sentence: 'Heat leak up a third: look at the lid and the insulation for wet.',
            },
          ],
    }),
    night: (date) => {
      const row = blank() ? undefined : nightRows(nowMs).find((night) => night.date === date);
      return row ?? null;
    },
    nightHtml: (date) => (blank() || date > '2026-07-13' ? null : sheetHtml(date)),
    nightsCsv: () => 'night,made_kwh\r\n2026-07-13,4.3\r\n',
    setWish: (name, durationMs) => {
      wish = { name, untilMs: name === 'none' ? 0 : nowMs + durationMs };
      changes.push(`wish ${name} ${durationMs}`);
      return wish;
    },
    setStrategy: (next) => {
      strategy = next;
      changes.push(`strategy ${next}`);
    },
    setLimit: (next) => {
      limitC = next;
      changes.push(`limit ${next}`);
    },
    tell: (what, point) => {
      changes.push(`told ${what} ${point}`);
    },
    takeBack: () => {
      changes.push('told nothing');
    },
    wishPreview: (_name, durationMs) => ({
      sentence: `Ice on hand would end ${Math.round(durationMs / HOUR_MS) * 20} minutes earlier.`,
      costMoney: 0.12,
      coolsLess: false,
    }),
    subscribe: (listener) => {
      listeners.add(listener);
      return () => listeners.delete(listener);
    },
    emit,
    advance: (ms) => {
      nowMs += ms;
      emit({ kind: 'record', record: { ...recordAt(nowMs - (nowMs % MINUTE_MS)), wish: wish.name, limitC } });
    },
    show: (next) => {
      state = next;
    },
    changes,
    listeners: () => listeners.size,
  };
}

function recordOf(state: FakeState): Partial<NonNullable<NowView['record']>> {
  if (state === 'clock-doubtful') return { clock: 'doubtful' };
  if (state === 'stale-probe') return { roomC: null, pointsStale: 'room-temperature' };
  if (state === 'held-back') return { heldBackBy: 'high-pressure', command: 'hold', mode: 'idle' };
  return {};
}

function healthOf(state: FakeState): Health {
  const away = state === 'broker-away';
  return {
    broker: {
      state: away ? 'away' : 'connected',
      sinceMs: away ? NOW_MS - 7 * MINUTE_MS : EVENING.startMs,
      detail: away ? 'connect ECONNREFUSED 192.168.1.5:1883' : '',
    },
    clock: { state: state === 'clock-doubtful' ? 'doubtful' : 'set', detail: '' },
    store: { state: state === 'store-full' ? 'full' : 'ok', detail: '' },
  };
}

const HEARD: readonly (readonly [PointId, number, number, number | null])[] = [
  ['leaving-water', 3.9, 12_000, 0.21],
  ['bank-top', 4.7, 14_000, -0.13],
  ['bank-bottom', 4.3, 14_000, 0.06],
  ['bank-surround', 22.4, 40_000, null],
  ['chiller-power', 1, 3000, null],
  ['pump-power', 44, 3000, null],
  ['room-temperature', 25.4, 31_000, null],
  ['room-temperature/loft', 26.1, 35_000, null],
  ['room-humidity', 44, 31_000, null],
  ['outdoor-temperature', 28.2, 65_000, null],
];

function pointRows(state: FakeState, nowMs: number): PointRow[] {
  return HEARD.map(([point, last, ageMs, error], i) => {
    const spec = pointSpec(point);
    if (!spec) throw new TypeError(`no such point: ${point}`);
    const never = state === 'no-sensor' || (state === 'first-day' && i > 4);
    const stale = state === 'stale-probe' && point === 'room-temperature';
    const age = stale ? 42 * MINUTE_MS : ageMs;
    return {
      point,
      unit: spec.unit,
      what: spec.what,
      required: spec.required ?? false,
      heard: !never,
      last: never ? null : last,
      atMs: never ? null : nowMs - age,
      ageMs: never ? null : age,
      fresh: !never && !stale,
      why: never
        ? 'Nothing has been heard on its topic.'
        : stale
          ? 'Last heard 42 minutes ago; it may be 10.'
          : '',
      plausible: spec.plausible,
      errorAtIcePointK: never ? null : error,
      errorSdK: never || error === null ? null : 0.04,
      errorDateMs: never || error === null ? null : NOW_MS - 2 * DAY_MS,
      setAside: null,
    };
  });
}

const LEARNED = [
  { name: 'heat leak of the bank', value: 2.1, sd: 0.2, unit: 'W/K' },
  { name: 'ice making at 25 °C outdoors', value: 1032, sd: 24, unit: 'W' },
  { name: 'COP at 25 °C outdoors', value: 1.88, sd: 0.06, unit: '' },
  { name: 'melt conductance at half inventory', value: 438, sd: 31, unit: 'W/K' },
  { name: 'heat loss of the cabin', value: 118, sd: 9, unit: 'W/K' },
];

function interlockRows(state: FakeState): InterlockRow[] {
  const speaks = state === 'held-back';
  return [
    { name: 'short-cycling', speaks: false, sentence: 'The machine rests at least 10 minutes between runs.' },
    {
      name: 'high-pressure',
      speaks,
      sentence: speaks
        ? 'The high-pressure cut-out has tripped: clean the condenser, then reset it at the machine.'
        : 'The high-pressure cut-out has not tripped.',
    },
    { name: 'full-bank', speaks: false, sentence: 'Charging stops at 150 kg of ice.' },
    { name: 'frozen-coil', speaks: false, sentence: 'No water below −1 °C goes to the fan coil.' },
  ];
}

const CAUTIONS = [
  'Not for medical cooling or food. Heat can kill: an unmet forecast is a warning to leave, not a promise.',
  'Software interlocks never replace thermostats, high-pressure cut-outs, float switches and breakers.',
];

/** Forty nights before today's, two of them odd. */
function nightRows(nowMs: number): NightRow[] {
  return Array.from({ length: 40 }, (_, i): NightRow => {
    const date = localDate(ZONE, nowMs - (40 - i) * DAY_MS);
    const made = 4.1 + ((i * 7) % 11) * 0.31;
    const electricity = made / (1.95 - (i % 5) * 0.04);
    return {
      date,
      partial: i === 0,
      revision: i === 12 ? 2 : 1,
      iceStartKwh: Number((6.2 + (i % 4) * 0.6).toFixed(2)),
      iceEndKwh: Number((6 + ((i + 1) % 4) * 0.6).toFixed(2)),
      madeKwh: Number(made.toFixed(2)),
      meltedKwh: Number((made - 0.9).toFixed(2)),
      leakedKwh: i > 27 ? 1.46 : 1.1,
      electricityKwh: Number(electricity.toFixed(2)),
      costMoney: Number((electricity * 0.13).toFixed(2)),
      savedMoney: Number((0.21 + (i % 6) * 0.05).toFixed(2)),
      cop: Number((made / electricity).toFixed(2)),
      warmKh: i % 9 === 4 ? 1.8 : 0.1,
      residualPct: Number((((i * 5) % 7) - 3).toFixed(1)),
      note: i === 28 ? 'leak up a third since 2 July' : i === 0 ? 'starts at 18:10' : '',
    };
  });
}

function sheetHtml(date: string): string {
  return `<!doctype html><html lang="en"><head><meta charset="utf-8"><title>Night sheet ${date}</title></head>
<body><h1>Night sheet ${date}</h1><p>Made 4.3 kWh.</p></body></html>`;
}

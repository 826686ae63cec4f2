/** What the page shows, read from the daemon and its store. No figure is worked out a second time. */
import type { ActuatorFault } from '../mqtt/actuators.ts';
import type { PointStatus } from '../mqtt/intake.ts';
import { whyNotKnown } from '../reports/not-known.ts';
import { bankLimits } from '../plant/bank.ts';
import { pointSpec, valueOf, type LivePoints } from '../points.ts';
import { CAUTION } from '../reports/caution.ts';
import { driftOf } from '../reports/drift.ts';
import { readSheet, type NightSheet } from '../reports/night-schema.ts';
import { renderCsv } from '../reports/render-csv.ts';
import { renderHtml } from '../reports/render-html.ts';
import type { CycleRecord } from '../record.ts';
import { nightAt, type Clock } from '../time.ts';
import type { InterlockRow, NightRow, NowView, PointRow, WebSource } from '../web/source.ts';
import { INTERLOCKS } from '../dispatch/interlocks.ts';
import type { Daemon } from './daemon.ts';
import { storedSheet } from './nights.ts';
import type { DaemonParts } from './ports.ts';
import { TAKE_BACK_MS } from './telling.ts';
import { wishCost } from './wish-cost.ts';

export interface PageSourceOptions {
  readonly daemon: Daemon;
  readonly parts: DaemonParts;
  readonly version: string;
}

export function pageSource({ daemon, parts, version }: PageSourceOptions): WebSource {
  const { store, clock } = parts;
  const sheets = (from: string, to: string): NightSheet[] =>
    store.sheets(from, to).flatMap(({ body }) => readSheet(body) ?? []);
  return {
    now: () => nowView({ daemon, parts, version }, clock),
    records: (fromMs, toMs) => store.recordsBetween(fromMs, toMs),
    plansBetween: (fromMs, toMs) => store.plansBetween(fromMs - 1, toMs),
    nights: (from, to) => ({
      rows: sheets(from, to).map(nightRow),
      // what drifts shows only over weeks, so it is read from all nights, whichever are looked at
      drifts: driftOf(sheets('0000-00-00', to)).map(({ since, sentence, look }) => ({
        sinceDate: since,
        sentence: `${sentence} ${look}`,
      })),
    }),
    night: (date) => storedSheet(store, date),
    nightHtml: (date) => {
      const sheet = storedSheet(store, date);
      return sheet === null ? null : renderHtml(sheet);
    },
    nightsCsv: (from, to) => renderCsv(sheets(from, to)),
    setWish: (name, durationMs) => {
      const wish = daemon.owner.wish(name, durationMs, clock.nowMs());
      daemon.saveOwner();
      daemon.cycle();
      return wish;
    },
    setStrategy: (strategy) => {
      daemon.owner.strategy(strategy);
      daemon.saveOwner();
      daemon.planAfresh();
    },
    setLimit: (limitC) => {
      daemon.owner.limit(limitC);
      daemon.saveOwner();
      daemon.limitChanged();
    },
    tell: (what, point) => daemon.tell(what, point),
    takeBack: () => daemon.takeBack(),
    wishPreview: (name, durationMs) => wishCost(daemon.view(), name, durationMs),
    subscribe: (listener) =>
      daemon.observe({
        record: (record) => listener({ kind: 'record', record }),
        plan: () => {
          const { plan } = daemon.view();
          if (plan !== null) listener({ kind: 'plan', plan });
        },
        night: (sheet) => listener({ kind: 'night', date: sheet.night.date }),
      }),
  };
}

function nowView({ daemon, parts, version }: PageSourceOptions, clock: Clock): NowView {
  const { store, intake, config, clockRate } = parts;
  const { site, planning } = config;
  const nowMs = clock.nowMs();
  const view = daemon.view();
  const settings = daemon.owner.settings(nowMs);
  const estimate = view.last?.estimate ?? null;
  const live = intake.live(nowMs);
  return {
    nowMs,
    clockRate,
    site: {
      id: site.id,
      name: site.name,
      zone: site.zone,
      currency: site.currency,
      units: site.units,
      capacityKwh: bankLimits(config).capacityKwh,
      reserveKwh: planning.reserveKwh,
      island: config.power.island !== null,
      revision: version,
    },
    night: nightAt(site.zone, nowMs),
    record: view.last?.record ?? null,
    plan: view.plan,
    modeSinceMs: view.modeSinceMs,
    wish: settings.wish,
    strategy: settings.strategy,
    limitC: settings.limitC,
    told: toldView(daemon, nowMs),
    firstRecordMs: view.firstRecordMs,
    nightsClosed: store.sheets().length,
    helpsMost: estimate?.helpsMost ?? null,
    points: intake.status().map((status) => pointRow(status, live, nowMs, estimate?.probes ?? [])),
    learned: estimate?.learned ?? [],
    interlocks: interlockRows(
      view.last?.spoken ?? [],
      view.last?.record ?? null,
      parts.actuators.faults(live, nowMs),
    ),
    cautions: [CAUTION],
    health: health(daemon, parts),
  };
}

function toldView({ tellings }: Daemon, nowMs: number): NowView['told'] {
  const open = tellings.open(nowMs);
  if (open === null) return null;
  const { what, point, atMs, beforeKwh, afterKwh } = open;
  return { what, point, atMs, untilMs: atMs + TAKE_BACK_MS, beforeKwh, afterKwh };
}

function pointRow(
  status: PointStatus,
  live: LivePoints,
  nowMs: number,
  probes: readonly {
    point: string;
    errorAtIcePointK: number | null;
    sd: number | null;
    atMs: number | null;
    setAside: string | null;
  }[],
): PointRow {
  const spec = pointSpec(status.id);
  const probe = probes.find(({ point }) => point === status.id);
  const fresh = valueOf(live, status.id) !== null;
  return {
    point: status.id,
    unit: spec?.unit ?? '',
    what: spec?.what ?? '',
    required: spec?.required === true,
    heard: status.lastHeardMs !== null,
    last: status.last?.value ?? status.undated?.value ?? null,
    atMs: status.last?.atMs ?? null,
    ageMs: status.last === null ? null : Math.max(0, nowMs - status.last.atMs),
    fresh,
    why: fresh || spec?.kind === 'series' ? '' : whyUnused(status),
    plausible: spec?.plausible ?? [0, 0],
    errorAtIcePointK: probe?.errorAtIcePointK ?? null,
    errorSdK: probe?.sd ?? null,
    errorDateMs: probe?.atMs ?? null,
    setAside: probe?.setAside ?? null,
  };
}

function whyUnused(status: PointStatus): string {
  if (status.lastHeardMs === null) return `Nothing has come on ${status.topic} yet.`;
  if (status.lastFault !== null && status.last === null)
    return `The payload cannot be read: ${status.lastFault}.`;
  if (status.quarantined !== null && status.last === null)
    return `${status.quarantined.value} is not plausible and is not used.`;
  if (status.undated !== null)
    return 'The broker had kept this value; how old it is nobody knows, so it is not used.';
  return 'The last value is too old to be used.';
}

/** The compressor's own times are no rows of the table: they hold back what was asked, whatever speaks. */
const TIMES = ['minimum on time', 'minimum off time'];

function interlockRows(
  spoken: readonly { id: string; sentence: string }[],
  record: CycleRecord | null,
  faults: readonly ActuatorFault[],
): InterlockRow[] {
  const rows = [...INTERLOCKS.map(({ id }) => id), ...TIMES].map((id) => {
    const word = spoken.find((one) => one.id === id);
    const held = record !== null && record.heldBackBy.split(', ').includes(id);
    return {
      name: id,
      speaks: word !== undefined || held,
      sentence: word?.sentence ?? (held ? record.reason : ''),
    };
  });
  return [
    ...rows,
    ...faults.map(({ machine, sentence }) => ({ name: `switch of the ${machine}`, speaks: true, sentence })),
  ];
}

function health(daemon: Daemon, { store }: DaemonParts): NowView['health'] {
  const view = daemon.view();
  const { fault } = store.health();
  return {
    broker: {
      state: view.connected ? 'connected' : 'away',
      sinceMs: view.connectedSinceMs,
      detail: view.linkSentence,
    },
    clock: { state: view.clock.state, detail: view.clock.why },
    store: {
      state: fault === null ? 'ok' : fault.code === 'store-full' ? 'full' : 'broken',
      detail: fault?.message ?? '',
    },
  };
}

function nightRow(sheet: NightSheet): NightRow {
  const noStorage = sheet.comparisons.find((one) => one.strategy === 'no-storage');
  const notKnown = whyNotKnown(sheet);
  const notes = [sheet.partialBecause, notKnown === '' ? '' : `saved and residual not known: ${notKnown}`];
  return {
    date: sheet.night.date,
    partial: !sheet.whole,
    revision: sheet.revision,
    iceStartKwh: sheet.ice.startKwh,
    iceEndKwh: sheet.ice.endKwh,
    madeKwh: sheet.made.kwh,
    meltedKwh: sheet.melted.kwh,
    leakedKwh: sheet.leaked.kwh,
    electricityKwh: sheet.electricity.totalKwh,
    costMoney: sheet.electricity.money,
    savedMoney: notKnown === '' ? (noStorage?.savedMoney ?? null) : null,
    cop: sheet.cop.machine,
    warmKh: sheet.comfort.warmKh,
    residualPct: notKnown === '' ? sheet.balance.residualPct : null,
    note: notes.filter(Boolean).join('; '),
  };
}

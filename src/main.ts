/** The composition root: config → build → start → stop. The only file that constructs adapters. */
import { fileURLToPath } from 'node:url';
import cron from 'node-cron';
import pino from 'pino';
import pretty from 'pino-pretty';
import type { SiteConfig } from './config.ts';
import { Daemon } from './daemon/daemon.ts';
import { pageSource } from './daemon/page-source.ts';
import type { DaemonParts, Log } from './daemon/ports.ts';
import { setByOwner } from './daemon/set.ts';
import { NOT_BEFORE_MS } from './dispatch/clock.ts';
import { RimeholdError } from './errors.ts';
import { Actuators } from './mqtt/actuators.ts';
import { announcements } from './mqtt/announce.ts';
import { BrokerClient } from './mqtt/client.ts';
import type { EmbeddedBroker } from './mqtt/embedded-broker.ts';
import { HomieDevice } from './mqtt/homie-device.ts';
import { Intake } from './mqtt/intake.ts';
import type { LinkState } from './mqtt/link.ts';
import type { Store } from './store/store.ts';
import type { Clock } from './time.ts';
import { brokerOptions } from './verbs/broker.ts';
import { secret, siteStore } from './verbs/site.ts';
import { VERSION } from './verbs/version.ts';
import { createWebServer, hostInUrl, type WebServer } from './web/server.ts';

export interface BuildOptions {
  readonly clock: Clock;
  /** Seconds of the clock in a second of real time. */
  readonly clockRate?: number;
  readonly log?: Log;
  readonly seed?: number;
  /** Folder of the compiled page, where it is not that of the build. */
  readonly pageDir?: string;
}

export interface Running {
  readonly daemon: Daemon;
  readonly parts: DaemonParts;
  /** Address of the page; null when it is not served. */
  readonly pageUrl: string | null;
  readonly brokerUrl: string;
  /** Resolves when the site can only be ended: another client has taken over the name at the broker. */
  readonly givenUp: Promise<RimeholdError>;
  /** Stops everything, whatever fails in it; rejects when something was lost. */
  stop(): Promise<void>;
}

type Stops = (() => void | Promise<void>)[];

/** Builds and starts everything; what was started is stopped again when a later part cannot start. */
export async function startSite(config: SiteConfig, options: BuildOptions): Promise<Running> {
  const stops: Stops = [];
  try {
    return { ...(await start(config, options, stops)), stop: () => stopAll(stops) };
  } catch (error) {
    // The first fault is the one to tell; a second one from the clean-up would hide it.
    await stopAll(stops).catch(() => undefined);
    throw error;
  }
}

async function stopAll(stops: Stops): Promise<void> {
  const faults: unknown[] = [];
  for (const one of stops.splice(0).toReversed()) {
    try {
      await one();
    } catch (error) {
      faults.push(error);
    }
  }
  if (faults.length > 0) throw faults[0];
}

/**
 * What another program may have already (the store, the ports) is taken before the broker is spoken to: a second
 * rimehold of the same site must not throw the first one off the broker only to find that it cannot run.
 */
async function start(
  config: SiteConfig,
  options: BuildOptions,
  stops: Stops,
): Promise<Omit<Running, 'stop'>> {
  const { passphraseFile, passphraseEnv } = config.web;
  const passphrase = secret('the passphrase', 'web.passphrase', passphraseFile, passphraseEnv);
  const store = siteStore(config, false);
  stops.push(() => closeStore(store));
  const embedded = config.broker.embedded ? await startBroker(config) : null;
  if (embedded) stops.push(() => embedded.stop());
  const { client, daemon, parts, givenUp } = build(config, options, store, embedded);
  const web = await startPage(daemon, parts, passphrase, options.pageDir ?? BUILT_PAGE);
  if (web) stops.push(() => web.server.stop());
  await client.start();
  stops.push(() => client.stop());
  await listen(client, parts);
  daemon.start();
  stops.push(async () => {
    daemon.stop();
    await parts.device.stop();
  });
  stops.push(noonJob(daemon, parts.clockRate));
  return {
    daemon,
    parts,
    pageUrl: web?.url ?? null,
    brokerUrl: embedded?.url ?? config.broker.url,
    givenUp,
  };
}

/** Loaded only where a site asks for it, to spare a small machine the time and the memory. */
async function startBroker({ broker }: SiteConfig): Promise<EmbeddedBroker> {
  const { startEmbeddedBroker } = await import('./mqtt/embedded-broker.ts');
  return startEmbeddedBroker({ host: broker.listenHost, port: broker.listenPort });
}

/** Constructs what speaks through the broker, and the daemon; nothing is started. */
function build(
  config: SiteConfig,
  options: BuildOptions,
  store: Store,
  embedded: EmbeddedBroker | null,
): { client: BrokerClient; daemon: Daemon; parts: DaemonParts; givenUp: Promise<RimeholdError> } {
  const { clock, clockRate = 1, log = createLog(config), seed = 1 } = options;
  const templates = announcements(config);
  let giveUp: (fault: RimeholdError) => void = () => undefined;
  const givenUp = new Promise<RimeholdError>((resolve) => (giveUp = resolve));
  const client = new BrokerClient(brokerOptions(config, embedded), {
    message: (message) => daemon.hear(message),
    state: (state, sentence) => {
      linkChanged(state, sentence, log);
      daemon.linked(state === 'connected', sentence);
      if (state === 'connected') {
        void device.announce();
        for (const announcement of templates) void client.publish(announcement);
      } else device.away();
      if (state === 'taken-over') giveUp(new RimeholdError('broker-refused', sentence));
    },
    note: (sentence) => log.info({}, sentence),
  });
  const device = new HomieDevice({
    config,
    publisher: client,
    settings: {
      strategy: config.planning.strategy,
      wish: 'none' as const,
      wishForMs: 7_200_000,
      limitC: config.comfort.limitC,
      told: null,
    },
    nowMs: () => clock.nowMs(),
    onSet: (path, value) => setByOwner(daemon, clock, path, value),
    onRefused: (sentence) => log.warn({}, sentence),
  });
  const parts: DaemonParts = {
    config,
    clock,
    clockRate,
    seed,
    store,
    intake: new Intake(config.points),
    actuators: new Actuators(config),
    publisher: client,
    device,
    log,
    notBeforeMs: clockRate === 1 ? NOT_BEFORE_MS : 0,
    stopwatch: () => performance.now(),
  };
  const daemon = new Daemon(parts);
  return { client, daemon, parts, givenUp };
}

/** Asks for every topic of the plant, and waits for what the broker has kept of them. */
async function listen(client: BrokerClient, { intake, actuators, log }: DaemonParts): Promise<void> {
  const topics = new Set([...intake.topics(), ...actuators.topics()]);
  const refused = await client.subscribe([...topics].map((filter) => ({ filter, qos: 1, retained: true })));
  for (const filter of refused)
    log.error({ filter }, `The broker refuses to let rimehold read ${filter}; mend its access list.`);
  await settle();
}

/** Time for what the broker has kept to arrive before the first look. */
const settle = (): Promise<void> => new Promise((done) => setTimeout(done, 250));

/**
 * Asks each quarter hour whether a night is over. Not "at noon": the job library asks the system's zone data, which
 * may be years old; the daemon decides by its own rules, in 23- and 25-hour nights too.
 */
function noonJob(daemon: Daemon, clockRate: number): () => void {
  if (clockRate !== 1) return () => undefined;
  const task = cron.schedule('*/15 * * * *', () => daemon.closeNights(), { timezone: 'Etc/UTC' });
  return () => void task.stop();
}

const BUILT_PAGE = fileURLToPath(new URL('../dist/web/page', import.meta.url));

async function startPage(
  daemon: Daemon,
  parts: DaemonParts,
  passphrase: string | null,
  pageDir: string,
): Promise<{ server: WebServer; url: string } | null> {
  const { web } = parts.config;
  if (!web.enabled) return null;
  const server = createWebServer({
    host: web.host,
    port: web.port,
    pageDir,
    passphrase,
    source: pageSource({ daemon, parts, version: VERSION }),
    log: parts.log,
  });
  const { port } = await server.start();
  return { server, url: `http://${hostInUrl(web.host)}:${port}/` };
}

export function createLog(config: SiteConfig): Log {
  const { level, form } = config.log;
  const stream =
    form === 'people'
      ? pretty({ destination: 2, sync: true, ignore: 'pid,hostname', translateTime: 'SYS:HH:MM:ss' })
      : pino.destination(2);
  return pino({ level, base: null }, stream);
}

function linkChanged(state: LinkState, sentence: string, log: Log): void {
  if (state === 'connected' || state === 'stopped') log.info({ link: state }, sentence);
  else log.warn({ link: state }, sentence);
}

/** Writes what still waits; throws what was lost when that is refused. */
function closeStore(store: Store): void {
  const { waitingReadings, waitingRecords } = store.health();
  const { fault } = store.close();
  if (fault === null) return;
  const why =
    fault.code === 'store-full'
      ? `the disk of ${store.file} is full or refuses writes; free some space before the next start`
      : fault.message;
  throw new RimeholdError(
    fault.code,
    `${waitingReadings} readings and ${waitingRecords} records that waited in memory are lost with this stop: ${why}.`,
    fault.context,
    { cause: fault },
  );
}

/** The composition root: config → build → start → stop. The only file that constructs adapters. */
import { readFileSync } from 'node:fs';
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
import { Actuators } from './mqtt/actuators.ts';
import { announcements } from './mqtt/announce.ts';
import { BrokerClient } from './mqtt/client.ts';
import { startEmbeddedBroker, type EmbeddedBroker } from './mqtt/embedded-broker.ts';
import { HomieDevice } from './mqtt/homie-device.ts';
import { deviceTopic } from './mqtt/homie.ts';
import { Intake } from './mqtt/intake.ts';
import type { BrokerOptions, LinkState } from './mqtt/link.ts';
import type { Store } from './store/store.ts';
import type { Clock } from './time.ts';
import { secret, siteStore } from './verbs/site.ts';
import { createWebServer, type WebServer } from './web/server.ts';

export const VERSION: string = (
  JSON.parse(readFileSync(new URL('../package.json', import.meta.url), 'utf8')) as { version: string }
).version;

export interface BuildOptions {
  readonly clock: Clock;
  /** Seconds of the clock in a second of real time. */
  readonly clockRate?: number;
  readonly log?: Log;
  readonly seed?: number;
}

export interface Running {
  readonly daemon: Daemon;
  readonly parts: DaemonParts;
  /** Address of the page; null when it is not served. */
  readonly pageUrl: string | null;
  readonly brokerUrl: string;
  stop(): Promise<void>;
}

/** Builds and starts everything; what was started is stopped again when a later part cannot start. */
export async function startSite(config: SiteConfig, options: BuildOptions): Promise<Running> {
  const stops: (() => void | Promise<void>)[] = [];
  const stop = async (): Promise<void> => {
    for (const one of stops.splice(0).toReversed()) await one();
  };
  try {
    return await start(config, options, stops, stop);
  } catch (error) {
    await stop();
    throw error;
  }
}

async function start(
  config: SiteConfig,
  options: BuildOptions,
  stops: (() => void | Promise<void>)[],
  stop: () => Promise<void>,
): Promise<Running> {
  const { clock, clockRate = 1, log = createLog(config), seed = 1 } = options;
  const templates = announcements(config);
  const passphrase = secret('the passphrase', config.web.passphraseFile, config.web.passphraseEnv);
  const store = siteStore(config, false);
  stops.push(() => closeStore(store, log));
  const embedded = config.broker.embedded
    ? await startEmbeddedBroker({ host: config.broker.listenHost, port: config.broker.listenPort })
    : null;
  if (embedded) stops.push(() => embedded.stop());
  const intake = new Intake(config.points);
  const actuators = new Actuators(config);
  let daemon: Daemon | null = null;
  let device: HomieDevice | null = null;
  const client = new BrokerClient(brokerOptions(config, embedded), {
    message: (message) => daemon?.hear(message),
    state: (state, sentence) => {
      linkChanged(state, sentence, log);
      daemon?.linked(state === 'connected', sentence);
      if (state === 'connected') {
        void device?.announce();
        for (const announcement of templates) void client.publish(announcement);
      } else device?.away();
    },
    note: (sentence) => log.info({}, sentence),
  });
  await client.start();
  stops.push(() => client.stop());
  const settings = {
    strategy: config.planning.strategy,
    wish: 'none' as const,
    wishForMs: 7_200_000,
    limitC: config.comfort.limitC,
  };
  device = new HomieDevice({
    config,
    publisher: client,
    settings,
    nowMs: () => clock.nowMs(),
    onSet: (path, value) =>
      daemon === null ? 'it has only just started' : setByOwner(daemon, clock, path, value),
  });
  const parts: DaemonParts = {
    config,
    clock,
    clockRate,
    seed,
    store,
    intake,
    actuators,
    publisher: client,
    device,
    log,
    notBeforeMs: clockRate === 1 ? NOT_BEFORE_MS : 0,
    stopwatch: () => performance.now(),
  };
  daemon = new Daemon(parts);
  daemon.linked(client.connected, 'Connected.');
  const refused = await client.subscribe(
    [...new Set([...intake.topics(), ...actuators.topics()])].map((filter) => ({
      filter,
      qos: 1,
      retained: true,
    })),
  );
  for (const filter of refused)
    log.error({ filter }, `The broker refuses to let rimehold read ${filter}; mend its access list.`);
  void device.announce();
  for (const announcement of templates) void client.publish(announcement);
  await settle();
  daemon.start();
  const running = daemon;
  const spoken = device;
  stops.push(async () => {
    running.stop();
    await spoken.stop();
  });
  stops.push(noonJob(running, clockRate));
  const web = await startPage(running, parts, passphrase);
  if (web) stops.push(() => web.server.stop());
  return { daemon, parts, pageUrl: web?.url ?? null, brokerUrl: embedded?.url ?? config.broker.url, stop };
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

async function startPage(
  daemon: Daemon,
  parts: DaemonParts,
  passphrase: string | null,
): Promise<{ server: WebServer; url: string } | null> {
  const { web } = parts.config;
  if (!web.enabled) return null;
  const server = createWebServer({
    host: web.host,
    port: web.port,
    pageDir: fileURLToPath(new URL('../dist/web/page', import.meta.url)),
    passphrase,
    source: pageSource({ daemon, parts, version: VERSION }),
    log: parts.log,
  });
  const { port } = await server.start();
  return { server, url: `http://${web.host}:${port}/` };
}

export function brokerOptions(config: SiteConfig, embedded: EmbeddedBroker | null): BrokerOptions {
  const { broker, site } = config;
  const will = { topic: `${deviceTopic(config)}/$state`, payload: 'lost' };
  const clientId = broker.clientId ?? `rimehold-${site.id}`;
  if (embedded)
    return { url: embedded.url, clientId, protocol: '3.1.1', user: null, password: null, tls: null, will };
  const file = (path: string | null): Uint8Array | null => (path === null ? null : readFileSync(path));
  return {
    url: broker.url,
    clientId,
    protocol: broker.protocol,
    user: broker.user,
    password: secret('the password of the broker', broker.passwordFile, broker.passwordEnv),
    tls:
      broker.tls === null
        ? null
        : { ca: file(broker.tls.caFile), cert: file(broker.tls.certFile), key: file(broker.tls.keyFile) },
    will,
  };
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

function closeStore(store: Store, log: Log): void {
  const { fault } = store.close();
  if (fault !== null)
    log.error({ code: fault.code }, `${fault.message} What still waited in memory is lost with this stop.`);
}

/** What a test against brokers needs, ended with the test in reverse order; every test has its own, so they may run side by side. */
import { connect as connectSocket, createServer, type Server, type Socket } from 'node:net';
import { test as plain } from 'vitest';
import { BrokerClient } from '../../src/mqtt/client.ts';
import { willOf, type SettablePath } from '../../src/mqtt/homie.ts';
import { HomieDevice } from '../../src/mqtt/homie-device.ts';
import type { Settings } from '../../src/mqtt/homie-values.ts';
import type { Message } from '../../src/mqtt/intake.ts';
import type { BrokerOptions, LinkState } from '../../src/mqtt/link.ts';
import { freePort, startMosquitto, type Mosquitto, type MosquittoOptions } from './mosquitto.ts';
import { observe, until, type Observer } from './observer.ts';
import { cycleRecord, NOW_MS, planRecord, pretendCleared, siteConfig } from './site.ts';

export const ROOT = 'homie/5/juniper';
export const SETTINGS: Settings = {
  strategy: 'planned',
  wish: 'none',
  wishForMs: 7_200_000,
  limitC: 26,
  told: null,
};
export const FAST = { firstPauseMs: 50, mostPauseMs: 200, willDelayS: 1 };

/** A client and everything that it was told. */
export interface Told {
  readonly client: BrokerClient;
  readonly messages: Message[];
  readonly states: LinkState[];
  readonly sentences: string[];
  readonly texts: () => string[];
}

/** The device of the site, wired as the daemon wires it. */
export interface Rig {
  readonly device: HomieDevice;
  readonly client: BrokerClient;
  readonly sets: [SettablePath, number | string][];
  /** What the owner's settings answer; null accepts. */
  refuse: string | null;
  /** What the log was told of settings that were not taken. */
  readonly refused: string[];
}

export class Stage {
  readonly #ends: (() => Promise<unknown> | void)[] = [];

  onEnd(end: () => Promise<unknown> | void): void {
    this.#ends.push(end);
  }

  async end(): Promise<void> {
    for (const end of this.#ends.splice(0).toReversed()) await end();
  }

  async broker(options: MosquittoOptions = {}): Promise<Mosquitto> {
    const started = await startMosquitto(options);
    this.onEnd(() => started.stop());
    return started;
  }

  async observer(url: string, filter = `${ROOT}/#`): Promise<Observer> {
    const made = await observe(url, filter);
    this.onEnd(() => made.stop());
    return made;
  }

  /** Listens on a loopback port of its own. */
  async listen(server: Server): Promise<number> {
    const port = await freePort();
    await new Promise<void>((done) => server.listen(port, '127.0.0.1', done));
    this.onEnd(() => void server.close());
    return port;
  }

  client(url: string, changes: Partial<BrokerOptions> = {}): Told {
    const messages: Message[] = [];
    const states: LinkState[] = [];
    const sentences: string[] = [];
    const client = new BrokerClient(
      { ...brokerOptions(url), ...changes },
      {
        message: (message) => messages.push(message),
        state: (state, sentence) => {
          states.push(state);
          sentences.push(sentence);
        },
        note: (sentence) => sentences.push(sentence),
      },
    );
    this.onEnd(() => client.stop());
    const texts = (): string[] => messages.map((message) => Buffer.from(message.payload).toString());
    return { client, messages, states, sentences, texts };
  }

  /** A socket between client and broker that can be cut without a word, as a power cut does. */
  async cuttable(port: number): Promise<{ url: string; cut: () => void }> {
    const sockets = new Set<Socket>();
    const server = createServer((inner) => {
      const outer = connectSocket(port, '127.0.0.1');
      sockets.add(inner).add(outer);
      for (const socket of [inner, outer]) socket.on('error', () => undefined);
      inner.pipe(outer).pipe(inner);
    });
    const own = await this.listen(server);
    const cut = (): void => {
      for (const socket of sockets) socket.resetAndDestroy();
      sockets.clear();
    };
    this.onEnd(cut);
    return { url: `mqtt://127.0.0.1:${own}`, cut };
  }

  async rig(url: string, how: { protocol?: BrokerOptions['protocol']; cycle?: boolean } = {}): Promise<Rig> {
    const config = siteConfig();
    const sets: Rig['sets'] = [];
    const made: { device?: HomieDevice } = {};
    const client = new BrokerClient(
      { ...brokerOptions(url), protocol: how.protocol ?? 'auto', will: willOf(config) },
      {
        message: (message) => void made.device?.hear(message),
        state: (state) => (state === 'connected' ? void made.device?.announce() : made.device?.away()),
        note: () => undefined,
      },
    );
    const rig: Rig = {
      client,
      sets,
      refuse: null,
      refused: [],
      device: (made.device = new HomieDevice({
        config,
        publisher: client,
        settings: SETTINGS,
        nowMs: () => NOW_MS,
        onSet: (path, value) => {
          sets.push([path, value]);
          return rig.refuse;
        },
        onRefused: (sentence) => rig.refused.push(sentence),
      })),
    };
    this.onEnd(() => client.stop());
    await client.start();
    if (how.cycle ?? true) oneCycle(rig.device);
    return rig;
  }
}

export function brokerOptions(url: string): BrokerOptions {
  return {
    url,
    clientId: 'juniper',
    protocol: 'auto',
    user: null,
    password: null,
    tls: null,
    will: null,
    timing: FAST,
  };
}

export function oneCycle(device: HomieDevice): void {
  device.publishPlan(planRecord());
  device.publishOrder(pretendCleared());
  device.publishCycle(cycleRecord(), { pointsHeard: 4, warmTonightKh: 0 });
}

export const stateOf = (seen: Observer): string | undefined => seen.latest(`${ROOT}/$state`)?.text;
export const untilReady = (seen: Observer): Promise<void> => until('ready', () => stateOf(seen) === 'ready');

/** A test with a stage of its own. */
export const test = plain.extend<{ stage: Stage }>({
  // oxlint-disable-next-line no-empty-pattern -- the fixture needs no other fixture
  stage: async ({}, use) => {
    const stage = new Stage();
    await use(stage);
    await stage.end();
  },
});

/**
 * The connection to the broker. MQTT 5 with a fall back to 3.1.1; a will; subscriptions that survive a reconnect;
 * the broker's limits obeyed. The first connection succeeds or `start` rejects with one sentence; after that the
 * client comes back for ever, with growing pauses. The constructor does nothing.
 *
 * What is published while the broker is away is dropped: whoever publishes does so again on `connected`, so that no
 * stale command ever waits in a queue. A command (QoS 1) that was in flight when the connection broke is given up;
 * values (QoS 2) are completed when the session is taken up again, as MQTT 5 section 4.4 asks.
 */
import { Socket } from 'node:net';
import { connect, type IConnackPacket, type MqttClient } from 'mqtt';
import { failureOf, type Failure } from './connect-failure.ts';
import {
  connectOptions,
  limitsOf,
  MOST_PACKET_BYTES,
  NO_LIMITS,
  TIMING,
  type BrokerEvents,
  type BrokerOptions,
  type Limits,
  type Publication,
  type Publisher,
  type Qos,
  type Subscription,
  type Timing,
  type WillTerms,
} from './link.ts';
import { isQosRefusal, isRetainRefusal, reasonWords, SESSION_TAKEN_OVER } from './reasons.ts';

/** Messages that wait for their turn; more than any announcement has. */
const MOST_WAITING = 2000;
/** A connection that held this long was a good one: the next pause is a short one again. */
const GOOD_CONNECTION_MS = 30_000;
/** Not every broker says that a session was taken over (mosquitto 2.0.11 does not); this many short ones hint at it. */
const SUSPICIOUS = 3;

interface Waiting {
  readonly publication: Publication;
  readonly settle: (taken: boolean) => void;
}

export class BrokerClient implements Publisher {
  readonly #options: BrokerOptions;
  readonly #events: BrokerEvents;
  readonly #timing: Timing;
  readonly #subscriptions = new Map<string, Subscription>();
  readonly #waiting: Waiting[] = [];
  /** Settlers of what is under way, with the packet identifier of QoS 1. */
  readonly #inFlight = new Map<Waiting, number | null>();
  readonly #notes = new Set<string>();
  #client: MqttClient | null = null;
  #version: 4 | 5;
  #limits: Limits = NO_LIMITS;
  #will: WillTerms = { qos: 2, retain: true };
  #lastError: unknown = null;
  #takenOver = false;
  #everConnected = false;
  #stopping = false;
  #failures = 0;
  #shortConnections = 0;
  #connectedMs = 0;
  #awaySaid = '';
  #retry: NodeJS.Timeout | null = null;
  #first: { resolve: () => void; reject: (error: Error) => void } | null = null;

  constructor(options: BrokerOptions, events: BrokerEvents) {
    this.#options = options;
    this.#events = events;
    this.#timing = { ...TIMING, ...options.timing };
    this.#version = options.protocol === '3.1.1' ? 4 : 5;
  }

  get connected(): boolean {
    return this.#client?.connected === true && !this.#stopping;
  }

  /** MQTT version of the connection. */
  get version(): '5' | '3.1.1' {
    return this.#version === 5 ? '5' : '3.1.1';
  }

  /** Rejects with `broker-unreachable` or `broker-refused` when the first connection fails. */
  start(): Promise<void> {
    return new Promise((resolve, reject) => {
      this.#first = { resolve, reject };
      this.#open();
    });
  }

  /** Says goodbye to the broker, which then drops the will and the session; gives up waiting after two seconds. */
  async stop(): Promise<void> {
    if (this.#stopping) return;
    const client = this.#client;
    const wasConnected = this.connected;
    this.#stopping = true;
    if (this.#retry) clearTimeout(this.#retry);
    this.#dropAll();
    if (client) await end(client, wasConnected && this.#version === 5);
    this.#events.state('stopped', 'The connection to the broker is closed.');
  }

  publish(publication: Publication): Promise<boolean> {
    if (!this.connected || this.#waiting.length >= MOST_WAITING) return Promise.resolve(false);
    return new Promise((settle) => {
      this.#waiting.push({ publication, settle });
      this.#send();
    });
  }

  subscribe(subscriptions: readonly Subscription[]): Promise<string[]> {
    for (const subscription of subscriptions) this.#subscriptions.set(subscription.filter, subscription);
    return this.connected ? this.#ask(subscriptions) : Promise.resolve([]);
  }

  async unsubscribe(filter: string): Promise<void> {
    this.#subscriptions.delete(filter);
    const client = this.#client;
    if (!client || !this.connected) return;
    await new Promise<void>((done) => client.unsubscribe(filter, () => done()));
  }

  #open(): void {
    const client = connect(
      this.#options.url,
      connectOptions(this.#options, this.#timing, this.#version, this.#will),
    );
    this.#client = client;
    client.on('connect', (connack) => this.#onConnect(client, connack));
    client.on('message', (topic, payload, packet) => this.#onMessage(topic, payload, packet.retain));
    client.on('error', (error) => {
      this.#lastError = error;
    });
    client.on('disconnect', (packet) => {
      this.#lastError = { code: packet.reasonCode ?? 0 };
      this.#takenOver ||= packet.reasonCode === SESSION_TAKEN_OVER;
    });
    client.on('close', () => {
      if (client === this.#client) this.#onClose(client);
    });
    client.connect();
  }

  #onConnect(client: MqttClient, connack: IConnackPacket): void {
    // commands are small and must not wait for the next one to fill a packet
    if (client.stream instanceof Socket) client.stream.setNoDelay(true);
    this.#limits = limitsOf(connack);
    this.#lastError = null;
    this.#everConnected = true;
    this.#connectedMs = Date.now();
    this.#awaySaid = '';
    // from now on the broker may keep the session over a short break; 3.1.1 has no end for one
    if (this.#version === 5) client.options.clean = false;
    this.#noteLimits();
    if (this.#subscriptions.size > 0) void this.#ask([...this.#subscriptions.values()]);
    this.#events.state('connected', `Connected to the broker with MQTT ${this.version}.`);
    this.#first?.resolve();
    this.#first = null;
  }

  #noteLimits(): void {
    if (this.#limits.maxQos < 2) {
      this.#noteOnce(`The broker offers QoS ${this.#limits.maxQos} at most; values are published with that.`);
    }
    if (!this.#limits.retain) {
      this.#noteOnce('The broker keeps no retained messages; a hub sees values only when they change.');
    }
  }

  #noteOnce(sentence: string): void {
    if (this.#notes.has(sentence)) return;
    this.#notes.add(sentence);
    this.#events.note(sentence);
  }

  #onMessage(topic: string, payload: Uint8Array, retained: boolean): void {
    if (payload.length > MOST_PACKET_BYTES) {
      this.#noteOnce(`A message on ${topic} is larger than ${MOST_PACKET_BYTES} bytes and is dropped.`);
      return;
    }
    this.#events.message({ topic, payload, retained });
  }

  #onClose(client: MqttClient): void {
    this.#dropAll();
    if (this.#stopping) return;
    this.#judgeConnection();
    if (this.#takenOver) return this.#giveUp(client);
    const failure = failureOf(this.#lastError, this.#options.url);
    this.#lastError = null;
    if (this.#adapt(client, failure)) return;
    if (!this.#everConnected) {
      client.end(true);
      this.#first?.reject(failure.error);
      this.#first = null;
      return;
    }
    this.#comeBack(client, failure);
  }

  /** A connection that held starts the pauses anew; several that did not are a sign of two clients with one name. */
  #judgeConnection(): void {
    if (this.#connectedMs === 0) return;
    const held = Date.now() - this.#connectedMs >= GOOD_CONNECTION_MS;
    this.#connectedMs = 0;
    this.#shortConnections = held ? 0 : this.#shortConnections + 1;
    if (held) this.#failures = 0;
    if (this.#shortConnections < SUSPICIOUS) return;
    const { clientId } = this.#options;
    this.#noteOnce(
      `The broker ended ${SUSPICIOUS} connections soon after they began: does another client use the identifier "${clientId}"?`,
    );
  }

  /** Another client with our name is there: coming back would throw it out, and it us, for ever. */
  #giveUp(client: MqttClient): void {
    client.end(true);
    const sentence = `Another client took over the session "${this.#options.clientId}": stop the other rimehold, or give this one its own broker.client-id.`;
    this.#events.state('taken-over', sentence);
  }

  /** Asks for less when the broker has refused what we asked for; whether a new attempt was made. */
  #adapt(client: MqttClient, failure: Failure): boolean {
    if (
      failure.kind === 'version' &&
      this.#options.protocol === 'auto' &&
      this.#version === 5 &&
      !this.#everConnected
    ) {
      this.#version = 4;
      this.#events.note('The broker does not speak MQTT 5; falling back to 3.1.1.');
    } else if (failure.code !== null && isRetainRefusal(failure.code) && this.#will.retain) {
      this.#will = { ...this.#will, retain: false };
    } else if (failure.code !== null && isQosRefusal(failure.code) && this.#will.qos > 0) {
      this.#will = { ...this.#will, qos: this.#will.qos === 2 ? 1 : 0 };
    } else return false;
    client.end(true);
    this.#open();
    return true;
  }

  #comeBack(client: MqttClient, failure: Failure): void {
    const sentence = failure.error.message;
    if (sentence !== this.#awaySaid) this.#events.state('away', sentence);
    this.#awaySaid = sentence;
    const { firstPauseMs, mostPauseMs } = this.#timing;
    const pauseMs = Math.min(mostPauseMs, firstPauseMs * 2 ** Math.min(this.#failures, 16));
    this.#failures += 1;
    // up to a quarter earlier, so that not all clients of a restarted broker come at once
    this.#retry = setTimeout(
      () => {
        const { incomingStore, outgoingStore } = client;
        client.reconnect({ incomingStore, outgoingStore });
      },
      pauseMs * (1 - Math.random() / 4),
    );
  }

  #send(): void {
    const client = this.#client;
    if (!client) return;
    for (let next = this.#waiting.at(0); next; next = this.#waiting.at(0)) {
      if (next.publication.qos > 0 && this.#inFlight.size >= this.#limits.inFlight) return;
      this.#waiting.shift();
      this.#sendOne(client, next);
    }
  }

  #sendOne(client: MqttClient, waiting: Waiting): void {
    const { topic, payload, retain, expiresInS } = waiting.publication;
    const qos = Math.min(waiting.publication.qos, this.#limits.maxQos) as Qos;
    const bytes = Buffer.from(payload as string);
    if (bytes.length + Buffer.byteLength(topic) + 64 > this.#limits.packetBytes) {
      this.#noteOnce(`The broker does not take messages as large as that of ${topic}; it is not published.`);
      return waiting.settle(false);
    }
    const expires = this.#version === 5 && expiresInS !== undefined;
    const properties = expires ? { messageExpiryInterval: Math.max(1, Math.ceil(expiresInS)) } : undefined;
    this.#inFlight.set(waiting, null);
    client.publish(
      topic,
      bytes,
      { qos, retain: retain && this.#limits.retain, ...(properties ? { properties } : {}) },
      (error) => this.#settled(waiting, error ?? null),
    );
    if (qos === 1 && this.#inFlight.has(waiting)) this.#inFlight.set(waiting, client.getLastMessageId());
  }

  #settled(waiting: Waiting, error: (Error & { code?: number }) | null): void {
    if (!this.#inFlight.delete(waiting)) return;
    if (error && typeof error.code === 'number') {
      this.#noteOnce(`The broker did not take ${waiting.publication.topic}: ${reasonWords(error.code)}.`);
    }
    waiting.settle(!error);
    this.#send();
  }

  /** Settles everything as not taken; commands under way are forgotten, so that none arrives after a long break. */
  #dropAll(): void {
    const dropped = [...this.#inFlight, ...this.#waiting.map((waiting) => [waiting, null] as const)];
    this.#inFlight.clear();
    this.#waiting.length = 0;
    for (const [waiting, messageId] of dropped) {
      if (messageId !== null) this.#client?.removeOutgoingMessage(messageId);
      waiting.settle(false);
    }
  }

  #ask(subscriptions: readonly Subscription[]): Promise<string[]> {
    const client = this.#client;
    if (!client) return Promise.resolve([]);
    // retain handling: 1 = send what is kept only where the subscription is new, 2 = never
    const map = Object.fromEntries(
      subscriptions.map(({ filter, qos, retained }) => [filter, { qos, rh: retained ? 1 : 2, rap: false }]),
    );
    return new Promise((resolve) => {
      client.subscribe(map, (error, _granted, suback) => {
        const codes = suback?.granted ?? [];
        const refused = subscriptions.filter((_, index) => Number(codes[index] ?? 0) >= 0x80);
        for (const [index, { filter }] of subscriptions.entries()) {
          const code = Number(codes[index] ?? 0);
          if (code >= 0x80)
            this.#noteOnce(`The broker refused the subscription to ${filter}: ${reasonWords(code)}.`);
        }
        resolve(error ? refused.map(({ filter }) => filter) : []);
      });
    });
  }
}

function end(client: MqttClient, politely: boolean): Promise<void> {
  return new Promise((resolve) => {
    const enough = setTimeout(() => {
      client.end(true);
      resolve();
    }, 2000);
    const done = (): void => {
      clearTimeout(enough);
      resolve();
    };
    if (politely) client.end(false, { properties: { sessionExpiryInterval: 0 } }, done);
    else client.end(!client.connected, {}, done);
  });
}

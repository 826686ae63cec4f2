/** What a connection to the broker is made of: what we ask for, what the broker allows, what others may use of it. */
import type { IClientOptions, IConnackPacket } from 'mqtt';
import type { Message } from './intake.ts';

export type Qos = 0 | 1 | 2;

export interface BrokerOptions {
  readonly url: string;
  readonly clientId: string;
  readonly protocol: 'auto' | '5' | '3.1.1';
  readonly user: string | null;
  readonly password: string | null;
  readonly tls: {
    readonly ca: Uint8Array | null;
    readonly cert: Uint8Array | null;
    readonly key: Uint8Array | null;
  } | null;
  /** Published by the broker, retained, when this connection ends without a word. */
  readonly will: { readonly topic: string; readonly payload: string } | null;
  readonly timing?: Partial<Timing>;
}

export interface Timing {
  readonly keepAliveS: number;
  readonly connectTimeoutMs: number;
  /** How long the broker waits before it publishes the will (MQTT 5): a short break is not told to anybody. */
  readonly willDelayS: number;
  readonly firstPauseMs: number;
  readonly mostPauseMs: number;
}

export const TIMING: Timing = {
  keepAliveS: 30,
  connectTimeoutMs: 10_000,
  willDelayS: 5,
  firstPauseMs: 1000,
  mostPauseMs: 30_000,
};

/** How long the broker keeps subscriptions and readings for us after a break; longer than the will delay. */
const SESSION_EXPIRY_S = 300;
/** Largest packet that we take: a forecast of two weeks by the hour has some 60 kB. */
export const MOST_PACKET_BYTES = 256 * 1024;
/** Messages of QoS 1 and 2 that the broker may have under way to us. */
const RECEIVE_MAXIMUM = 1000;
/** Messages of QoS 1 and 2 that we have under way to the broker, where it allows that many. */
const MOST_IN_FLIGHT = 20;

export interface Subscription {
  readonly filter: string;
  readonly qos: Qos;
  /** Whether messages that the broker has kept are wanted. MQTT 3.1.1 sends them in any case. */
  readonly retained: boolean;
}

export interface Publication {
  readonly topic: string;
  readonly payload: string | Uint8Array;
  readonly qos: Qos;
  readonly retain: boolean;
  /** After this many seconds the broker forgets the message (MQTT 5). */
  readonly expiresInS?: number;
}

/** Whatever can publish and subscribe; the device and the actuators need no more. */
export interface Publisher {
  /** Resolves to whether the broker has taken the message. Never rejects. */
  publish(publication: Publication): Promise<boolean>;
  /** Resolves to the filters that the broker refused; nothing is asked while it is away. Never rejects. */
  subscribe(subscriptions: readonly Subscription[]): Promise<string[]>;
  unsubscribe(filter: string): Promise<void>;
}

export type LinkState = 'connected' | 'away' | 'taken-over' | 'stopped';

export interface BrokerEvents {
  message(message: Message): void;
  /** A change of the link, with a sentence for the log. On `connected` all subscriptions are asked for again. */
  state(state: LinkState, sentence: string): void;
  /** Something that a person should know but that changes nothing. */
  note(sentence: string): void;
}

/** What the broker allows on this connection (MQTT 5 section 3.2.2.3). */
export interface Limits {
  readonly maxQos: Qos;
  readonly retain: boolean;
  readonly inFlight: number;
  readonly packetBytes: number;
}

export const NO_LIMITS: Limits = { maxQos: 2, retain: true, inFlight: MOST_IN_FLIGHT, packetBytes: Infinity };

export function limitsOf(connack: IConnackPacket): Limits {
  const given = connack.properties;
  return {
    maxQos: Math.min(2, given?.maximumQoS ?? 2) as Qos,
    retain: given?.retainAvailable ?? true,
    inFlight: Math.min(MOST_IN_FLIGHT, given?.receiveMaximum ?? MOST_IN_FLIGHT),
    packetBytes: given?.maximumPacketSize ?? Infinity,
  };
}

/** How the will is left with the broker; less than asked for where the broker offers less. */
export interface WillTerms {
  readonly qos: Qos;
  readonly retain: boolean;
}

/** The client library's options for one attempt; it neither reconnects nor resubscribes by itself. */
export function connectOptions(
  options: BrokerOptions,
  timing: Timing,
  version: 4 | 5,
  will: WillTerms,
): IClientOptions {
  const { clientId, user, password, tls } = options;
  return {
    manualConnect: true,
    reconnectPeriod: 0,
    resubscribe: false,
    queueQoSZero: false,
    clientId,
    protocolVersion: version,
    clean: true,
    keepalive: timing.keepAliveS,
    connectTimeout: timing.connectTimeoutMs,
    ...(user === null ? {} : { username: user }),
    ...(password === null ? {} : { password }),
    ...(tls?.ca ? { ca: Buffer.from(tls.ca) } : {}),
    ...(tls?.cert ? { cert: Buffer.from(tls.cert) } : {}),
    ...(tls?.key ? { key: Buffer.from(tls.key) } : {}),
    ...willOptions(options, timing, version, will),
    ...(version === 5 ? { properties: SESSION } : {}),
  };
}

const SESSION = {
  sessionExpiryInterval: SESSION_EXPIRY_S,
  receiveMaximum: RECEIVE_MAXIMUM,
  maximumPacketSize: MOST_PACKET_BYTES,
};

function willOptions(
  options: BrokerOptions,
  timing: Timing,
  version: 4 | 5,
  terms: WillTerms,
): Pick<IClientOptions, 'will'> {
  if (!options.will) return {};
  const { topic, payload } = options.will;
  const delay = version === 5 ? { properties: { willDelayInterval: timing.willDelayS } } : {};
  return { will: { topic, payload: Buffer.from(payload), ...terms, ...delay } };
}

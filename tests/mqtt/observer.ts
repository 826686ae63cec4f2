/** A plain MQTT client that sees every packet as the broker sends it, and waiting that ends. */
import { connect, type IPublishPacket, type MqttClient } from 'mqtt';

export interface Seen {
  readonly topic: string;
  readonly text: string;
  readonly bytes: Uint8Array;
  readonly qos: number;
  readonly retain: boolean;
  readonly expiryS: number | null;
}

export interface Observer {
  readonly client: MqttClient;
  /** Everything seen, in order. */
  readonly seen: Seen[];
  latest(topic: string): Seen | undefined;
  publish(
    topic: string,
    payload: string | Buffer,
    options?: { qos?: 0 | 1 | 2; retain?: boolean },
  ): Promise<void>;
  stop(): Promise<void>;
}

/** Subscribes to a filter at QoS 2, with retain as published where MQTT 5 is spoken. */
export async function observe(url: string, filter: string, protocolVersion: 4 | 5 = 5): Promise<Observer> {
  const client = connect(url, { protocolVersion, reconnectPeriod: 200, manualConnect: true });
  const seen: Seen[] = [];
  client.on('message', (topic, payload, packet) => seen.push(seenOf(topic, payload, packet)));
  client.on('error', () => undefined);
  client.connect();
  await new Promise<void>((done) => client.once('connect', () => done()));
  await client.subscribeAsync(filter, { qos: 2, rap: true });
  return {
    client,
    seen,
    latest: (topic) => seen.findLast((one) => one.topic === topic),
    publish: async (topic, payload, options = {}) => {
      await client.publishAsync(topic, payload, { qos: options.qos ?? 1, retain: options.retain ?? false });
    },
    stop: () => client.endAsync(true),
  };
}

function seenOf(topic: string, payload: Buffer, packet: IPublishPacket): Seen {
  return {
    topic,
    text: payload.toString(),
    bytes: payload,
    qos: packet.qos,
    retain: packet.retain,
    expiryS: packet.properties?.messageExpiryInterval ?? null,
  };
}

/** Waits until something holds; fails with what was waited for. The limit is for machines that are busy with much else. */
export async function until(what: string, holds: () => boolean, withinMs = 15_000): Promise<void> {
  const end = Date.now() + withinMs;
  while (!holds()) {
    if (Date.now() > end) throw new Error(`waited ${withinMs} ms in vain for: ${what}`);
    await new Promise((done) => setTimeout(done, 10));
  }
}

export const pause = (ms: number): Promise<void> => new Promise((done) => setTimeout(done, ms));

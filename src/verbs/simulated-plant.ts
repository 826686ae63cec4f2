/**
 * A simulated plant at the other end of a broker: its probes publish, its plugs obey, and go to off by themselves when
 * they hear nothing newer for three minutes. For the demo and for scenario tests; it shares nothing with the daemon
 * but the broker.
 */
import { Socket } from 'node:net';
import { connectAsync, type MqttClient } from 'mqtt';
import type { SiteConfig } from '../config.ts';
import { ORDER_LIFE_MS } from '../dispatch/interlocks.ts';
import { MACHINES, type Machine } from '../order.ts';
import type { Simulator } from '../simulator/simulator.ts';
import { Wire } from '../simulator/wire.ts';

export interface SimulatedPlantOptions {
  readonly config: SiteConfig;
  readonly simulator: Simulator;
  readonly url: string;
  readonly user?: string;
  readonly password?: string;
}

export class SimulatedPlant {
  readonly #options: SimulatedPlantOptions;
  readonly #wire: Wire;
  readonly #on: Record<Machine, boolean> = { chiller: false, pump: false, fan: false };
  readonly #toldMs: Record<Machine, number> = { chiller: 0, pump: 0, fan: 0 };
  #client: MqttClient | null = null;

  constructor(options: SimulatedPlantOptions) {
    this.#options = options;
    this.#wire = new Wire(options.config);
  }

  async start(): Promise<void> {
    const { url, user, password, config } = this.#options;
    this.#client = await connectAsync(url, {
      clientId: `plant-${config.site.id}`,
      ...(user === undefined ? {} : { username: user }),
      ...(password === undefined ? {} : { password }),
    });
    if (this.#client.stream instanceof Socket) this.#client.stream.setNoDelay(true);
    this.#client.on('message', (topic, payload) => this.#obey(topic, payload.toString()));
    const topics = MACHINES.flatMap((machine) => config.actuators[machine]?.topic ?? []);
    if (topics.length > 0) await this.#client.subscribeAsync(topics, { qos: 1 });
  }

  /** Lives on to an instant and publishes what the probes said; resolves to the number of messages the broker took. */
  async advance(toMs: number): Promise<number> {
    const { simulator } = this.#options;
    for (const machine of MACHINES) {
      const forgotten = this.#on[machine] && toMs - this.#toldMs[machine] > ORDER_LIFE_MS;
      if (forgotten) this.#turn(machine, false);
    }
    const readings = simulator.advance(toMs);
    const messages = this.#wire.messages(readings, this.#on);
    const client = this.#client;
    if (client === null) return 0;
    await Promise.all(messages.map(({ topic, payload }) => client.publishAsync(topic, payload, { qos: 1 })));
    return messages.length;
  }

  async stop(): Promise<void> {
    await this.#client?.endAsync();
    this.#client = null;
  }

  #obey(topic: string, payload: string): void {
    const { config, simulator } = this.#options;
    for (const machine of MACHINES) {
      const actuator = config.actuators[machine];
      if (actuator?.topic !== topic) continue;
      this.#toldMs[machine] = simulator.nowMs();
      this.#turn(machine, payload === actuator.on);
    }
  }

  #turn(machine: Machine, on: boolean): void {
    this.#on[machine] = on;
    this.#options.simulator.switch(machine, on);
  }
}

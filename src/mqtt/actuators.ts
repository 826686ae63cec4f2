/**
 * Switching the machines, and knowing whether they obey. The core is pure: an order becomes messages, what is heard
 * and measured becomes faults. Nothing but a cleared command switches anything, by type.
 *
 * Every order is sent every cycle (at most a minute apart) at QoS 1, not retained, and with MQTT 5 it expires with the
 * order: a plug that was away is told what holds now, never what held once.
 */
import type { ActuatorConfig, SiteConfig } from '../config.ts';
import { MACHINES, type ClearedCommand, type Machine } from '../order.ts';
import { valueOf, type LivePoints } from '../points.ts';
import type { Message } from './intake.ts';
import type { Publication } from './link.ts';
import { openPayload } from './payload.ts';
import { pointAt } from './pointer.ts';

export interface ActuatorFault {
  readonly machine: Machine;
  /** `actuator-chiller`, for the alert. */
  readonly id: string;
  /** One sentence for people. */
  readonly sentence: string;
}

/** What is known of one machine, for the page and `check`. */
export interface ActuatorStatus {
  readonly machine: Machine;
  readonly topic: string;
  readonly ordered: boolean | null;
  readonly sinceMs: number | null;
  /** What it says of itself; null when it says nothing or never did. */
  readonly says: boolean | null;
}

interface State {
  readonly machine: Machine;
  readonly config: ActuatorConfig;
  readonly runningAboveW: number;
  ordered: boolean | null;
  sinceMs: number | null;
  says: boolean | null;
}

/** Fans have no figure of their own in the site file; the smallest draw more, a plug's electronics less. */
const FAN_RUNNING_ABOVE_W = 3;

const NAMES: Readonly<Record<Machine, string>> = {
  chiller: 'ice machine',
  pump: 'melt-water pump',
  fan: 'fan coil',
};

export class Actuators {
  readonly #states: readonly State[];

  constructor(config: SiteConfig) {
    const thresholds: Record<Machine, number> = {
      chiller: config.chiller.runningAboveW,
      pump: config.delivery.runningAboveW,
      fan: FAN_RUNNING_ABOVE_W,
    };
    this.#states = MACHINES.flatMap((machine) => {
      const actuator = config.actuators[machine];
      if (!actuator) return [];
      const unknown = { ordered: null, sinceMs: null, says: null };
      return [{ machine, config: actuator, runningAboveW: thresholds[machine], ...unknown }];
    });
  }

  /** Topics on which machines tell their state. */
  topics(): string[] {
    return [
      ...new Set(this.#states.flatMap(({ config }) => (config.readback ? [config.readback.topic] : []))),
    ];
  }

  /** The messages of an order; call in every cycle. */
  order(cleared: ClearedCommand, nowMs: number): Publication[] {
    return this.#states.map((state) => {
      const on = cleared.switches[state.machine];
      if (state.ordered !== on) {
        state.ordered = on;
        state.sinceMs = nowMs;
      }
      return {
        topic: state.config.topic,
        payload: on ? state.config.on : state.config.off,
        qos: 1,
        retain: false,
        expiresInS: Math.max(1, (cleared.expiresMs - nowMs) / 1000),
      };
    });
  }

  /** Takes what a machine says of itself; whether the message was one. */
  hear(message: Message): boolean {
    const states = this.#states.filter(({ config }) => config.readback?.topic === message.topic);
    for (const state of states) state.says = readState(state.config, message.payload) ?? state.says;
    return states.length > 0;
  }

  /** What does not obey, by readback first and by measured power where that says nothing. */
  faults(live: LivePoints, nowMs: number): ActuatorFault[] {
    return this.#states.flatMap((state) => {
      const sentence = faultOf(state, live, nowMs);
      return sentence === null ? [] : [{ machine: state.machine, id: `actuator-${state.machine}`, sentence }];
    });
  }

  status(): ActuatorStatus[] {
    return this.#states.map(({ machine, config, ordered, sinceMs, says }) => ({
      machine,
      topic: config.topic,
      ordered,
      sinceMs,
      says,
    }));
  }
}

/** On, off, or null when the payload tells neither. */
function readState(config: ActuatorConfig, payload: Uint8Array): boolean | null {
  if (!config.readback) return null;
  const opened = openPayload(payload);
  if (config.readback.read === 'plain') return stateOf(opened.text()?.trim() ?? '', config);
  const json = opened.json();
  const pointed = json.ok ? pointAt(json.value, config.readback.read) : null;
  const value = pointed?.found ? pointed.value : null;
  const isWord = typeof value === 'string' || typeof value === 'number' || typeof value === 'boolean';
  return isWord ? stateOf(String(value), config) : null;
}

/** With a word for on of its own, all other words are off; without one, only known words count. */
function stateOf(text: string, config: ActuatorConfig): boolean | null {
  if (text === '') return null;
  const on = config.readback?.on ?? null;
  if (on !== null) return text === on;
  if (text === config.on || text === 'true') return true;
  return text === config.off || text === 'false' ? false : null;
}

const minutes = (ms: number): string =>
  ms < 120_000 ? `${Math.round(ms / 1000)} s` : `${Math.round(ms / 60_000)} min`;

function faultOf(state: State, live: LivePoints, nowMs: number): string | null {
  const { ordered, sinceMs, config } = state;
  if (ordered === null || sinceMs === null || nowMs - sinceMs < config.confirmWithinMs) return null;
  const told = `The ${NAMES[state.machine]} was told to be ${ordered ? 'on' : 'off'} ${minutes(nowMs - sinceMs)} ago`;
  if (state.says !== null && state.says !== ordered) {
    return `${told} but says that it is ${state.says ? 'on' : 'off'}; look at ${config.topic}.`;
  }
  const powerW = config.confirmBy === null ? null : valueOf(live, config.confirmBy);
  if (powerW === null || powerW > state.runningAboveW === ordered) return null;
  return `${told} but draws ${Math.round(powerW)} W; look at ${config.topic} and at the machine.`;
}

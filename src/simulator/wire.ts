/**
 * How the simulated probes and plugs talk: readings in, MQTT messages out, in just the forms that the site file says
 * its points are read in, so that the way in is exercised as a real plant would.
 */
import type { PointConfig, SiteConfig } from '../config.ts';
import { MACHINES, type Machine } from '../order.ts';
import { pointSpec, type PointId, type PointSpec, type Reading } from '../points.ts';
import { fromInside } from '../units.ts';

export interface WireMessage {
  readonly topic: string;
  readonly payload: string;
}

interface Wired {
  readonly id: PointId;
  readonly point: PointConfig;
  readonly spec: PointSpec;
}

/** SenML units (RFC 8428; secondary ones left out) and the factor from the point's own unit. */
const SENML: Readonly<Record<string, readonly [unit: string, factor: number]>> = {
  temperature: ['Cel', 1],
  power: ['W', 1],
  fraction: ['%RH', 1],
  waterFlow: ['l/s', 1 / 60],
  level: ['m', 1e-3],
};

export class Wire {
  readonly #byTopic = new Map<string, Wired[]>();
  readonly #latest = new Map<PointId, Reading>();
  readonly #readbacks: ReadonlyMap<string, { readonly machine: Machine; readonly pointer: string }>;

  constructor(config: SiteConfig) {
    for (const [id, point] of Object.entries(config.points)) {
      const spec = pointSpec(id);
      if (!spec || spec.kind === 'series') continue;
      const wired = this.#byTopic.get(point.topic) ?? [];
      wired.push({ id: id as PointId, point, spec });
      this.#byTopic.set(point.topic, wired);
    }
    this.#readbacks = new Map(
      MACHINES.flatMap((machine) => {
        const readback = config.actuators[machine]?.readback;
        return readback ? [[readback.topic, { machine, pointer: readback.read }] as const] : [];
      }),
    );
  }

  /** The messages that carry these readings, oldest first within a topic. */
  messages(readings: readonly Reading[], on: Readonly<Record<Machine, boolean>>): WireMessage[] {
    const touched = new Set<string>();
    const plain: WireMessage[] = [];
    for (const [topic, wired] of this.#byTopic) {
      for (const reading of readings) {
        const hit = wired.find(({ id }) => id === reading.point);
        if (!hit) continue;
        this.#latest.set(reading.point, reading);
        if (hit.point.read === 'plain') plain.push({ topic, payload: plainText(hit, reading) });
        else touched.add(topic);
      }
    }
    return [...plain, ...[...touched].map((topic) => this.#composed(topic, on))];
  }

  #composed(topic: string, on: Readonly<Record<Machine, boolean>>): WireMessage {
    const wired = this.#byTopic.get(topic) ?? [];
    if (wired.some(({ point }) => point.read.startsWith('senml:'))) return this.#senml(topic, wired);
    const document: Record<string, unknown> = {};
    for (const entry of wired) {
      const reading = this.#latest.get(entry.id);
      if (reading && entry.point.read.startsWith('/'))
        place(document, entry.point.read, jsonValue(entry, reading));
    }
    const readback = this.#readbacks.get(topic);
    if (readback && readback.pointer !== 'plain') place(document, readback.pointer, on[readback.machine]);
    return { topic, payload: JSON.stringify(document) };
  }

  #senml(topic: string, wired: readonly Wired[]): WireMessage {
    const pack = wired.flatMap(({ id, point, spec }) => {
      const reading = this.#latest.get(id);
      const [unit, factor] = SENML[spec.kind] ?? ['', 1];
      if (!reading) return [];
      const name = point.read.slice('senml:'.length);
      return [{ n: name, u: unit, t: reading.atMs / 1000, v: reading.value * factor }];
    });
    return { topic, payload: JSON.stringify(pack) };
  }
}

function inUnit({ point, spec }: Wired, reading: Reading): number {
  if (point.unit === null || spec.kind === 'boolean' || spec.kind === 'series') return reading.value;
  return fromInside(reading.value, point.unit, spec.kind) ?? reading.value;
}

function plainText(wired: Wired, reading: Reading): string {
  if (wired.spec.kind !== 'boolean') return String(inUnit(wired, reading));
  return reading.value === 1 ? wired.point.trueText : wired.point.falseText;
}

function jsonValue(wired: Wired, reading: Reading): number | boolean {
  return wired.spec.kind === 'boolean' ? reading.value === 1 : inUnit(wired, reading);
}

/** Puts a value at a JSON pointer (RFC 6901) of an object, making the objects on the way. */
function place(document: Record<string, unknown>, pointer: string, value: unknown): void {
  const steps = pointer
    .slice(1)
    .split('/')
    .map((step) => step.replaceAll('~1', '/').replaceAll('~0', '~'));
  let here = document;
  for (const step of steps.slice(0, -1)) here = (here[step] ??= {}) as Record<string, unknown>;
  here[steps.at(-1) ?? ''] = value;
}

/**
 * The Homie device of the site: announces itself on every connection, publishes values when they change, takes the
 * owner's settings, tells alerts to people. Only a cleared command can be published as an order, by type.
 *
 * A value that is not known has no retained message; it is published once it is known and cleared when it no longer
 * is. The command, its expiry and the order are published in every cycle and vanish from the broker when they expire
 * (MQTT 5), so that no hub acts on the word of a daemon that is gone.
 */
import type { SiteConfig } from '../config.ts';
import type { ClearedCommand } from '../order.ts';
import type { CycleRecord, PlanRecord } from '../record.ts';
import {
  describeDevice,
  deviceTopic,
  propertiesOf,
  type Path,
  type Property,
  type SettablePath,
} from './homie.ts';
import { formatValue, isNews, parseSet, type Value } from './homie-format.ts';
import {
  cycleValues,
  nightValues,
  orderValues,
  planValues,
  settingValues,
  type Beside,
  type NightFigures,
  type Settings,
  type Values,
} from './homie-values.ts';
import type { Message } from './intake.ts';
import type { Publisher } from './link.ts';
import { LogVoice, type LogLevel } from './log-voice.ts';

export interface HomieDeviceOptions {
  readonly config: SiteConfig;
  readonly publisher: Publisher;
  readonly settings: Settings;
  readonly nowMs: () => number;
  /** Takes a setting; returns null when it is accepted, else one sentence why not. */
  readonly onSet: (path: SettablePath, value: number | string) => string | null;
  /** Takes the sentence about a setting that was not taken; the same one is told once in a while only. */
  readonly onRefused: (sentence: string) => void;
}

/**
 * What the broker still keeps of an earlier life comes in one go on subscribing. Our own `$state` is always among it;
 * with it heard, this long without more is all of it. A broker that keeps nothing is not waited for for ever.
 */
const SWEEP_QUIET_MS = 200;
const SWEEP_MOST_MS = 3000;
/** These are published in every cycle, changed or not, and expire with the order. */
const REPEATED: readonly Path[] = ['dispatch/command', 'dispatch/expires', 'dispatch/order'];
const ALERT_ID = /^[a-z0-9]([a-z0-9-]*[a-z0-9])?$/;

export class HomieDevice {
  readonly #options: HomieDeviceOptions;
  readonly #publisher: Publisher;
  readonly #root: string;
  readonly #properties: ReadonlyMap<Path, Property>;
  readonly #voice: LogVoice;
  readonly #refusals: LogVoice;
  readonly #values = new Map<Path, Value>();
  /** What was published on this connection. */
  readonly #published = new Map<Path, Value>();
  /** Values that the broker keeps for us, on whichever connection they were published. */
  readonly #kept = new Set<Path>();
  /** `$target` of each settable property: the bytes of the last accepted `/set`, else the value. */
  readonly #targets = new Map<Path, string | Uint8Array>();
  readonly #alerts = new Map<string, string>();
  /** Retained topics of an earlier life, while they are gathered. */
  #leftovers: { topics: Set<string>; lastMs: number } | null = null;
  /** Counts connections: an announcement that a newer one has overtaken ends. */
  #life = 0;
  #announced = false;
  #expiresMs = 0;
  #firstCycle: (() => void) | null = null;
  readonly #cycled: Promise<void>;

  constructor(options: HomieDeviceOptions) {
    this.#options = options;
    this.#publisher = options.publisher;
    this.#root = deviceTopic(options.config);
    this.#properties = propertiesOf(options.config);
    this.#voice = new LogVoice(options.config.announce.logLevel, options.nowMs);
    this.#refusals = new LogVoice('warn', options.nowMs);
    this.#cycled = new Promise((resolve) => (this.#firstCycle = resolve));
    this.#store(settingValues(options.settings));
    this.#store({ 'plan/schedule': {}, 'night/sheet': {} });
  }

  /**
   * Call on every (re)connection. `init`, leftovers of an earlier life cleared, description, values, `/set`
   * subscriptions, then `ready`; the first time it waits for the first cycle, so that a device that is ready has values.
   */
  async announce(): Promise<void> {
    const life = ++this.#life;
    this.#announced = false;
    this.#published.clear();
    void this.#state('init');
    await this.#publish('$description', describeDevice(this.#options.config));
    await this.#cycled;
    if (life === this.#life) await this.#sweep();
    if (life !== this.#life) return;
    this.#announced = true;
    for (const path of this.#properties.keys()) this.#publishValue(path);
    for (const [id, text] of this.#alerts) void this.#publish(`$alert/${id}`, text);
    await this.#publisher.subscribe(this.#settable().map((path) => this.#setSubscription(path)));
    if (life === this.#life) await this.#state('ready');
  }

  /** Call when the broker is away: values are kept until the next announcement. */
  away(): void {
    this.#life += 1;
    this.#announced = false;
  }

  publishCycle(record: CycleRecord, beside: Beside): void {
    this.#update(cycleValues(record, beside));
    this.#firstCycle?.();
    this.#firstCycle = null;
  }

  publishPlan(plan: PlanRecord): void {
    this.#update(planValues(plan));
  }

  publishNight(night: NightFigures): void {
    this.#update(nightValues(night));
  }

  publishSettings(settings: Settings): void {
    this.#update(settingValues(settings));
  }

  /** Every cycle; nothing but a cleared command is taken. */
  publishOrder(cleared: ClearedCommand): void {
    this.#expiresMs = cleared.expiresMs;
    for (const path of REPEATED) this.#published.delete(path);
    this.#update(orderValues(cleared));
  }

  /** A plain sentence for people that stands until it is resolved (`null`). */
  alert(id: string, text: string | null): void {
    if (!ALERT_ID.test(id))
      throw new TypeError(`"${id}" is no alert id: expected a-z, 0-9 and inner hyphens`);
    if ((this.#alerts.get(id) ?? null) === text) return;
    if (text === null) this.#alerts.delete(id);
    else this.#alerts.set(id, text);
    if (this.#announced) void this.#publish(`$alert/${id}`, text ?? '');
  }

  /** Tells the log of the device, at a limited rate and only from the owner's level on. */
  log(level: LogLevel, sentence: string): void {
    if (!this.#voice.mayTell(level, sentence)) return;
    void this.#publisher.publish({
      topic: `${this.#root}/$log/${level}`,
      payload: sentence,
      qos: 0,
      retain: false,
    });
  }

  /** Takes a message; whether it was one of the device's own. */
  hear(message: Message): boolean {
    if (!message.topic.startsWith(`${this.#root}/`)) return false;
    if (message.retained) this.#gather(message);
    const path = this.#settable().find((one) => message.topic === `${this.#root}/${one}/set`);
    // a retained command is of unknown age: whoever left it there may have changed their mind long ago
    if (path && !message.retained) this.#set(path, message.payload);
    return true;
  }

  /** Says goodbye: `disconnected`. */
  async stop(): Promise<void> {
    this.away();
    await this.#state('disconnected');
  }

  /** Takes everything that was ever retained off the broker, `$state` first. */
  async remove(): Promise<void> {
    this.away();
    const own = [
      '$description',
      ...this.#kept,
      ...this.#settable().map((path) => `${path}/$target`),
      ...[...this.#alerts.keys()].map((id) => `$alert/${id}`),
    ];
    const kept = await this.#keptByBroker();
    await this.#state('');
    await this.#clear([...new Set([...own, ...kept])]);
  }

  #settable(): SettablePath[] {
    return [...this.#properties].flatMap(([path, property]) =>
      property.settable ? [path as SettablePath] : [],
    );
  }

  #setSubscription(path: Path): { filter: string; qos: 2; retained: false } {
    return { filter: `${this.#root}/${path}/set`, qos: 2, retained: false };
  }

  #set(path: SettablePath, payload: Uint8Array): void {
    const property = this.#property(path);
    const parsed = parseSet(property, Buffer.from(payload).toString());
    const refusal = parsed.ok ? this.#options.onSet(path, parsed.value) : parsed.fault;
    if (!parsed.ok || refusal !== null) return this.#refuse(path, refusal ?? '');
    this.#values.set(path, parsed.value);
    this.#targets.set(path, payload);
    this.#published.delete(path);
    if (this.#announced) this.#publishValue(path);
  }

  /** Says why, and publishes the value that stands once more: whoever sent the other one sees it unchanged. */
  #refuse(path: SettablePath, why: string): void {
    const stands = formatValue(this.#property(path), this.#values.get(path) ?? null);
    const fault = why.replace(/\.$/, '');
    const sentence = `${this.#root}/${path} was not set: ${fault}. It stays ${stands}; send a value that is expected.`;
    this.log('warn', sentence);
    if (this.#refusals.mayTell('warn', sentence)) this.#options.onRefused(sentence);
    this.#published.delete(path);
    if (this.#announced) this.#publishValue(path);
  }

  #store(values: Values): Path[] {
    const paths = Object.keys(values) as Path[];
    for (const path of paths) this.#values.set(path, values[path] ?? null);
    return paths;
  }

  #update(values: Values): void {
    const before = new Map(this.#values);
    for (const path of this.#store(values)) {
      // a setting that changed by itself, as a wish that has run out, is its own target again
      if (isNews(this.#property(path), before.get(path), this.#values.get(path) ?? null))
        this.#targets.delete(path);
      if (this.#announced) this.#publishValue(path);
    }
  }

  #publishValue(path: Path): void {
    const property = this.#property(path);
    const value = this.#values.get(path) ?? null;
    const published = this.#published.get(path);
    if (!isNews(property, published, value)) return;
    this.#published.set(path, value);
    const payload = formatValue(property, value);
    if (property.settable) void this.#publish(`${path}/$target`, this.#targets.get(path) ?? payload);
    // a value that was never there need not be cleared
    if (payload === '' && !this.#kept.delete(path)) return;
    if (payload !== '') this.#kept.add(path);
    void this.#publish(path, payload, REPEATED.includes(path) ? this.#expiresMs : null);
  }

  #property(path: Path): Property {
    const property = this.#properties.get(path);
    if (!property) throw new TypeError(`no property ${path}`);
    return property;
  }

  #state(state: 'init' | 'ready' | 'disconnected' | ''): Promise<boolean> {
    return this.#publish('$state', state);
  }

  #publish(topic: string, payload: string | Uint8Array, expiresMs: number | null = null): Promise<boolean> {
    const expiry = expiresMs === null ? {} : { expiresInS: (expiresMs - this.#options.nowMs()) / 1000 };
    return this.#publisher.publish({
      topic: `${this.#root}/${topic}`,
      payload,
      qos: 2,
      retain: true,
      ...expiry,
    });
  }

  /** Clears what is left of an earlier life or connection: removed properties, unknown values, resolved alerts. */
  async #sweep(): Promise<void> {
    const alive = new Set(['$state', '$description', ...this.#settable().map((path) => `${path}/$target`)]);
    for (const [path, value] of this.#values) if (value !== null) alive.add(path);
    for (const id of this.#alerts.keys()) alive.add(`$alert/${id}`);
    const kept = await this.#keptByBroker();
    await this.#clear(kept.filter((topic) => !alive.has(topic)));
  }

  async #clear(topics: readonly string[]): Promise<void> {
    await Promise.all(topics.map((topic) => this.#publish(topic, '')));
  }

  /** Every topic under the device that the broker keeps a message of. */
  async #keptByBroker(): Promise<string[]> {
    const filter = `${this.#root}/#`;
    const leftovers = { topics: new Set<string>(), lastMs: Date.now() };
    const until = leftovers.lastMs + SWEEP_MOST_MS;
    this.#leftovers = leftovers;
    await this.#publisher.subscribe([{ filter, qos: 0, retained: true }]);
    const complete = (): boolean =>
      leftovers.topics.has('$state') && Date.now() - leftovers.lastMs >= SWEEP_QUIET_MS;
    while (Date.now() < until && !complete()) await new Promise((done) => setTimeout(done, 25));
    this.#leftovers = null;
    await this.#publisher.unsubscribe(filter);
    return [...leftovers.topics];
  }

  #gather(message: Message): void {
    if (!this.#leftovers || message.payload.length === 0) return;
    this.#leftovers.topics.add(message.topic.slice(this.#root.length + 1));
    this.#leftovers.lastMs = Date.now();
  }
}

/** The daemon's path from the broker to the store; without a store file only the bare client, which counts. */
import { connect } from 'mqtt';
import { BrokerClient } from '../../src/mqtt/client.ts';
import { Intake } from '../../src/mqtt/intake.ts';
import { openStore, type Store } from '../../src/store/store.ts';
import type { PointConfig } from '../../src/config.ts';
import { BENCH_POINTS, type Ask, type Heard } from './ingest-words.ts';

const FLUSH_MS = 30_000;

const [, , url, storeFile] = process.argv;
const counted = { messages: 0, readings: 0, firstMs: 0, lastMs: 0, mostRss: 0, stored: 0 };
let begun = { cpu: process.cpuUsage(), atMs: performance.now(), stored: 0 };
let stop: () => Promise<unknown> = () => Promise.resolve();
let storedRows: () => number = () => 0;

function count(readings: number): void {
  const nowMs = performance.now();
  if (counted.messages === 0) counted.firstMs = nowMs;
  counted.lastMs = nowMs;
  counted.messages += 1;
  counted.readings += readings;
}

function pointConfigs(): Record<string, PointConfig> {
  const rest = { unit: null, maxAgeMs: 600_000, offsetK: 0, trueText: 'true', falseText: 'false' };
  return Object.fromEntries(
    BENCH_POINTS.map(({ id, topic, form }) => [
      id,
      form === 'json'
        ? { topic, read: '/sensor/t', timePointer: '/sensor/time', ...rest }
        : { topic, read: 'senml:p', timePointer: null, ...rest },
    ]),
  );
}

async function openPath(): Promise<void> {
  const store: Store = openStore(storeFile, { siteId: 'bench' });
  const intake = new Intake(pointConfigs());
  const client = new BrokerClient(
    { url, clientId: 'bench', protocol: 'auto', user: null, password: null, tls: null, will: null },
    {
      message: (message) => {
        const { readings } = intake.hear(message, Date.now());
        store.addReadings(readings);
        count(readings.length);
      },
      state: () => undefined,
      note: (sentence) => console.warn(sentence),
    },
  );
  setInterval(() => store.flush(), FLUSH_MS).unref();
  storedRows = () => {
    store.flush();
    return store.readingsBetween(0, Date.now() + 86_400_000).length;
  };
  stop = async () => {
    await client.stop();
    store.close();
  };
  await client.start();
  await client.subscribe(intake.topics().map((filter) => ({ filter, qos: 1, retained: true })));
}

async function openBare(): Promise<void> {
  const client = connect(url, { protocolVersion: 5, reconnectPeriod: 0 });
  client.on('message', () => count(1));
  stop = () => client.endAsync();
  await client.subscribeAsync(
    BENCH_POINTS.map(({ topic }) => topic),
    { qos: 1 },
  );
}

function begin(): void {
  Object.assign(counted, { messages: 0, readings: 0, firstMs: 0, lastMs: 0, mostRss: 0 });
  begun = { cpu: process.cpuUsage(), atMs: performance.now(), stored: begun.stored };
}

function heard(stored: number): Heard {
  const { user, system } = process.cpuUsage(begun.cpu);
  const wallMs = performance.now() - begun.atMs;
  return {
    messages: counted.messages,
    readings: counted.readings,
    stored,
    spanMs: Math.max(1, counted.lastMs - counted.firstMs),
    cpuMs: (user + system) / 1000,
    cpuPct: ((user + system) / 1000 / wallMs) * 100,
    mostRssMb: counted.mostRss / 1e6,
  };
}

/** Figures first: counting the rows afterwards is the benchmark's own work. */
function end(): Heard {
  const figures = heard(0);
  const rows = storedRows();
  const stored = rows - begun.stored;
  begun = { ...begun, stored: rows };
  return { ...figures, stored };
}

process.on('message', (ask: Ask) => {
  if (ask.ask === 'begin') begin();
  process.send?.(ask.ask === 'end' ? end() : heard(0));
});
process.on('disconnect', () => void stop().then(() => process.exit(0)));
setInterval(() => {
  counted.mostRss = Math.max(counted.mostRss, process.memoryUsage.rss());
}, 100).unref();

await (storeFile ? openPath() : openBare());
process.send?.('ready');

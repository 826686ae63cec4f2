/**
 * How many readings a second come through, from a publisher in a process of its own, through a real broker, into the
 * daemon's path (client, payloads, intake, store), which has a process of its own too. What is sent is known, so what
 * is lost is counted, not guessed. The bare client does nothing but count the same messages.
 */
import { fork, type ChildProcess } from 'node:child_process';
import { mkdirSync, mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { build } from 'vite';
import { hasMosquitto, startMosquitto, type Mosquitto } from '../mqtt/mosquitto.ts';
import type { BenchOptions, BenchResult } from './bench.ts';
import type { Ask, Heard, Sent } from './ingest-words.ts';

const PACED_PER_S = 10_000;
const QUIET_PER_S = 100;
/** After the last message was taken by the broker, this long without progress means that no more will come. */
const SETTLED_MS = 2000;

interface Phase {
  readonly name: string;
  readonly count: number;
  readonly perSecond: number | null;
}

interface Measured {
  readonly phase: Phase;
  readonly sent: Sent;
  readonly heard: Heard;
}

export async function run(options: BenchOptions): Promise<BenchResult> {
  if (!hasMosquitto) throw new Error('mosquitto is not installed: apt install mosquitto');
  const broker = await startMosquitto({ lines: ['max_queued_messages 0', 'max_inflight_messages 0'] });
  const folder = mkdtempSync(join(tmpdir(), 'rimehold-ingest-'));
  try {
    const programs = await compiled();
    const flood: Phase = {
      name: 'as fast as it goes',
      count: options.quick ? 40_000 : 200_000,
      perSecond: null,
    };
    // the daemon runs for years: the first thousands, compiled as they come, are not its pace
    const warm: Phase = { name: 'warm-up', count: 5000, perSecond: 2000 };
    const phases: Phase[] = [
      warm,
      { name: `${QUIET_PER_S}/s`, count: QUIET_PER_S * (options.quick ? 5 : 20), perSecond: QUIET_PER_S },
      { name: `${PACED_PER_S}/s`, count: PACED_PER_S * (options.quick ? 3 : 10), perSecond: PACED_PER_S },
      flood,
    ];
    const path = await measure(programs, broker, join(folder, 'path.db'), phases, options.seed);
    const bare = await measure(programs, broker, '', [warm, flood], options.seed);
    return report(path.slice(1), bare.slice(1));
  } finally {
    await broker.stop();
    rmSync(folder, { recursive: true, force: true });
  }
}

/** Both programs as plain JavaScript, as the daemon runs: a loader would count in memory and time. */
async function compiled(): Promise<string> {
  const root = new URL('../..', import.meta.url).pathname;
  const outDir = join(root, 'node_modules', '.cache', 'rimehold-ingest');
  mkdirSync(outDir, { recursive: true });
  const entry = (name: string): string => join(root, 'tests', 'bench', `${name}.ts`);
  await build({
    root,
    configFile: false,
    logLevel: 'silent',
    build: {
      ssr: true,
      outDir,
      emptyOutDir: true,
      rollupOptions: { input: [entry('ingest-sender'), entry('ingest-receiver')] },
    },
  });
  return outDir;
}

async function measure(
  programs: string,
  broker: Mosquitto,
  storeFile: string,
  phases: readonly Phase[],
  seed: number,
): Promise<Measured[]> {
  const receiver = start(programs, 'ingest-receiver', [broker.url, storeFile]);
  const sender = start(programs, 'ingest-sender', [broker.url, String(seed)]);
  try {
    await Promise.all([answer(receiver), answer(sender)]);
    const measured: Measured[] = [];
    for (const phase of phases) {
      await ask<Heard>(receiver, { ask: 'begin' });
      const sent = await ask<Sent>(sender, { ask: 'send', count: phase.count, perSecond: phase.perSecond });
      measured.push({ phase, sent, heard: await settled(receiver, sent.sent) });
    }
    return measured;
  } finally {
    await Promise.all([ended(receiver), ended(sender)]);
  }
}

async function settled(receiver: ChildProcess, sent: number): Promise<Heard> {
  let heard = await ask<Heard>(receiver, { ask: 'report' });
  for (let quietMs = 0; heard.messages < sent && quietMs < SETTLED_MS; quietMs += 100) {
    await new Promise((done) => setTimeout(done, 100));
    const later = await ask<Heard>(receiver, { ask: 'report' });
    if (later.messages > heard.messages) quietMs = 0;
    heard = later;
  }
  return ask<Heard>(receiver, { ask: 'end' });
}

function start(programs: string, name: string, args: readonly string[]): ChildProcess {
  return fork(join(programs, `${name}.js`), args, {
    execArgv: [],
    stdio: ['ignore', 'inherit', 'inherit', 'ipc'],
  });
}

function answer<T>(child: ChildProcess): Promise<T> {
  return new Promise((resolve, reject) => {
    const gone = (code: number | null): void => reject(new Error(`a child ended with ${code}`));
    child.once('exit', gone);
    child.once('message', (message) => {
      child.off('exit', gone);
      resolve(message as T);
    });
  });
}

function ask<T>(child: ChildProcess, what: Ask): Promise<T> {
  const answered = answer<T>(child);
  child.send(what);
  return answered;
}

function ended(child: ChildProcess): Promise<void> {
  if (child.exitCode !== null) return Promise.resolve();
  return new Promise((resolve) => {
    child.once('exit', () => resolve());
    child.disconnect();
  });
}

const perSecond = ({ heard }: Measured): number => (heard.messages / heard.spanMs) * 1000;

/** Processor time of the receiver for one message. */
const cpuUs = ({ heard }: Measured): number => (heard.cpuMs * 1000) / heard.messages;

function report(path: readonly Measured[], bare: readonly Measured[]): BenchResult {
  const [quiet, paced, flood] = path;
  const row = (name: string, one: Measured): (string | number)[] => [
    name,
    one.phase.name,
    one.sent.sent,
    Math.round((one.sent.sent / one.sent.tookMs) * 1000),
    Math.round(perSecond(one)),
    one.sent.sent - one.heard.readings,
    Math.round(one.heard.cpuPct * 10) / 10,
    Math.round(cpuUs(one)),
    Math.round(one.heard.mostRssMb),
  ];
  return {
    title: 'Ingest: publisher → broker (mosquitto, QoS 1) → client, payloads, intake, store',
    budget: `budget: ${PACED_PER_S} readings/s without loss, at most 130 MB resident`,
    columns: ['receiver', 'offered', 'sent', 'sent/s', 'heard/s', 'lost', 'CPU %', 'CPU µs each', 'most MB'],
    rows: [...path.map((one) => row('path', one)), ...bare.map((one) => row('bare client', one))],
    figures: {
      messagesPerSecond: Math.round(perSecond(flood)),
      lost: path.reduce((sum, { sent, heard }) => sum + sent.sent - heard.readings, 0),
      lostInStore: path.reduce((sum, { sent, heard }) => sum + sent.sent - heard.stored, 0),
      // by processor time: publisher and broker share the machine, and would hide the difference in the rates
      ratioToBareClient: Math.round((cpuUs(bare[0]) / cpuUs(flood)) * 1000) / 1000,
      rssMb: Math.round(Math.max(quiet.heard.mostRssMb, paced.heard.mostRssMb)),
      cpuPctAt100PerSecond: Math.round(quiet.heard.cpuPct * 10) / 10,
      heardPerSecondPaced: Math.round(perSecond(paced)),
      cpuUsPerReading: Math.round(cpuUs(flood)),
    },
  };
}

/**
 * What a stranger has: the built command line, a folder of their own, a site file. Every process is ended by its own
 * number with the test that started it.
 */
import { spawn, spawnSync, type ChildProcess } from 'node:child_process';
import { existsSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { expect, onTestFinished, vi } from 'vitest';
import { until } from '../mqtt/observer.ts';

const ROOT = join(import.meta.dirname, '../..');
const CLI = join(ROOT, 'dist/cli.js');
if (!existsSync(CLI))
  throw new Error('Expected the built command line in dist/cli.js; run `npm run build` first.');

/** A process that has not ended by then counts as left behind. Generous: the machine may be busy with much else. */
const MOST_LIFE_MS = 60_000;
vi.setConfig({ testTimeout: 3 * MOST_LIFE_MS, hookTimeout: MOST_LIFE_MS });

export interface Ended {
  /** Null when a signal ended it. */
  readonly status: number | null;
  readonly out: string;
  readonly err: string;
}

export interface Process {
  readonly pid: number;
  /** Resolves when it has ended and everything it wrote has been read. */
  readonly ended: Promise<Ended>;
  alive(): boolean;
  err(): string;
  signal(name: NodeJS.Signals): void;
}

/** A folder of this test alone. */
export function ownFolder(): string {
  const folder = mkdtempSync(join(tmpdir(), 'rimehold-stranger-'));
  onTestFinished(() => rmSync(folder, { recursive: true, force: true }));
  return folder;
}

export const start = (folder: string, ...args: string[]): Process => launch(folder, args, {});

export interface How {
  /** Where standard output goes: a file, or a pipe that nobody reads any more. */
  readonly out?: number | 'unread';
  /** Files may not grow beyond this many bytes, as on a disk that is nearly full. */
  readonly mostFileBytes?: number;
  /** Number of the user that runs it; only root can name another. */
  readonly uid?: number;
}

/** A user whom file modes hold back: whoever runs the tests, or where that is root, a user without rights; null for none. */
export function powerlessUser(): number | null {
  const own = process.getuid?.() ?? null;
  if (own !== 0) return own;
  const uid = 65_534;
  if (spawnSync('test', ['-r', CLI], { uid }).status === 0) return uid;
  console.warn(
    'SKIPPED: run as root, in a folder that others may not enter; unreadable files are not tried.',
  );
  return null;
}

function launch(folder: string, args: readonly string[], { out, mostFileBytes, uid }: How): Process {
  const limit = mostFileBytes === undefined ? [] : ['prlimit', `--fsize=${mostFileBytes}:unlimited`];
  const [command, ...rest] = [...limit, process.execPath, CLI, ...args];
  const child = spawn(command, rest, {
    cwd: folder,
    ...(uid === undefined ? {} : { uid }),
    stdio: ['ignore', typeof out === 'number' ? out : 'pipe', 'pipe'],
  });
  const said = { out: '', err: '' };
  if (out === 'unread') child.stdout?.destroy();
  child.stdout?.on('data', (chunk) => (said.out += String(chunk)));
  child.stderr?.on('data', (chunk) => (said.err += String(chunk)));
  const ended = new Promise<Ended>((done) => child.once('close', (status) => done({ status, ...said })));
  const alive = (): boolean => isAlive(child);
  onTestFinished(async () => {
    if (alive()) child.kill('SIGKILL');
    await ended;
  });
  return { pid: child.pid ?? 0, ended, alive, err: () => said.err, signal: (name) => void child.kill(name) };
}

const isAlive = (child: ChildProcess): boolean => child.exitCode === null && child.signalCode === null;

/** Runs a verb to its end. */
export const rimehold = (folder: string, ...args: string[]): Promise<Ended> =>
  rimeholdAs({}, folder, ...args);

export async function rimeholdAs(how: How, folder: string, ...args: string[]): Promise<Ended> {
  const running = launch(folder, args, how);
  const late = setTimeout(() => running.signal('SIGKILL'), MOST_LIFE_MS);
  const ended = await running.ended;
  clearTimeout(late);
  expect(ended.status, `rimehold ${args.join(' ')} did not end by itself: ${ended.err}`).not.toBeNull();
  return ended;
}

/** Starts the daemon and waits until it says that it watches. */
export async function startDaemon(folder: string, ...args: string[]): Promise<Process> {
  const daemon = start(folder, 'run', ...args);
  await until(
    'the daemon to watch',
    () => daemon.err().includes('rimehold watches') || !daemon.alive(),
    MOST_LIFE_MS,
  );
  expect(daemon.alive(), daemon.err()).toBe(true);
  return daemon;
}

/** Nothing of the program's insides: no stack, no class or file of its own, no value that is none. */
export function expectNoInsides(text: string): void {
  expect(text).not.toMatch(
    /^\s+at .*(\(|:\d)|node:|file:\/\/|\b[A-Za-z]*Error\b|\bundefined\b|\bNaN\b|\bnull\b/m,
  );
}

/** One sentence for a person, and nothing else: one line, an end, short enough to be read aloud. */
export function expectSentence(text: string): void {
  expectNoInsides(text);
  expect(text).toMatch(/^[^\n]{20,400}\.\n$/);
}

/** The machine-room end of a run: which exit status, and which facts stand in its one sentence. */
export function expectRefusal(ended: Ended, status: number, ...facts: (string | RegExp)[]): void {
  expectSentence(ended.err);
  for (const fact of facts) expect(ended.err).toMatch(typeof fact === 'string' ? literally(fact) : fact);
  expect({ status: ended.status, out: ended.out }).toEqual({ status, out: '' });
}

const literally = (text: string): RegExp => new RegExp(text.replaceAll(/[.*+?^${}()|[\]\\]/g, '\\$&'));

export interface SiteWish {
  readonly url?: string;
  /** Lines of the broker section in place of its url. */
  readonly broker?: string;
  readonly web?: string;
  readonly store?: string;
  readonly log?: string;
  readonly cycle?: string;
  /** Changes of the text, each of which must find its place. */
  readonly changes?: readonly (readonly [string, string])[];
}

const JUNIPER = readFileSync(join(ROOT, 'config/juniper.yaml'), 'utf8');

/** Writes Juniper's own site file into a folder, on a page port that is free, and returns its name. */
export function writeSite(folder: string, wish: SiteWish = {}, name = 'site.yaml'): string {
  const changes: (readonly [string, string])[] = [
    ['url: mqtt://127.0.0.1:1883', wish.broker ?? `url: ${wish.url ?? 'mqtt://127.0.0.1:9'}`],
    ['strategy: planned', `strategy: planned\n  cycle: ${wish.cycle ?? 'PT30S'}`],
    ...(wish.changes ?? []),
  ];
  const text = changes.reduce((now, [from, to]) => {
    expect(now).toContain(from);
    return now.replace(from, to);
  }, JUNIPER);
  const more = [
    `web: { ${wish.web ?? 'port: 0'} }`,
    `store: { ${wish.store ?? 'file: juniper.db'} }`,
    `log: { ${wish.log ?? 'level: error'} }`,
  ];
  writeFileSync(join(folder, name), `${text}\n${more.join('\n')}\n`);
  return name;
}

/** Lines as wide as a terminal at most. */
export function expectNarrow(text: string): void {
  expect(text.split('\n').filter((line) => Array.from(line).length > 80)).toEqual([]);
}

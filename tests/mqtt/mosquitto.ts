/** A real mosquitto for a test: its own free loopback port, its own temporary folder, ended by whoever started it. */
import { spawn, type ChildProcess } from 'node:child_process';
import { pbkdf2Sync, randomBytes } from 'node:crypto';
import { existsSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { connect, createServer, type AddressInfo } from 'node:net';
import { tmpdir } from 'node:os';
import { join } from 'node:path';

const BINARIES = ['/usr/sbin/mosquitto', '/usr/local/sbin/mosquitto', '/opt/homebrew/sbin/mosquitto'];
const BINARY = BINARIES.find((path) => existsSync(path)) ?? null;

/** Whether the binary is there; says loudly that tests are skipped when it is not. */
export const hasMosquitto = BINARY !== null;
if (!hasMosquitto) {
  console.warn(
    'SKIPPED: mosquitto is not installed; tests against a real broker do not run (apt install mosquitto).',
  );
}

export interface Mosquitto {
  readonly port: number;
  readonly url: string;
  /** Temporary folder, for password files and certificates. */
  readonly folder: string;
  /** Ends the broker, keeps port and folder. */
  halt(): Promise<void>;
  resume(): Promise<void>;
  /** Ends the broker and removes its folder. */
  stop(): Promise<void>;
}

export interface MosquittoOptions {
  /** Further lines of the configuration; `FOLDER` in them becomes the temporary folder. */
  readonly lines?: readonly string[];
  readonly anonymous?: boolean;
  /** Files to write into the folder first. */
  readonly files?: Readonly<Record<string, string>>;
}

export async function freePort(): Promise<number> {
  const server = createServer();
  await new Promise<void>((done) => server.listen(0, '127.0.0.1', done));
  const { port } = server.address() as AddressInfo;
  await new Promise((done) => server.close(done));
  return port;
}

/** The file `passwords` as mosquitto 2.0 writes it: PBKDF2-SHA512, 101 rounds. */
export function passwords(user: string, password: string): Record<string, string> {
  const salt = randomBytes(12);
  const hash = pbkdf2Sync(password, salt, 101, 64, 'sha512');
  return { passwords: `${user}:$7$101$${salt.toString('base64')}$${hash.toString('base64')}\n` };
}

export async function startMosquitto(options: MosquittoOptions = {}): Promise<Mosquitto> {
  const folder = mkdtempSync(join(tmpdir(), 'rimehold-broker-'));
  const port = await freePort();
  for (const [name, text] of Object.entries(options.files ?? {})) writeFileSync(join(folder, name), text);
  const lines = [
    // started as root it would otherwise drop to a user that cannot read the folder
    ...(process.getuid?.() === 0 ? ['user root'] : []),
    `listener ${port} 127.0.0.1`,
    `allow_anonymous ${options.anonymous ?? true}`,
    'persistence false',
    'max_queued_messages 100000',
    ...(options.lines ?? []).map((line) => line.replaceAll('FOLDER', folder)),
  ];
  writeFileSync(join(folder, 'mosquitto.conf'), `${lines.join('\n')}\n`);
  const ports = lines.flatMap((line) => (line.startsWith('listener ') ? [Number(line.split(' ')[1])] : []));
  let child = await launch(folder, ports);
  const halt = (): Promise<void> => end(child);
  return {
    port,
    url: `mqtt://127.0.0.1:${port}`,
    folder,
    halt,
    resume: async () => {
      child = await launch(folder, ports);
    },
    stop: async () => {
      await halt();
      rmSync(folder, { recursive: true, force: true });
    },
  };
}

async function launch(folder: string, ports: readonly number[]): Promise<ChildProcess> {
  const child = spawn(BINARY ?? 'mosquitto', ['-c', join(folder, 'mosquitto.conf')], { stdio: 'pipe' });
  let said = '';
  child.stderr?.on('data', (chunk) => (said += String(chunk)));
  for (let tries = 0; tries < 600; tries++) {
    if (child.exitCode !== null) throw new Error(`mosquitto ended: ${said}`);
    const listening = await Promise.all(ports.map(answers));
    if (listening.every(Boolean)) return child;
    await new Promise((done) => setTimeout(done, 25));
  }
  child.kill('SIGKILL');
  throw new Error(`mosquitto does not listen on ${ports.join(', ')}: ${said}`);
}

function answers(port: number): Promise<boolean> {
  return new Promise((resolve) => {
    const socket = connect(port, '127.0.0.1', () => {
      socket.destroy();
      resolve(true);
    });
    socket.on('error', () => resolve(false));
  });
}

function end(child: ChildProcess): Promise<void> {
  if (child.exitCode !== null || child.signalCode !== null) return Promise.resolve();
  return new Promise((resolve) => {
    child.once('exit', () => resolve());
    child.kill('SIGTERM');
  });
}
